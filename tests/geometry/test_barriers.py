"""Barriers against closed forms: a mid-line of length l, thickened by t, has area l t + pi t^2/4.

The law (Pappus): on a bend the inner side loses what the outer gains, so area and perimeter of a
round-ended band depend on its mid-line's length alone: A = l t + pi t^2 / 4, P = 2 l + pi t.
"""

import cmath
import math

import pytest

from lamwright.geometry.bands import band_of
from lamwright.geometry.barrier_sides import TO_RIM, guide_line, seat_of
from lamwright.geometry.cavities import cut_barrier
from lamwright.geometry.curves import area, perimeter
from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.half_barrier import half_barrier
from lamwright.geometry.mid_lines import MM
from lamwright.geometry.rib_cuts import rib_cuts
from tests.outlines import b1_barrier, polygon, turns

R = 39.5 * MM
STRAIGHT = BarrierDesign(
    shape="straight",
    end_angle_deg=33.0,
    thickness_mm=5.0,
    depth_mm=14.0,
    tangential_rib_mm=0.6,
    arm_angle_deg=20.0,
    bend_radius_mm=2.0,
)
DEFAULTS = STRAIGHT.model_copy(
    update={"arm_angle_deg": None, "bend_radius_mm": None, "depth_mm": 9.0}
)


def guide(barrier):
    """The mid-line of a barrier of one thickness."""
    return guide_line(barrier, seat_of(barrier, R, 2), TO_RIM)


def outlines(barrier, **changes):
    barrier = barrier.model_copy(update=changes)
    half = half_barrier(barrier, R, 2)
    return cut_barrier(band_of(half, half), rib_cuts(barrier)).cavities


def two_ribs(fillet_mm):
    return {
        "radial_ribs": 2,
        "radial_rib_mm": 1.0,
        "radial_rib_offset_mm": 4.0,
        "fillet_mm": fillet_mm,
    }


def test_b1_has_its_area_and_perimeter():
    """Check value C10 (closed form, 6 digits): 182.074 mm2 and 80.6835 mm.

    theta (r1^2 - r0^2) + pi 2.5^2 with the half span 33.8439 deg, r0 = 25, r1 = 30 mm.
    """
    (path,) = outlines(b1_barrier())
    assert area(path) / MM**2 == pytest.approx(182.074, abs=5e-4)
    assert perimeter(path) / MM == pytest.approx(80.6835, abs=5e-5)


def test_b1_lies_where_its_definition_puts_it():
    """Cap centres at (33.0211, +-15.3156) mm, concentric sides of 25 and 30 mm; 4 decimals."""
    cap = seat_of(b1_barrier(), R, 2).cap / MM
    assert cap == pytest.approx(33.0211 + 15.3156j, abs=8e-5)
    (path,) = outlines(b1_barrier())
    radii = sorted(edge.radius / MM for edge in path.edges)
    assert radii == pytest.approx([2.5, 2.5, 25.0, 30.0], rel=1e-12)
    sides = [edge for edge in path.edges if edge.radius > 10 * MM]
    for edge in sides:
        assert edge.centre / MM == pytest.approx(39.5 * math.sqrt(2.0), abs=1e-9)


@pytest.mark.parametrize("barrier", [b1_barrier(), STRAIGHT, DEFAULTS], ids=["arc", "arms", "u"])
def test_area_and_perimeter_follow_from_the_mid_line(barrier):
    """A = l t + pi t^2 / 4 and P = 2 l + pi t (Pappus), to rounding."""
    length = 2.0 * sum(edge.length for edge in guide(barrier))
    (path,) = outlines(barrier)
    t = barrier.thickness_mm * MM
    assert area(path) == pytest.approx(length * t + 0.25 * math.pi * t**2, rel=1e-12)
    assert perimeter(path) == pytest.approx(2.0 * length + math.pi * t, rel=1e-12)


@pytest.mark.parametrize("barrier", [b1_barrier(), STRAIGHT, DEFAULTS], ids=["arc", "arms", "u"])
def test_area_by_a_polygon_is_the_exact_one(barrier):
    """Shoelace of a fine polygon, inscribed on one side and circumscribed on the other.

    Chords lie within 1e-7 m of arcs at most 81 mm long: 8e-9 m2 of 2e-4 m2.
    """
    (path,) = outlines(barrier)
    assert polygon(path).area == pytest.approx(area(path), abs=1e-7 * perimeter(path))


