"""Meshes of plain regions and of machines' poles: exact areas, valid elements, matching nodes."""

import cmath
import math
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import numpy as np
import pytest
from scipy.spatial import cKDTree

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge, Path, arc, area, circle, line, reversed_path
from lamwright.geometry.design_file import read_design
from lamwright.geometry.section import CrossSection, Region
from lamwright.solver.mesh import (
    RegionSettings,
    mesh_lamination,
    mesh_regions,
    mesh_section,
)
from lamwright.solver.mesh_checks import element_areas, least_angles, least_jacobian_share
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.mesh_sizes import SizeSources
from lamwright.solver.types import PlanarMesh, SectorMesh
from tests import machine_m24
from tests.outlines import DESIGNS
from tests.random_designs import random_design

RADIUS = 10e-3  # m, of the hole in the plate
SHIPPED = sorted(path.stem for path in DESIGNS.glob("demo_*.toml"))


def plate(centre: complex = 0j) -> list[Region]:
    """A square plate of 80 mm with a round hole that is filled with air."""
    hole = circle(centre, RADIUS)
    corners = [0.04 * c for c in (-1 - 1j, 1 - 1j, 1 + 1j, -1 + 1j)]
    sides = tuple(line(a, b) for a, b in zip(corners, corners[1:] + corners[:1], strict=True))
    return [
        Region("plate", "rotor_steel", Path(sides), (reversed_path(hole),)),
        Region("hole", "air", hole),
    ]


def lopsided_sector(angle: float) -> list[Region]:
    """An annulus sector with a round hole near its side at angle 0."""
    turn = cmath.exp(1j * angle)
    ends = (0.01 + 0j, 0.04 + 0j, 0.04 * turn, 0.01 * turn)
    hole = circle(0.025 * cmath.exp(0.15j), 2e-3)
    outer = Path(
        (
            line(ends[0], ends[1]),
            arc(ends[1], ends[2], 0j, ccw=True),
            line(ends[2], ends[3]),
            arc(ends[3], ends[0], 0j, ccw=False),
        )
    )
    return [
        Region("iron", "rotor_steel", outer, (reversed_path(hole),)),
        Region("hole", "air", hole),
    ]


def by_edge(edge: Edge) -> float:
    return 5e-3 if edge.is_line else 2e-3


def places(mesh: PlanarMesh) -> np.ndarray:
    return mesh.nodes @ np.array([1.0, 1.0j])


def region_area(region: Region) -> float:
    return area(region.outer) + sum(area(hole) for hole in region.holes)


def areas_by_region(mesh: PlanarMesh) -> np.ndarray:
    return np.bincount(mesh.region_of_elem, element_areas(mesh), len(mesh.region_names))


def assert_same(first: PlanarMesh, second: PlanarMesh) -> None:
    assert np.array_equal(first.nodes, second.nodes)
    assert np.array_equal(first.elements, second.elements)
    assert np.array_equal(first.region_of_elem, second.region_of_elem)


def assert_sides_match(mesh: PlanarMesh, angle: float) -> None:
    """Nodes on the side at `angle` are those at angle 0, turned, to 1e-12 of the largest radius."""
    z = places(mesh)
    back = z * cmath.exp(-1j * angle)
    lower = np.sort(z[np.abs(z.imag) < 1e-9].real)
    upper = np.sort(back[np.abs(back.imag) < 1e-9].real)
    assert lower.size == upper.size > 2
    assert np.allclose(lower, upper, rtol=0.0, atol=1e-12 * np.abs(z).max())


@pytest.fixture(scope="module", params=[*SHIPPED, "m24_r1", "m24_r2", "m24_b1"])
def section(request: pytest.FixtureRequest) -> CrossSection:
    """Every shipped design, and the reference machine with open, round-ended and no barriers."""
    name: str = request.param
    if name.startswith("m24"):
        made: CrossSection = getattr(machine_m24, name.removeprefix("m24_"))()
        return made
    return cross_section(read_design(DESIGNS / f"{name}.toml"))


@pytest.fixture(scope="module")
def sector(section: CrossSection) -> SectorMesh:
    return mesh_section(section)


@pytest.mark.parametrize("steps", [8, 24, 60])
def test_area_of_a_disc_is_that_of_its_parabolas(steps):
    """Three nodes on an arc of angle f draw a parabola: area 2/3 chord x sagitta (Archimedes).

    Second-order elements are exact for it, so only rounding may differ.
    """
    angle = 2.0 * math.pi / steps
    settings = RegionSettings(step_angle=angle)
    mesh = mesh_regions(plate()[1:], lambda edge: 1.0, settings)
    chord, sagitta = 2.0 * RADIUS * math.sin(angle / 2), RADIUS * (1.0 - math.cos(angle / 2))
    polygon = 0.5 * steps * RADIUS**2 * math.sin(angle)
    exact = polygon + steps * 2.0 / 3.0 * chord * sagitta
    assert element_areas(mesh).sum() == pytest.approx(exact, rel=1e-12)


