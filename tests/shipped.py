"""The shipped designs, ready to be solved: meshed and modelled once a session."""

import functools
from dataclasses import dataclass
from pathlib import Path

from lamwright.app.point import magnet_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import Machine, read_machine
from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import WindingTable, winding_table
from lamwright.solver.field import FieldSettings, MagneticModel, magnetic_model
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.steel import reluctivity_law
from lamwright.solver.types import SectorMesh

DESIGNS = sorted((Path(__file__).parents[1] / "designs").glob("*.toml"))
# Several laws (no torque on the axes, mirrored currents) are those of machines without magnets.
NAMES = [path.stem for path in DESIGNS if "[magnet]" not in path.read_text()]


@dataclass(frozen=True, eq=False)
class Shipped:
    """One design, drawn and meshed."""

    machine: Machine
    section: CrossSection
    winding: WindingTable
    sector: SectorMesh

    @property
    def rated(self) -> float:
        """Rated current in A, peak."""
        return self.machine.design.duty.rated_current_a


@functools.cache
def shipped(name: str, scale: float = 1.0) -> Shipped:
    """The design called `name`, its mesh `scale` times as coarse as by default."""
    machine = read_machine(next(path for path in DESIGNS if path.stem == name))
    section = cross_section(machine.design)
    sector = mesh_section(section, MeshSettings(scale=scale))
    return Shipped(machine, section, winding_table(machine.design), sector)


@functools.cache
def shipped_model(name: str, scale: float = 1.0, tolerance: float = 1e-4) -> MagneticModel:
    """Its magnetic model."""
    one = shipped(name, scale)
    design = one.machine.design
    law = reluctivity_law(one.machine.rotor_steel, design.rotor.stacking_factor)
    stator_law = reluctivity_law(one.machine.stator_steel, design.rotor.stacking_factor)
    settings = FieldSettings(
        shaft_relative_permeability=design.rotor.shaft_relative_permeability,
        newton=NewtonSettings(tolerance=tolerance),
        magnet=magnet_of(one.machine),
    )
    return magnetic_model(one.sector, one.section, one.winding, law, stator_law, settings)