@pytest.mark.parametrize("fillet_mm", [0.5, 1.0, 2.5])
@pytest.mark.parametrize("ribs", [1, 2])
def test_ribs_across_a_straight_bottom_take_their_area(fillet_mm, ribs):
    """Each rib takes w t and each of its four corners r^2 (1 - pi/4); to rounding.

    With r = t/2 the corners meet in full rounds, and the same formula holds.
    """
    changes = two_ribs(fillet_mm) if ribs == 2 else {**two_ribs(fillet_mm), "radial_ribs": 1}
    (whole,) = outlines(STRAIGHT, depth_mm=20.0)
    parts = outlines(STRAIGHT, depth_mm=20.0, **changes)
    assert len(parts) == ribs + 1
    corner = (fillet_mm * MM) ** 2 * (1.0 - 0.25 * math.pi)
    taken = ribs * (1.0 * MM * 5.0 * MM + 4.0 * corner)
    assert sum(area(part) for part in parts) == pytest.approx(area(whole) - taken, rel=1e-12)


@pytest.mark.parametrize("fillet_mm", [0.5, 1.0, 2.5])
@pytest.mark.parametrize("ribs", [0, 1, 2])
@pytest.mark.parametrize("barrier", [b1_barrier(), STRAIGHT, DEFAULTS], ids=["arc", "arms", "u"])
def test_outlines_have_no_corner(barrier, ribs, fillet_mm):
    """At the end of every edge the path turns by 0; rounding of radii of 1e-2 m gives 1e-12."""
    for path in outlines(barrier, **{**two_ribs(fillet_mm), "radial_ribs": ribs}):
        assert max(abs(turn) for turn in turns(path)) < 1e-10
        assert min(edge.length for edge in path.edges) > 0.05 * MM


@pytest.mark.parametrize("barrier", [b1_barrier(), STRAIGHT], ids=["arc", "arms"])
def test_cavities_are_simple_counter_clockwise_and_in_order(barrier):
    """No outline crosses itself; areas are positive; from the lower end to the upper one."""
    paths = outlines(barrier, **two_ribs(1.0))
    polygons = [polygon(path) for path in paths]
    assert all(one.is_valid for one in polygons)
    assert all(area(path) > 0.0 for path in paths)
    heights = [one.centroid.y for one in polygons]
    assert heights == sorted(heights)
    assert heights[0] == pytest.approx(-heights[2], rel=1e-9)


@pytest.mark.parametrize("barrier", [b1_barrier(), STRAIGHT, DEFAULTS], ids=["arc", "arms", "u"])
def test_farthest_point_leaves_the_tangential_rib(barrier):
    """No point of the outline lies further out than R - rib, and one lies there; to rounding."""
    (path,) = outlines(barrier)
    reach = max(abs(edge.centre) + edge.radius for edge in path.edges if edge.bulge == 1.0)
    assert reach == pytest.approx(R - 0.6 * MM, rel=1e-12)
    corners = [abs(edge.point(k / 200)) for edge in path.edges for k in range(200)]
    assert max(corners) <= R - 0.6 * MM + 1e-12


def test_arms_of_a_straight_barrier_are_parallel_to_the_d_axes_by_default():
    """The d axis lies at half a pole pitch, 45 degrees, from the q axis of a four-pole rotor."""
    arm = guide(DEFAULTS)[-1]
    assert arm.is_line
    assert math.degrees(cmath.phase(arm.direction(0.5))) == pytest.approx(45.0, abs=1e-10)


def test_bends_have_the_stated_inner_radius():
    """Sides of a bend are concentric: inner radius as stated, outer a thickness more."""
    (path,) = outlines(STRAIGHT)
    bends = {round(edge.radius / MM, 9) for edge in path.edges if not edge.is_line}
    assert bends == {2.5, 2.0, 7.0}  # round ends, inner and outer side of the bends


@pytest.mark.parametrize(
    ("changes", "text"),
    [
        ({"depth_mm": 3.0}, "no further out than its bottom"),
        ({"depth_mm": 60.0}, "does not fit between the shaft axis and the rim"),
        ({"arm_angle_deg": 75.0}, "bend does not fit"),
    ],
)
def test_a_barrier_without_mid_line_is_an_error(changes, text):
    """What `check_design` refuses cannot be drawn by mistake either."""
    with pytest.raises(ValueError, match=text):
        outlines(STRAIGHT, **changes)


@pytest.mark.parametrize(
    ("changes", "text"),
    [
        ({"radial_ribs": 1}, "radial_rib_mm"),
        ({"radial_ribs": 2, "radial_rib_mm": 1.0}, "places"),
    ],
)
def test_ribs_without_size_are_an_error(changes, text):
    """A missing key is named."""
    with pytest.raises(ValueError, match=text):
        outlines(STRAIGHT, **changes)


def test_an_arc_flat_to_rounding_is_an_error():
    """End and bottom of one height to 1e-17 m: no arc, and no division by zero in the checks."""
    barrier = BarrierDesign(
        shape="arc", end_angle_deg=60.0, thickness_mm=2.08, depth_mm=9.63, tangential_rib_mm=0.6
    )
    with pytest.raises(ValueError, match="no further out than its bottom"):
        half_barrier(barrier, 19.7 * MM, 1)