def test_areas_of_plate_and_hole_by_default():
    """Default steps of 15 degrees miss n f^5 / (960 pi) = 1e-5 of a disc (derived)."""
    regions = plate(3e-3 + 1e-3j)
    mesh = mesh_regions(regions, lambda edge: 5e-3)
    for found, region in zip(areas_by_region(mesh), regions, strict=True):
        assert found == pytest.approx(region_area(region), rel=1.1e-5)
    assert areas_by_region(mesh).sum() == pytest.approx(0.08**2, rel=1e-13)


def test_nodes_of_arcs_lie_on_them():
    """Mid-side nodes too, to 1e-12 m: the outline analysed is the outline punched."""
    mesh = mesh_regions(plate(), by_edge)
    in_plate = np.isin(np.arange(len(mesh.nodes)), mesh.elements[mesh.region_of_elem == 0])
    in_hole = np.isin(np.arange(len(mesh.nodes)), mesh.elements[mesh.region_of_elem == 1])
    rim = np.abs(places(mesh)[in_plate & in_hole])
    assert rim.size >= 2 * 24
    assert np.allclose(rim, RADIUS, rtol=0.0, atol=1e-12)


def test_numbering_is_whole_and_regions_keep_their_order():
    """Every node is used, elements are counter-clockwise, names follow the regions."""
    mesh = mesh_regions(plate(), by_edge)
    assert np.array_equal(np.unique(mesh.elements), np.arange(len(mesh.nodes)))
    assert mesh.region_names == ("plate", "hole")
    assert element_areas(mesh).min() > 0.0
    middle = 0.5 * (
        mesh.nodes[mesh.elements[:, [0, 1, 0]]] + mesh.nodes[mesh.elements[:, [1, 2, 2]]]
    )
    side = np.linalg.norm(mesh.nodes[mesh.elements[:, 1]] - mesh.nodes[mesh.elements[:, 0]], axis=1)
    away = np.linalg.norm(mesh.nodes[mesh.elements[:, 3:]] - middle, axis=2)
    # The sagitta of a step of 15 degrees is 3 % of its chord: a wrong order would miss by half.
    assert np.all(away.max(axis=1) < 0.05 * side)
    assert not mesh.nodes.flags.writeable


def test_thin_sliver_beside_coarse_arcs_is_made_valid():
    """Steps of 15 degrees sag by 0.086 mm, more than the ring's 0.05 mm: elements would fold."""
    outer, inner = circle(0j, RADIUS), circle(0j, RADIUS - 5e-5)
    ring = [Region("ring", "air", outer, (reversed_path(inner),))]
    mesh = mesh_regions(ring, lambda edge: 1.0)
    assert least_jacobian_share(mesh.nodes[mesh.elements]).min() > 0.1
    assert areas_by_region(mesh)[0] == pytest.approx(region_area(ring[0]), rel=1e-6)


def test_points_inside_are_refined_as_asked():
    """Elements at the points have sides near the wanted ones: within a factor 1.5, by design."""
    wanted = SizeSources(np.array([0.02 + 0.02j, 0.03 - 0.01j]), np.array([2e-4, 5e-4]))
    mesh = mesh_regions(plate(), by_edge, refine_at=wanted)
    middles = places(mesh)[mesh.elements[:, :3]].mean(axis=1)
    for point, size in zip(wanted.points, wanted.sizes, strict=True):
        nearest = element_areas(mesh)[np.argmin(np.abs(middles - point))]
        assert size / 1.5 < math.sqrt(4.0 / math.sqrt(3.0) * nearest) < 1.5 * size


def test_sides_of_any_sector_match_when_asked():
    """A hole near one side refines that side; the other must follow."""
    angle = math.radians(60.0)
    mesh = mesh_regions(lopsided_sector(angle), lambda e: 4e-3 if e.radius > 5e-3 else 5e-4)
    with pytest.raises(AssertionError):
        assert_sides_match(mesh, angle)
    matched = mesh_regions(
        lopsided_sector(angle), lambda e: 4e-3 if e.radius > 5e-3 else 5e-4, turn_sides=angle
    )
    assert_sides_match(matched, angle)


