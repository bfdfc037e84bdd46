"""Random rotors of every family, end and rib, on stators that fit: each valid one meshes well."""

import cmath
import math
from collections import Counter
from dataclasses import dataclass
from itertools import islice

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Path
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.section import CrossSection, Region, Rib
from lamwright.solver.mesh import mesh_lamination, mesh_section
from lamwright.solver.mesh_checks import least_angles, least_jacobian_share
from lamwright.solver.types import PlanarMesh
from tests.random_outlines import FAMILIES, drawn_rotor

LEAST_ANGLE = 10.0  # degrees, away from corners that the outline itself has
SHARP = math.radians(30.0)  # a corner of the outline this sharp forces a thin triangle
LEAST_ACROSS = 4  # elements across a rib
LEAST_JACOBIAN = 0.1  # of the mean
SLOTS_PER_POLE = 6
ASIDE = (-0.05, 0.05)  # cuts beside a rib's thinnest place, where no row of nodes can hide a side


def test_a_part_of_the_random_rotors_meshes_well():
    """The first 6 of the long run; see there."""
    _run(6)


@pytest.mark.slow
def test_all_random_rotors_mesh_well():
    """500 valid ones: least angle over 10 degrees but at sharp corners, ribs four elements across.

    Both meshes of the rotor, for field and for stress, and the stator's; no element is turned over.
    """
    _run(500)


def _run(count):
    rng = np.random.default_rng(20261202)
    faults, worst, least, families = [], math.inf, math.inf, Counter()
    for number, (design, section) in enumerate(islice(_valid(rng), count)):
        families.update({barrier.shape for barrier in design.rotor.barrier})
        quality = _quality(section)
        worst, least = min(worst, quality.angle), min(least, quality.across)
        if not quality.holds:
            faults.append((number, design, quality))
    print(
        f"{count - len(faults)} of {count} hold; least angle {worst:.1f}, across {least}", families
    )
    assert not faults, [(number, quality) for number, _, quality in faults]


def _valid(rng):
    """Random designs that can be built, with their sections; the families take turns."""
    number = 0
    while True:
        design = _with_stator(drawn_rotor(rng, FAMILIES[number % len(FAMILIES)]))
        number += 1
        try:
            yield design, cross_section(design)
        except GeometryError:
            continue


def _with_stator(design):
    """The random rotor in a stator of its size, with two slots per pole and phase."""
    rotor = design.rotor
    radius = 0.5 * design.stator.bore_diameter_mm - rotor.gap_mm
    gap = round(max(0.25, 0.006 * radius), 3)
    bore, slots = 2.0 * (radius + gap), SLOTS_PER_POLE * rotor.poles
    pitch = math.pi * bore / slots
    depth = min(0.3 * bore, 3.0 * pitch)
    stator = design.stator.model_copy(
        update={
            "bore_diameter_mm": bore,
            "outer_diameter_mm": bore + 2.0 * depth + 1.2 * bore / rotor.poles,
            "slots": slots,
            "tooth_width_mm": 0.5 * pitch,
            "slot_depth_mm": depth,
            "slot_opening_mm": max(0.25 * pitch, 1.05 * rotor.sheet_thickness_mm),
            "opening_depth_mm": max(0.08 * pitch, 0.6 * rotor.sheet_thickness_mm),
            "wedge_depth_mm": 0.05 * depth,
            "slot_corner_radius_mm": 0.1 * pitch,
        }
    )
    winding = design.winding.model_copy(
        update={"coil_span_slots": SLOTS_PER_POLE, "turns_per_coil": 1, "conductor_area_mm2": 0.01}
    )
    return design.model_copy(
        update={
            "rotor": rotor.model_copy(update={"gap_mm": gap}),
            "stator": stator,
            "winding": winding,
        }
    )


@dataclass(frozen=True)
class _Quality:
    """The worst of a design's meshes."""

    angle: float  # degrees
    across: int
    jacobian: float
    triangles: int

    @property
    def holds(self) -> bool:
        return (
            self.angle > LEAST_ANGLE
            and self.across >= LEAST_ACROSS
            and self.jacobian >= LEAST_JACOBIAN
        )


def _quality(section: CrossSection) -> _Quality:
    sector, lamination = mesh_section(section), mesh_lamination(section)
    angles = [
        _least_angle(sector.rotor, section.rotor),
        _least_angle(sector.stator, section.stator),
        _least_angle(lamination, section.rotor[:1]),
    ]
    meshes = (sector.rotor, sector.stator, lamination)
    return _Quality(
        angle=min(angles),
        across=min(
            _across(mesh, rib) for mesh in (sector.rotor, lamination) for rib in section.ribs
        ),
        jacobian=min(float(least_jacobian_share(m.nodes[m.elements]).min()) for m in meshes),
        triangles=sum(len(mesh.elements) for mesh in meshes),
    )


def _least_angle(mesh: PlanarMesh, regions: tuple[Region, ...]) -> float:
    """Least angle in degrees of elements that touch no sharp corner of the outline."""
    angles = least_angles(mesh)
    corners = np.array([c for r in regions for path in (r.outer, *r.holes) for c in _sharp(path)])
    if corners.size:
        at = mesh.nodes[mesh.elements[:, :3]] @ np.array([1.0, 1j])
        away = np.abs(at[..., None] - corners).min(axis=(1, 2))
        angles = angles[away > 1e-9]
    return math.degrees(float(angles.min()))


def _sharp(path: Path) -> list[complex]:
    """Corners of a closed path where one of its two sides takes up less than `SHARP`."""
    edges = path.edges
    return [
        after.start
        for before, after in zip((edges[-1], *edges[:-1]), edges, strict=True)
        if math.pi - abs(cmath.phase(after.direction(0.0) / before.direction(1.0))) < SHARP
    ]


def _across(mesh: PlanarMesh, rib: Rib) -> int:
    """Iron elements that straight cuts beside the rib's thinnest place run through, the fewest."""
    corners = mesh.elements[mesh.elements_of("rotor_iron")][:, :3]
    at = mesh.nodes[corners] @ np.array([1.0, 1j])
    return min(_cut(at, rib, share) for share in ASIDE)


def _cut(corners: np.ndarray, rib: Rib, share: float) -> int:
    a = (corners - rib.start) / (rib.end - rib.start) - 1j * share
    b = np.roll(a, -1, axis=1)
    is_cut = a.imag * b.imag < 0.0
    with np.errstate(divide="ignore", invalid="ignore"):
        place = a.real - a.imag * (b - a).real / (b - a).imag
    first = np.where(is_cut, place, np.inf).min(axis=1)
    last = np.where(is_cut, place, -np.inf).max(axis=1)
    return int(np.sum(np.minimum(last, 1.0) - np.maximum(first, 0.0) > 1e-6))
