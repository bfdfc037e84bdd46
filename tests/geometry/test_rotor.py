"""The rotor of one pole: what its regions share, what its ribs measure, reference rotor B1."""

import cmath
import math
from collections import Counter

import pytest

from lamwright.geometry.curves import area, perimeter, reversed_edge
from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.rotor import rotor_frame, rotor_regions
from tests.outlines import b1_design, plain_design, polygon

MM = 1e-3
RIBBED = BarrierDesign(
    shape="straight",
    end_angle_deg=33.0,
    thickness_mm=5.0,
    depth_mm=18.0,
    tangential_rib_mm=0.6,
    radial_ribs=2,
    radial_rib_mm=1.0,
    radial_rib_offset_mm=4.0,
    arm_angle_deg=20.0,
    bend_radius_mm=2.0,
)


def with_barriers(*barriers):
    design = b1_design()
    return design.model_copy(
        update={"rotor": design.rotor.model_copy(update={"barrier": barriers})}
    )


DESIGNS = {
    "b1": b1_design(),
    "plain": plain_design(),
    "two ribs": with_barriers(RIBBED),
    "one rib, full round": with_barriers(
        RIBBED.model_copy(update={"radial_ribs": 1, "fillet_mm": 2.5})
    ),
    "ribs on an arc": with_barriers(
        b1_design()
        .rotor.barrier[0]
        .model_copy(update={"radial_ribs": 2, "radial_rib_mm": 1.2, "radial_rib_offset_mm": 3.0})
    ),
}


@pytest.fixture(params=DESIGNS.values(), ids=DESIGNS)
def design(request):
    return request.param


def net_area(region):
    return area(region.outer) + sum(area(hole) for hole in region.holes)


def test_b1_has_its_lamination_area_and_cut_length():
    """Check value C10: 3720.99 mm2 of lamination and 646.318 mm of cut, closed form, 6 digits."""
    regions, _ = rotor_regions(b1_design())
    iron = regions[0]
    assert iron.name == "rotor_iron"
    assert 4.0 * net_area(iron) / MM**2 == pytest.approx(3720.99, abs=5e-3)
    circles = 2.0 * math.pi * (39.5 + 12.0)
    holes = 4.0 * sum(perimeter(hole) for hole in iron.holes) / MM
    assert circles + holes == pytest.approx(646.318, abs=5e-4)


def test_b1_has_its_ribs():
    """Check value C10: ribs of 0.6 mm at 24.8825 degrees from the q axis (4 decimals)."""
    _, ribs = rotor_regions(b1_design())
    assert [rib.name for rib in ribs] == ["tangential_1_right", "tangential_1_left"]
    for rib, side in zip(ribs, (-1.0, 1.0), strict=True):
        assert rib.width / MM == pytest.approx(0.6, rel=1e-12)
        from_q = math.degrees(cmath.phase(0.5 * (rib.start + rib.end))) - 45.0
        assert from_q == pytest.approx(side * 24.8825, abs=5e-5)


def test_regions_tile_the_sector(design):
    """Areas add up to the sector of the turning circle, pi r^2 / poles, to rounding."""
    regions, _ = rotor_regions(design)
    radius = rotor_frame(design).circle_radius
    total = sum(net_area(region) for region in regions)
    assert total == pytest.approx(math.pi * radius**2 / design.rotor.poles, rel=1e-13)


def test_inner_edges_are_shared_exactly(design):
    """Each edge is met twice, once in each sense and equal to the last bit, unless on the rim.

    The sector's own outline is three edges on either side ray and the turning circle: seven.
    """
    regions, _ = rotor_regions(design)
    edges = Counter(
        edge for region in regions for path in (region.outer, *region.holes) for edge in path.edges
    )
    assert set(edges.values()) == {1}
    alone = [edge for edge in edges if reversed_edge(edge) not in edges]
    assert len(alone) == 7


def test_paths_close_and_run_the_right_way(design):
    """Each edge starts where the one before ends; outer paths are counter-clockwise."""
    regions, _ = rotor_regions(design)
    for region in regions:
        assert area(region.outer) > 0.0
        assert all(area(hole) < 0.0 for hole in region.holes)
        for path in (region.outer, *region.holes):
            ends = [edge.end for edge in path.edges]
            assert [edge.start for edge in path.edges] == [ends[-1], *ends[:-1]]


def test_the_pole_is_symmetric_to_its_q_axis(design):
    """Mirrored in the q axis each cavity is another one; coordinates of 1e-2 m round at 1e-17."""
    regions, _ = rotor_regions(design)
    turn = cmath.exp(1j * math.pi / design.rotor.poles)
    corners = {
        edge.start for region in regions if region.material == "air" for edge in region.outer.edges
    }
    for corner in corners:
        mirrored = turn * (corner / turn).conjugate()
        assert min(abs(mirrored - other) for other in corners) < 1e-15


def test_radial_ribs_are_as_wide_as_stated(design):
    """Distance of the cavities beside a rib, by fine polygons, is the rib's width.

    The polygons lie within 1e-7 m of the arcs. On the slope of an arc barrier the straight sides
    still face each other here, so the width is that of the file.
    """
    regions, ribs = rotor_regions(design)
    outlines = {region.name: polygon(region.outer) for region in regions}
    for rib in ribs:
        barrier = design.rotor.barrier[rib.barrier - 1]
        if rib.kind == "tangential":
            continue
        letter = rib.name[-1]
        below = outlines[f"barrier_{rib.barrier}_{letter}"]
        above = outlines[f"barrier_{rib.barrier}_{chr(ord(letter) + 1)}"]
        assert rib.width == pytest.approx(barrier.radial_rib_mm * MM, rel=1e-12)
        assert below.distance(above) == pytest.approx(rib.width, abs=2e-7)


def test_ribs_reach_from_edge_to_edge(design):
    """A rib's ends lie on the outlines beside it: on the rim, on a cavity; polygons err 1e-7 m."""
    from shapely import Point

    regions, ribs = rotor_regions(design)
    radius = rotor_frame(design).rotor_radius
    cavities = [polygon(region.outer).exterior for region in regions if "barrier" in region.name]
    for rib in ribs:
        ends = [rib.start] if rib.kind == "tangential" else [rib.start, rib.end]
        if rib.kind == "tangential":
            assert abs(rib.end) == pytest.approx(radius, rel=1e-14)
        for end in ends:
            assert min(one.distance(Point(end.real, end.imag)) for one in cavities) < 2e-7


def test_names_and_materials():
    """Cavities are lettered counter-clockwise where ribs cut a barrier, else the barrier's own."""
    regions, ribs = rotor_regions(DESIGNS["two ribs"])
    assert [(region.name, region.material) for region in regions] == [
        ("rotor_iron", "rotor_steel"),
        ("barrier_1_a", "air"),
        ("barrier_1_b", "air"),
        ("barrier_1_c", "air"),
        ("shaft", "shaft"),
        ("gap_rotor", "air"),
    ]
    angles = [math.atan2(polygon(r.outer).centroid.y, polygon(r.outer).centroid.x) for r in regions]
    assert angles[1] < angles[2] < angles[3]
    assert [rib.name for rib in ribs] == [
        "tangential_1_right",
        "tangential_1_left",
        "radial_1_a",
        "radial_1_b",
    ]
    assert [region.name for region in rotor_regions(b1_design())[0]][1] == "barrier_1"
