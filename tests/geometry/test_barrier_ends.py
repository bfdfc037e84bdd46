"""Sides and ends of barriers of every family, measured on the outline and against closed forms."""

import cmath
import math
from itertools import pairwise

import numpy as np
import pytest

from lamwright.geometry.barrier_sides import TO_RIM, TO_SHAFT, seat_of, side_of
from lamwright.geometry.curves import area, closed, line, reversed_edge
from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.half_barrier import half_barrier
from lamwright.geometry.mid_lines import MM

R = 39.5 * MM
RIB = 0.6 * MM
FAMILIES = ("arc", "straight", "vee", "hyperbolic", "streamline")
ENDS = ("round", "flat", "square")


def barrier(shape, **changes):
    base = {
        "end_angle_deg": 30.0,
        "thickness_mm": 3.0,
        "depth_mm": 10.0,
        "tangential_rib_mm": 0.6,
    }
    if shape == "straight":
        base |= {"arm_angle_deg": 35.0}
    return BarrierDesign(shape=shape, **(base | changes))


def spots(edges, count=400):
    return np.array([edge.point(s) for edge in edges for s in np.linspace(0.0, 1.0, count)])


def kinks(half):
    """Turns in rad at all joints of the upper half, run through from the shaft's side."""
    ends = [(edge.direction(0.0), edge.direction(1.0)) for edge in (*half.to_rim, *half.end)]
    ends += [(-edge.direction(1.0), -edge.direction(0.0)) for edge in reversed(half.to_shaft)]
    return [cmath.phase(b[0] / a[1]) for a, b in pairwise(ends)]


@pytest.mark.parametrize("unlike", [None, 2.0, 4.0])
@pytest.mark.parametrize("end", ENDS)
@pytest.mark.parametrize("shape", FAMILIES)
def test_a_half_is_smooth_square_to_the_q_axis_and_leaves_its_rib(shape, end, unlike):
    """No kinks, vertices as stated, farthest point at the rib; to rounding, 1e-9 rad and 1e-12 m.

    Fitted sides meet the q axis at their exact vertex and tangent, so they are no exception.
    """
    half = half_barrier(barrier(shape, end_shape=end, end_thickness_mm=unlike), R, 2)
    assert max(map(abs, kinks(half))) < 1e-9
    for side, depth in ((half.to_rim, 10.0), (half.to_shaft, 13.0)):
        assert side[0].start == pytest.approx(R - depth * MM, abs=1e-15)
        assert side[0].direction(0.0) == pytest.approx(1j, abs=1e-12)
    out = np.abs(spots((*half.to_shaft, *half.to_rim, *half.end), 2000))
    assert R - out.max() == pytest.approx(RIB, abs=2e-9)
    assert R - out.max() > RIB - 1e-15
    assert abs(half.rib[1] - half.rib[0]) == pytest.approx(RIB, rel=1e-12)
    assert abs(half.rib[1]) == pytest.approx(R, rel=1e-15)


@pytest.mark.parametrize("unlike", [None, 2.0, 4.0])
@pytest.mark.parametrize("shape", FAMILIES)
def test_both_sides_touch_the_round_end(shape, unlike):
    """End circle at the stated angle, half the end's thickness in radius; see kinks above."""
    design = barrier(shape, end_thickness_mm=unlike)
    half = half_barrier(design, R, 2)
    (end,) = half.end
    radius = 0.5 * MM * (unlike or 3.0)
    assert end.radius == pytest.approx(radius, rel=1e-10)
    assert end.centre == pytest.approx(cmath.rect(R - RIB - radius, math.radians(30.0)), abs=1e-13)


@pytest.mark.parametrize("thickness", [2.0, 3.0, 4.2])
def test_sides_of_an_unlike_arc_are_circles_that_touch_the_end(thickness):
    """Tangent circles: centres as far apart as the radii's sum (rim) or difference (shaft)."""
    design = barrier("arc", end_thickness_mm=thickness)
    half = half_barrier(design, R, 2)
    cap, radius = seat_of(design, R, 2).cap, 0.5 * MM * thickness
    (shaft,), (rim,) = half.to_shaft, half.to_rim
    assert abs(rim.centre - cap) == pytest.approx(rim.radius + radius, rel=1e-12)
    assert abs(shaft.centre - cap) == pytest.approx(shaft.radius - radius, rel=1e-12)
    assert abs(rim.centre.imag) < 1e-15
    assert abs(shaft.centre.imag) < 1e-15


