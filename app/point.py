"""One field solution of a design: what `point` prints, and the five lines from Python.

from lamwright.app.point import read_machine, solve

machine = read_machine("designs/demo_24s4p_arc.toml")
solution = solve(machine, i_d=8.0, i_q=4.0, angle_deg=2.5)
print(solution.psi_d, solution.psi_q, solution.torque)
"""

import math
from pathlib import Path

from lamwright.geometry import design_file
from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.winding import winding_table
from lamwright.postprocess.skew import mean_solution, step_point
from lamwright.postprocess.tables import point_record
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.field import FieldSettings, MagneticModel, magnetic_model
from lamwright.solver.magnet import MagnetLaw, magnet_law
from lamwright.solver.mesh import mesh_section
from lamwright.solver.steel import reluctivity_law
from lamwright.solver.types import FieldSolution, SectorMesh

from .lamination import section_of

DEGREE = math.pi / 180.0


def read_machine(path: str | Path) -> Machine:
    """The design in the file `path` with its steel cards.

    Raises:
        DesignError: they cannot be read or used; one line for each fault.
    """
    return design_file.read_machine(Path(path))


def model_of(machine: Machine, section: CrossSection, sector: SectorMesh) -> MagneticModel:
    """The magnetic model of a machine whose pole is drawn and meshed."""
    design = machine.design
    rotor_law = reluctivity_law(machine.rotor_steel, design.rotor.stacking_factor)
    # One law for both parts, where they are the same, is evaluated in one go.
    stator_law = rotor_law
    if machine.stator_steel != machine.rotor_steel:
        stator_law = reluctivity_law(machine.stator_steel, design.rotor.stacking_factor)
    settings = FieldSettings(
        shaft_relative_permeability=design.rotor.shaft_relative_permeability,
        magnet=magnet_of(machine),
    )
    winding = winding_table(design)
    return magnetic_model(sector, section, winding, rotor_law, stator_law, settings)


def magnet_of(machine: Machine) -> MagnetLaw | None:
    """The machine's magnets at their temperature, None where it has none."""
    if machine.magnet is None or machine.design.magnet is None:
        return None
    return magnet_law(machine.magnet, machine.design.magnet.temperature_c)


def solve(machine: Machine, *, i_d: float, i_q: float, angle_deg: float) -> FieldSolution:
    """The field at one operating point.

    Args:
        machine: from `read_machine`.
        i_d: d-axis current in A, peak.
        i_q: q-axis current in A, peak.
        angle_deg: position of the rotor's d axis ahead of phase A's axis, mechanical degrees.

    Raises:
        DesignError: the design cannot be drawn.
        NotConverged: Newton's iteration failed.
    """
    for name, value in (("i_d", i_d), ("i_q", i_q), ("angle", angle_deg)):
        if not math.isfinite(value):
            raise LamwrightError(f"{name} = {value}: not a finite number; accepted any finite one")
    section = section_of(machine)
    model = model_of(machine, section, mesh_section(section))
    rotor = OperatingPoint(i_d, i_q, angle_deg * DEGREE)
    offsets, pole_pairs = skew_offsets(machine.design), section.pole_pairs
    points = [step_point(rotor, offset, pole_pairs) for offset in offsets]
    return mean_solution(solve_chain(model, points), offsets, rotor, pole_pairs)


def point(path: Path, *, i_d: float, i_q: float, angle_deg: float) -> dict[str, object]:
    """The solution of `solve` as a record with a unit in every key.

    Raises:
        LamwrightError: as `read_machine` and `solve`.
    """
    machine = read_machine(path)
    solution = solve(machine, i_d=i_d, i_q=i_q, angle_deg=angle_deg)
    return point_record(solution, machine.design.pole_pairs)
