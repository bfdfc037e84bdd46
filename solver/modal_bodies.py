"""Rotor and stator laminations as bodies that vibrate: one period each, as it is held.

The rotor's period is that of the stress, its bore free or held by a rigid shaft: with two and more
waves round it, what a real shaft makes of a mode lies between. The stator's is one slot pitch where
all slots are alike, free all round: what its frame adds is not in it.
"""

import math
from dataclasses import replace

import numpy as np

from lamwright.geometry.section import CrossSection, rotor_cell

from .elastic import ElasticBody, ElasticMaterial, elastic_body
from .estimate_mesh import SparseRows, quartered
from .mesh import RegionSettings, mesh_regions
from .mesh_fold import Fan, fold
from .mesh_outline import outline_of
from .mesh_sizes import Across, narrow_places
from .modal import Period
from .refine import circles_of
from .rotor_stress import lamination_circles, sides_of
from .supports import CoupledSides, coupled_sides, unsupported, with_coupled_sides, with_fixed
from .types import PlanarMesh

BORE_TOL = 1e-9  # m
ACROSS = 2.0  # elements across teeth and yoke
COARSEST = 0.5  # largest side over the slot pitch at the bore
SPACING = 0.05  # of that pitch, between places at which a width is looked up


def rotor_period(
    section: CrossSection, mesh: PlanarMesh, material: ElasticMaterial, *, is_held: bool
) -> Period:
    """The rotor lamination's period on a mesh of `mesh_lamination`, bore free or held.

    Args:
        section: the machine's.
        mesh: of the rotor's own period.
        material: its sheet.
        is_held: whether the bore moves with a shaft that is rigid and at rest.
    """
    cell = rotor_cell(section)
    sides = sides_of(cell, mesh)
    supports = unsupported(mesh)
    if is_held:
        radius = np.hypot(mesh.nodes[:, 0], mesh.nodes[:, 1])
        bore = np.flatnonzero(np.abs(radius - cell.shaft_radius) < BORE_TOL)
        supports = with_fixed(with_fixed(supports, bore, 0), bore, 1)
    if sides.first.size:
        supports = with_coupled_sides(supports, mesh, sides)
    return Period(elastic_body(mesh, material), supports, sides, cell.sectors)


def stator_period(
    section: CrossSection, material: ElasticMaterial, teeth_mass_factor: float = 1.0
) -> Period:
    """The stator lamination's period, free all round.

    Args:
        section: the machine's; regions of the stator must be there.
        material: its sheet.
        teeth_mass_factor: mass of the teeth with their winding over that of the bare teeth; what
            the winding stiffens is left out. Teeth end at the radius where the copper ends.
    """
    fan = _stator_fan(section)
    pitch = 2.0 * math.pi * section.stator_bore_radius / section.slots
    wanted: list[Across | None] = [Across(ACROSS)] * len(fan.regions)
    mesh = mesh_regions(
        fan.regions,
        lambda _: COARSEST * pitch,
        RegionSettings(),
        narrow_places(outline_of(fan.regions), wanted, SPACING * pitch),
        fan.angle if fan.has_twin_sides else None,
    )
    return _stator_on(section, fan, mesh, material, teeth_mass_factor)


def finer_rotor(
    section: CrossSection, period: Period, material: ElasticMaterial, *, is_held: bool
) -> tuple[Period, SparseRows]:
    """A rotor's period with every triangle cut into four, and the way from its nodes there.

    Args:
        section: the machine's.
        period: from `rotor_period`.
        material: its sheet.
        is_held: as it is.
    """
    fine = quartered(period.body.mesh, lamination_circles(section))
    return rotor_period(section, fine.mesh, material, is_held=is_held), fine.carry


def finer_stator(
    section: CrossSection,
    period: Period,
    material: ElasticMaterial,
    teeth_mass_factor: float = 1.0,
) -> tuple[Period, SparseRows]:
    """The same for a stator's period; arguments as in `stator_period`."""
    fan = _stator_fan(section)
    edges = (
        e for region in fan.regions for path in (region.outer, *region.holes) for e in path.edges
    )
    fine = quartered(period.body.mesh, circles_of(edges))
    return _stator_on(section, fan, fine.mesh, material, teeth_mass_factor), fine.carry


def _stator_fan(section: CrossSection) -> Fan:
    iron = [region for region in section.stator if region.material == "stator_steel"]
    return fold(iron, section.sector_angle, (), (section.sector_slots,))


def _stator_on(
    section: CrossSection,
    fan: Fan,
    mesh: PlanarMesh,
    material: ElasticMaterial,
    teeth_mass_factor: float,
) -> Period:
    body = elastic_body(mesh, material)
    if fan.has_twin_sides:
        sides = coupled_sides(mesh, fan.angle)
        supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    else:
        none = np.zeros(0, dtype=np.int64)
        sides, supports = CoupledSides(none, none, fan.angle), unsupported(mesh)
    periods = round(2.0 * math.pi / fan.angle)
    return Period(_heavier(section, body, teeth_mass_factor), supports, sides, periods)


def _heavier(section: CrossSection, body: ElasticBody, factor: float) -> ElasticBody:
    """The body with its teeth's density times the factor."""
    copper = [r for r in section.stator if r.material == "copper"]
    root = max(abs(edge.start) for region in copper for edge in region.outer.edges)
    middle = body.mesh.nodes[body.mesh.elements[:, :3]].mean(axis=1)
    is_tooth = np.hypot(middle[:, 0], middle[:, 1]) < root
    return replace(body, density=np.where(is_tooth, factor, 1.0) * body.density)
