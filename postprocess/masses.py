"""Masses of a machine's active parts: lamination stacks, copper and magnets.

Of the sheets' part of the stack (`rotor.stacking_factor`) and of bare copper; shaft, insulation,
rivets, frame and bearings are left out.
"""

from dataclasses import dataclass, field

from lamwright.geometry.curves import area
from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection, Material
from lamwright.geometry.winding import winding_table

from .quantities import FORMULA, shown_as

COPPER_DENSITY = 8930.0  # kg/m^3 at 20 C; textbook matter


@dataclass(frozen=True, slots=True, kw_only=True)
class MassFigures:
    """Masses of the active parts in kg."""

    rotor_iron: float = field(
        metadata=shown_as("rotor_iron_mass_kg", "mass of the rotor's sheets", "kg", exact=FORMULA)
    )
    stator_iron: float = field(
        metadata=shown_as("stator_iron_mass_kg", "mass of the stator's sheets", "kg", exact=FORMULA)
    )
    copper: float = field(
        metadata=shown_as("copper_mass_kg", "mass of the copper", "kg", exact=FORMULA)
    )
    active: float = field(
        metadata=shown_as(
            "active_mass_kg", "mass of sheets, copper and magnets", "kg", exact=FORMULA
        )
    )


def mass_figures(machine: Machine, section: CrossSection) -> MassFigures:
    """Masses of the whole machine."""
    stacked = machine.design.rotor.stacking_factor
    rotor = stacked * _volume(section, "rotor_steel") * _density(machine.rotor_steel)
    stator = stacked * _volume(section, "stator_steel") * _density(machine.stator_steel)
    copper = COPPER_DENSITY * _copper_volume(machine)
    magnets = 0.0
    if machine.magnet is not None:
        density = machine.magnet.density_kg_per_m3.value
        magnets = density * _volume(section, "magnet")
    return MassFigures(
        rotor_iron=rotor,
        stator_iron=stator,
        copper=copper,
        active=rotor + stator + copper + magnets,
    )


def _density(card: SteelCard) -> float:
    return card.density_kg_per_m3.value


def _volume(section: CrossSection, material: Material) -> float:
    """Volume of a material over the whole machine in m^3."""
    regions = (*section.rotor, *section.stator)
    total = sum(
        area(region.outer) + sum(area(hole) for hole in region.holes)  # holes run clockwise
        for region in regions
        if region.material == material
    )
    return section.sectors * section.stack_length * total


def _copper_volume(machine: Machine) -> float:
    """Volume of bare copper in m^3: all turns of three phases with their end turns."""
    design, winding = machine.design, machine.design.winding
    turn = 2e-3 * (design.stator.stack_length_mm + winding.end_turn_length_mm)  # m
    conductor = 1e-6 * winding.conductor_area_mm2 * winding.parallel_paths  # m^2
    return 3.0 * winding_table(design).turns_per_phase * turn * conductor