def test_open_path_is_refused():
    open_path = Path((line(0j, 1 + 0j), line(1 + 0j, 1j)))
    with pytest.raises(ValueError, match="region gap: a path is not closed"):
        mesh_regions([Region("gap", "air", open_path)], by_edge)


def test_sizes_by_table_equal_sizes_by_function():
    regions = plate()
    edges = {e for region in regions for path in (region.outer, *region.holes) for e in path.edges}
    assert_same(
        mesh_regions(regions, by_edge), mesh_regions(regions, {e: by_edge(e) for e in edges})
    )


def test_pole_is_covered_region_by_region(section, sector):
    """Areas of the meshed regions are those of the outline.

    Arcs are parabolas by steps of 30 degrees at most: 2e-4 of a region of arcs, see the disc.
    """
    for mesh, regions in ((sector.rotor, section.rotor), (sector.stator, section.stator)):
        assert mesh.region_names == tuple(region.name for region in regions)
        exact = np.array([region_area(region) for region in regions])
        assert areas_by_region(mesh) == pytest.approx(exact, rel=2e-4)
        assert areas_by_region(mesh).sum() == pytest.approx(exact.sum(), rel=1e-5)


def test_pole_has_valid_elements(sector):
    """Jacobians keep 0.1 of their mean at the least; angles above 10 degrees, measured 13."""
    for mesh in (sector.rotor, sector.stator):
        assert least_jacobian_share(mesh.nodes[mesh.elements]).min() > 0.1
        assert np.degrees(least_angles(mesh).min()) > 10.0
        assert np.array_equal(np.unique(mesh.elements), np.arange(len(mesh.nodes)))


def test_circle_nodes_are_evenly_spaced(section, sector):
    """Both halves of the gap have the nodes that make turning a renumbering, to 1e-12."""
    step = math.pi / section.pole_pairs / (2 * sector.n_circle)
    due = section.circle_radius * np.exp(1j * step * np.arange(2 * sector.n_circle + 1))
    for mesh in (sector.rotor, sector.stator):
        z = places(mesh)
        on_circle = z[np.abs(np.abs(z) - section.circle_radius) < 1e-9]
        found = on_circle[np.argsort(np.angle(on_circle))]
        assert np.allclose(found, due, rtol=0.0, atol=1e-12 * section.circle_radius)


def test_sides_of_the_pole_match(section, sector):
    for mesh in (sector.rotor, sector.stator):
        assert_sides_match(mesh, math.pi / section.pole_pairs)


def test_pole_is_its_own_mirror_image(section, sector):
    """Exact symmetry about the pole's middle: the mesh makes no torque on the axes."""
    turn = cmath.exp(1j * math.pi / section.pole_pairs)
    for mesh in (sector.rotor, sector.stator):
        middles = places(mesh)[mesh.elements[:, :3]].mean(axis=1)
        image = middles.conj() * turn
        tree = cKDTree(np.column_stack([middles.real, middles.imag]))
        assert tree.query(np.column_stack([image.real, image.imag]))[0].max() < 1e-14


def test_gap_has_two_layers_on_each_side(section, sector):
    """A radial line between nodes crosses at least two elements on each side of the circle."""
    for mesh in (sector.rotor, sector.stator):
        gap = mesh.elements[mesh.elements_of("gap_")][:, :3]
        radii = np.unique(np.round(np.abs(places(mesh)[gap.ravel()]), 9))
        assert radii.size == 3
        angle = np.angle(places(mesh)[gap])
        for probe in np.linspace(0.0501, 0.9507, 13) * math.pi / section.pole_pairs:
            assert np.sum((angle.min(axis=1) < probe) & (angle.max(axis=1) > probe)) >= 2


def crossed_elements(mesh: PlanarMesh, start: complex, end: complex) -> int:
    """Number of iron elements that a straight cut runs through."""
    iron = mesh.elements[mesh.elements_of("rotor_iron")][:, :3]
    a = (places(mesh)[iron] - start) / (end - start)
    b = np.roll(a, -1, axis=1)
    is_cut = a.imag * b.imag < 0.0
    with np.errstate(divide="ignore", invalid="ignore"):
        share = a.real - a.imag * (b - a).real / (b - a).imag
    first = np.where(is_cut, share, np.inf).min(axis=1)
    last = np.where(is_cut, share, -np.inf).max(axis=1)
    return int(np.sum(np.minimum(last, 1.0) - np.maximum(first, 0.0) > 1e-6))


