"""Quick figures of a design: a coarse field at few rotor positions, the stress on one mesh.

The same steps as `assess` and the same names, with less of everything: a mesh about half as fine
as that of `coarse`, 9 to 14 instead of 30 rotor positions, Newton's iteration ended earlier, no
refinement of the stress mesh, no error bars. How far that is from the full figures is measured in
designs/studies/README.md. Nothing is kept between designs.
"""

import math
from dataclasses import dataclass, replace

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.curves import area, perimeter
from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.section import CrossSection, rotor_cell, rotor_iron
from lamwright.geometry.skew import skew_offsets
from lamwright.postprocess.masses import MassFigures, mass_figures
from lamwright.postprocess.operating import search_positions
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.ribs import RibReport, rib_report
from lamwright.postprocess.skew import mean_solution, step_point
from lamwright.postprocess.summary import magnetic_figures, stress_figures, terminal_figures
from lamwright.postprocess.torque import TorqueWaveform, torque_waveform, waveform_positions
from lamwright.postprocess.verdict import RPM, MagneticFigures, StressFigures, TerminalFigures
from lamwright.solver.chains import OperatingPoint, fanned
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.mesh import mesh_lamination, mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.rotor_stress import StressSettings, sharp_corners, stress_on
from lamwright.solver.types import FieldSolution, StressSolution

from .angle import AngleFound, most_torque
from .point import model_of
from .study_figures import NOT_QUICK

FIELD_MESH = MeshSettings(
    scale=2.0,
    across_rib=2.0,
    across_iron=1.0,
    across_air=0.5,
    across_copper=0.5,
    coarsest=0.12,
    corner=0.5,
    growth=1.0,
    step_angle=math.pi / 4.0,
    mends=True,
)
# At 1e-2 torque and linkages are those of 1e-4 within 1e-4 (measured, three demos).
NEWTON = NewtonSettings(tolerance=1e-2)
# Torques are then off by up to 4e-4. Two of them 2.4 degrees apart sent the angle search 7.6
# degrees away, and 3 % of the torque were lost; with this the angle of 14 random machines is within
# 0.14 of that of a tight iteration on the same mesh.
CLOSE = math.radians(4.0)
LEAST_POSITIONS = 9
STRESS = StressSettings(mesh=MeshSettings(scale=2.0))


@dataclass(frozen=True, slots=True, eq=False)
class QuickField:
    """The field of a quick evaluation, and what it was solved with."""

    model: MagneticModel
    found: AngleFound
    waveform: TorqueWaveform
    magnet_psi_q: float  # at no load, V s
    by_step: tuple[tuple[FieldSolution, ...], ...]  # the waveform's, of each step of the rotor
    means: tuple[FieldSolution, ...]  # the waveform's, of the whole machine

    @property
    def last(self) -> FieldSolution:
        """One of the waveform's, of the first step of the rotor."""
        return self.by_step[0][-1]


@dataclass(frozen=True, slots=True, eq=False)
class QuickWork:
    """All that a quick evaluation has computed."""

    field: QuickField
    solution: StressSolution
    ribs: RibReport
    magnetic: MagneticFigures
    terminal: TerminalFigures
    stress: StressFigures
    masses: MassFigures


def quick_figures(section: CrossSection, work: QuickWork) -> dict[str, float]:
    """Figures of what was computed by their keys, in their units."""
    groups = (work.magnetic, work.terminal, work.stress, work.masses)
    found = {one.key: float(one.value) for group in groups for one in figures_of(group)}
    contours = lamination_contours(section)
    found["lamination_area_mm2"] = 1e6 * sum(area(one.path) for one in contours)
    found["lamination_perimeter_mm"] = 1e3 * sum(perimeter(one.path) for one in contours)
    return {key: value for key, value in found.items() if key not in NOT_QUICK}


def quick_work(machine: Machine, section: CrossSection) -> QuickWork:
    """The computation behind the figures.

    Raises:
        GeometryError: the lamination has a corner without a finite stress.
        MeshError: it cannot be meshed.
        NotConverged: an iteration did not end.
        LamwrightError: the rotor makes no torque.
    """
    field = quick_field(machine, section)
    return work_of(machine, section, field, *quick_stress(machine, section))


def work_of(
    machine: Machine,
    section: CrossSection,
    field: QuickField,
    solution: StressSolution,
    ribs: RibReport,
) -> QuickWork:
    """All figures from the field and the stress."""
    magnetic = magnetic_figures(field.waveform, field.magnet_psi_q)
    return QuickWork(
        field=field,
        solution=solution,
        ribs=ribs,
        magnetic=magnetic,
        terminal=terminal_figures(machine.design, magnetic),
        stress=stress_figures(ribs),
        masses=mass_figures(machine, section),
    )


def positions_of(pole_pairs: int, slots: int) -> int:
    """Rotor positions of the waveform: the angle search's among them."""
    least = len(search_positions(pole_pairs, slots))
    return least * max(1, math.ceil(LEAST_POSITIONS / least))


def quick_field(machine: Machine, section: CrossSection) -> QuickField:
    """The waveform at the angle of most torque."""
    design = machine.design
    model = model_of(machine, section, mesh_section(section, FIELD_MESH))
    model = replace(model, settings=replace(model.settings, newton=NEWTON))
    found = most_torque(model, design, lambda share: None, CLOSE)
    offsets, pole_pairs = skew_offsets(design), section.pole_pairs
    count = positions_of(pole_pairs, section.slots)
    places = waveform_positions(pole_pairs, count).tolist()
    points = [OperatingPoint(found.i_d, found.i_q, place) for place in places]
    by_step = tuple(
        _chained(model, [step_point(point, offset, pole_pairs) for point in points], found, k)
        for k, offset in enumerate(offsets)
    )
    together = zip(zip(*by_step, strict=True), points, strict=True)
    means = tuple(mean_solution(steps, offsets, point, pole_pairs) for steps, point in together)
    bare = 0.0
    if machine.magnet is not None:
        bare = solve_point(model, 0.0, 0.0, places[0]).psi_q
    waveform = torque_waveform(means, pole_pairs)
    return QuickField(model, found, waveform, bare, by_step, means)


def _chained(
    model: MagneticModel, points: list[OperatingPoint], found: AngleFound, step: int
) -> tuple[FieldSolution, ...]:
    """Fields of one step of the rotor, in chains away from those of the angle search."""
    near = found.last[step]
    at: dict[int, FieldSolution] = {}
    for start, chain in fanned([p.position for p in points], [f.position for f in near]):
        field = near[start]
        for k in chain:
            if k not in at:
                point = points[k]
                at[k] = solve_point(model, point.i_d, point.i_q, point.position, field)
            field = at[k]
    return tuple(at[k] for k in range(len(points)))


def quick_stress(machine: Machine, section: CrossSection) -> tuple[StressSolution, RibReport]:
    """The lamination at overspeed, on the mesh that `assess` begins with."""
    cell = rotor_cell(section)
    faults = tuple(fault for iron in rotor_iron(cell) for fault in sharp_corners(iron))
    if faults:
        raise GeometryError(faults)
    duty = machine.design.duty
    speed = duty.overspeed_factor * duty.maximum_speed_rpm / RPM
    mesh = mesh_lamination(section, STRESS.mesh)
    solution = stress_on(section, mesh, machine.rotor_steel, speed, STRESS)
    strength = 1e6 * machine.rotor_steel.yield_strength_mpa.value
    return solution, rib_report(solution, section, strength)
