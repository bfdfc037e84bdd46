"""A machine as it is made: meshes moved, steel changed, of the same topology as those as drawn.

Since meshes only move, differences between one made machine and another hold no change of mesh,
and every field starts from that of the drawn machine at the same position.
Axes: n_motion causes that move an outline.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from lamwright.geometry.design import SteelCard
from lamwright.geometry.section import CrossSection, Rib, rotor_cell

from .cut_motion import MachineMotion
from .cut_steel import cut_steel_law, edge_share
from .rotor_stress import StressSettings, stress_on
from .steel import SteelLaw
from .types import FloatArray, PlanarMesh, SectorMesh, StressSolution


@dataclass(frozen=True, slots=True)
class Deviation:
    """How one made machine differs from the drawn one."""

    moved: tuple[float, ...]  # (n_motion,), in m, mm or degrees, as the motions are stated
    flux_share: float = 1.0  # of the card's flux density at a field strength
    stacking: float = 0.0  # added to the stacking factor
    edge_depth: float = 0.0  # m
    yield_share: float = 1.0  # of the card's yield strength


@dataclass(frozen=True, slots=True, eq=False)
class SpoiltEdges:
    """The layer that cutting has spoilt: distances of both parts' steel to their cut edges."""

    rotor: FloatArray  # (n_elem, n_small, 3), m, see `edge_distances`
    stator: FloatArray
    drop: float  # of the permeability

    def shares(self, depth: float) -> tuple[FloatArray, FloatArray]:
        """Shares (n_elem,) of flux density of the rotor's and the stator's steel elements."""
        return (
            edge_share(self.rotor, depth, self.drop),
            edge_share(self.stator, depth, self.drop),
        )


def made_section(
    section: CrossSection, motions: Sequence[MachineMotion], moved: Sequence[float]
) -> CrossSection:
    """The section with its radii and stack as made; its regions stay those of the drawing."""
    rim, bore, stack = (
        sum(amount * getattr(motion.sizes, name) for motion, amount in _pairs(motions, moved))
        for name in ("rim_radius", "bore_radius", "stack_length")
    )
    ring = section.ring_radius
    return replace(
        section,
        rotor_radius=section.rotor_radius + rim,
        ring_radius=None if ring is None else ring + rim,
        stator_bore_radius=section.stator_bore_radius + bore,
        stack_length=section.stack_length + stack,
    )


def made_sector(
    sector: SectorMesh, motions: Sequence[MachineMotion], moved: Sequence[float]
) -> SectorMesh:
    """The field's meshes as made."""
    pairs = _pairs(motions, moved)
    circle = sum(amount * motion.sizes.circle_radius for motion, amount in pairs)
    return replace(
        sector,
        rotor=_moved(sector.rotor, [(motion.rotor, amount) for motion, amount in pairs]),
        stator=_moved(sector.stator, [(motion.stator, amount) for motion, amount in pairs]),
        circle_radius=sector.circle_radius + circle,
    )


def made_laws(
    laws: tuple[SteelLaw, SteelLaw], edges: SpoiltEdges | None, deviation: Deviation
) -> tuple[SteelLaw, SteelLaw]:
    """Laws of rotor and stator with the share of flux density of each element."""
    if edges is not None:
        shares = edges.shares(deviation.edge_depth)
    elif deviation.flux_share == 1.0:
        return laws
    else:
        shares = (np.ones(1), np.ones(1))
    rotor, stator = (
        cut_steel_law(law, deviation.flux_share * share)
        for law, share in zip(laws, shares, strict=True)
    )
    return rotor, stator


def made_stress(
    section: CrossSection,
    mesh: PlanarMesh,
    motions: Sequence[MachineMotion],
    moved: Sequence[float],
    card: SteelCard,
    speed: float,
) -> StressSolution:
    """Stress of the lamination as made at `speed` in rad/s; ribs are not told apart.

    Args:
        section: as drawn.
        mesh: of the lamination as drawn, refined as far as the peak needs.
        motions: of the meshes.
        moved: their amounts.
        card: the steel.
        speed: rad/s.
    """
    made = _moved(mesh, [(motion.lamination, x) for motion, x in _pairs(motions, moved)])
    cell = rotor_cell(section)
    # The drawn ribs' ends may lie outside of the moved steel; only their loads are lost.
    inner = replace(cell, ribs=tuple(_shortened(rib) for rib in cell.ribs))
    return stress_on(inner, made, card, speed, StressSettings())


def standing_out(solution: StressSolution) -> float:
    """By how much in m the farthest point of the rotor stands out beyond that at rest."""
    radius = np.hypot(solution.mesh.nodes[:, 0], solution.mesh.nodes[:, 1])
    outward = np.sum(solution.displacement * solution.mesh.nodes, axis=1) / radius
    return float((radius + outward).max() - radius.max())


def _shortened(rib: Rib) -> Rib:
    middle = 0.5 * (rib.start + rib.end)
    return replace(rib, start=0.5 * (middle + rib.start), end=0.5 * (middle + rib.end))


def _pairs(
    motions: Sequence[MachineMotion], moved: Sequence[float]
) -> list[tuple[MachineMotion, float]]:
    return list(zip(motions, moved, strict=True))


def _moved(mesh: PlanarMesh, motions: Sequence[tuple[FloatArray, float]]) -> PlanarMesh:
    nodes = mesh.nodes + sum((x * motion for motion, x in motions), np.zeros_like(mesh.nodes))
    return replace(mesh, nodes=nodes)