@pytest.mark.parametrize("name", SHIPPED)
@pytest.mark.parametrize("mesher", [lambda s: mesh_section(s).rotor, mesh_lamination])
def test_ribs_are_four_elements_across(name, mesher):
    """Cut a little beside the thinnest place, where no row of nodes can hide an element."""
    section = cross_section(read_design(DESIGNS / f"{name}.toml"))
    mesh = mesher(section)
    for rib in section.ribs:
        aside = 0.05j * (rib.end - rib.start)
        assert crossed_elements(mesh, rib.start + aside, rib.end + aside) >= 4, rib.name


def test_half_the_scale_has_four_times_the_triangles():
    """The knob of convergence studies; steps of whole counts leave 3 to 5."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    counts = []
    for scale in (0.5, 0.25):
        sector = mesh_section(section, MeshSettings(scale=scale))
        counts.append(len(sector.rotor.elements) + len(sector.stator.elements))
        assert sector.n_circle >= 180 / scale
    assert 3.0 < counts[1] / counts[0] < 5.0


def test_lamination_is_the_iron_alone(section):
    mesh = mesh_lamination(section)
    iron = next(region for region in section.rotor if region.name == "rotor_iron")
    assert areas_by_region(mesh)[0] == pytest.approx(region_area(iron), rel=2e-5)
    assert least_jacobian_share(mesh.nodes[mesh.elements]).min() > 0.1
    assert_sides_match(mesh, math.pi / section.pole_pairs)


def test_lamination_is_refined_where_asked():
    """A point asked for on one half refines its mirror image too: the mesh stays symmetric."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    rib = section.ribs[0]
    wanted = SizeSources(np.array([rib.start]), np.array([2e-5]))
    coarse, fine = mesh_lamination(section), mesh_lamination(section, refine_at=wanted)
    image = rib.start.conjugate() * cmath.exp(1j * math.pi / section.pole_pairs)
    for point in (rib.start, image):
        near = np.sort(np.abs(places(fine) - point))
        # The sixth nearest node lies about one wanted side away, mid-side nodes at half of it.
        assert near[5] < 3e-5
        assert np.sort(np.abs(places(coarse) - point))[5] > 5e-5


def test_rotor_without_symmetry_is_meshed_whole():
    """No mirror image, so no folding: the sides must still match and the circle be even."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    iron = section.rotor[0]
    vent = circle(20e-3 * cmath.exp(0.15j), 1.5e-3)
    rotor = (
        replace(iron, holes=(*iron.holes, reversed_path(vent))),
        Region("barrier_9", "air", vent),
        *section.rotor[1:],
    )
    mesh = mesh_section(replace(section, rotor=rotor)).rotor
    exact = np.array([region_area(region) for region in rotor])
    assert areas_by_region(mesh) == pytest.approx(exact, rel=2e-4)
    assert_sides_match(mesh, math.pi / section.pole_pairs)


def test_same_input_gives_the_same_arrays_in_any_thread():
    """Again in this process, and in three threads at once (gmsh's model is one per process)."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    first, second = mesh_section(section), mesh_section(section)
    with ThreadPoolExecutor(3) as pool:
        others = list(pool.map(mesh_section, [section] * 3))
    for other in (second, *others):
        assert_same(first.rotor, other.rotor)
        assert_same(first.stator, other.stator)


@pytest.mark.parametrize("seed", range(8))
def test_random_machines_mesh(seed):
    """Any design that can be built can be meshed, and well.

    Outside the gap no angle is below 15 degrees but where the outline itself has a sharper corner
    (measured on 40 machines: 18); in the gap's flat rings 10 (measured 12).
    """
    section = cross_section(random_design(np.random.default_rng(seed)))
    sector = mesh_section(section)
    for mesh, regions in (
        (sector.rotor, section.rotor),
        (sector.stator, section.stator),
        (mesh_lamination(section), section.rotor[:1]),
    ):
        assert least_jacobian_share(mesh.nodes[mesh.elements]).min() > 0.1
        exact = np.array([region_area(region) for region in regions])
        assert areas_by_region(mesh) == pytest.approx(exact, rel=3e-4)
        assert_sides_match(mesh, math.pi / section.pole_pairs)
        angles = least_angles(mesh)
        gap = mesh.elements_of("gap_")
        assert np.all(np.degrees(angles[gap]) > 10.0)
        sharpest = min(sharpest_corner(region.outer) for region in regions)
        assert np.delete(angles, gap).min() > min(math.radians(15.0), 0.99 * sharpest)


def sharpest_corner(path: Path) -> float:
    """Least angle in rad that the region takes up at a corner of its outer path."""
    edges = path.edges
    turns = [
        cmath.phase(after.direction(0.0) / before.direction(1.0))
        for before, after in zip(edges, (*edges[1:], edges[0]), strict=True)
    ]
    return math.pi - max(turns)