def test_a_straight_barrier_has_a_bottom_and_arms_of_their_own_thickness():
    """Bottom 3 mm, arms 2 mm and parallel at 35 degrees, inner bend as stated; to rounding."""
    half = half_barrier(barrier("straight", end_thickness_mm=2.0, bend_radius_mm=1.5), R, 2)
    assert (half.to_rim[0].start - half.to_shaft[0].start).real == pytest.approx(3.0 * MM)
    arms = half.to_rim[-1], half.to_shaft[-1]
    for arm in arms:
        assert cmath.phase(arm.direction(0.5)) == pytest.approx(math.radians(35.0), abs=1e-12)
    gap = ((arms[1].end - arms[0].end) / arms[0].direction(0.5)).imag
    assert gap == pytest.approx(2.0 * MM, rel=1e-10)
    assert half.to_rim[1].radius == pytest.approx(1.5 * MM, rel=1e-12)


def test_a_vee_has_two_edges_a_side_and_its_stated_nose():
    """Nose and arm; the rim's side nose has the stated radius about a point of the q axis."""
    half = half_barrier(barrier("vee", end_thickness_mm=2.0, bend_radius_mm=1.5), R, 2)
    for side in (half.to_rim, half.to_shaft):
        assert [edge.is_line for edge in side] == [False, True]
        assert abs(side[0].centre.imag) < 1e-15
    assert half.to_rim[0].radius == pytest.approx(1.5 * MM, rel=1e-12)


@pytest.mark.parametrize("shape", FAMILIES)
def test_a_flat_end_leaves_a_rib_of_one_width(shape):
    """Every point of the end's arc lies the rib's width from the rim; fillets as stated."""
    half = half_barrier(barrier(shape, end_shape="flat", end_fillet_mm=0.4), R, 2)
    first, along, last = half.end
    widths = R - np.abs(spots((along,)))
    assert widths.max() - widths.min() < 1e-15
    assert widths.max() == pytest.approx(RIB, rel=1e-12)
    assert [first.radius, last.radius] == pytest.approx([0.4 * MM] * 2, rel=1e-10)


@pytest.mark.parametrize("shape", FAMILIES)
def test_a_rib_thickens_toward_the_carrier_as_stated(shape):
    """Thinnest at the rim side's fillet, growing to the inner width at the shaft side's fillet."""
    design = barrier(shape, end_shape="flat", end_fillet_mm=0.4, tangential_rib_inner_mm=0.75)
    half = half_barrier(design, R, 2)
    widths = R - np.abs(spots((half.end[1],)))
    assert np.all(np.diff(widths) > 0.0)
    assert widths[0] == pytest.approx(RIB, rel=1e-12)
    assert widths[-1] == pytest.approx(0.75 * MM, rel=1e-12)
    assert half.rib[0] == pytest.approx(half.end[1].start, abs=1e-15)


@pytest.mark.parametrize("shape", FAMILIES)
def test_a_square_end_lies_across_the_barrier(shape):
    """At a right angle to the mean direction of both sides where they would touch a round end."""
    design = barrier(shape, end_shape="square", end_fillet_mm=0.4)
    half = half_barrier(design, R, 2)
    first, across, last = half.end
    assert across.is_line
    seat = seat_of(design, R, 2)
    both = sum(side_of(design, seat, which).direction for which in (TO_SHAFT, TO_RIM))
    assert abs(cmath.phase(across.direction(0.5) / both) - 0.5 * math.pi) < 1e-12
    assert [first.radius, last.radius] == pytest.approx([0.4 * MM] * 2, rel=1e-10)


@pytest.mark.parametrize("shape", FAMILIES)
def test_ends_differ_in_what_they_cut_away(shape):
    """A flat end reaches into both corners that a round one leaves: more air by a plain amount."""
    areas = {end: _area(half_barrier(barrier(shape, end_shape=end), R, 2)) for end in ENDS}
    assert areas["flat"] > areas["round"]
    assert areas["flat"] - areas["round"] < (3.0 * MM) ** 2


def _area(half):
    inward = [reversed_edge(edge) for edge in reversed(half.to_shaft)]
    axis = line(half.to_shaft[0].start, half.to_rim[0].start)
    return area(closed([axis, *half.to_rim, *half.end, *inward]))


@pytest.mark.parametrize(
    ("changes", "text"),
    [
        ({"end_shape": "flat", "end_fillet_mm": 1.6}, "fillets leave no flat end"),
        ({"end_shape": "square", "end_fillet_mm": 1.6}, "do not fit|leave no square end"),
        ({"end_shape": "flat", "tangential_rib_inner_mm": 5.0}, "too narrow"),
        ({"end_shape": "flat", "tangential_rib_inner_mm": 0.5}, "thinner at its inner side"),
    ],
)
@pytest.mark.parametrize("shape", FAMILIES)
def test_an_end_that_does_not_fit_is_an_error(shape, changes, text):
    """What the checks refuse cannot be drawn by mistake."""
    with pytest.raises(ValueError, match=text):
        half_barrier(barrier(shape, **changes), R, 2)
