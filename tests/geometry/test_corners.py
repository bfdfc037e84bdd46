"""Fillets and crossings of lines and arcs against closed forms and the definition of tangency."""

import cmath
import math

import numpy as np
import pytest

from lamwright.geometry.corners import crossings, fillet, intersections, is_within
from lamwright.geometry.curves import Edge, Path, area, closed, line, reversed_path

from .test_curves import random_edge


def polygon(corners, bulges=None):
    bulges = bulges or [0.0] * len(corners)
    ends = corners[1:] + corners[:1]
    return Path(tuple(Edge(a, b, c) for a, b, c in zip(corners, ends, bulges, strict=True)))


def turns(path):
    """The angle by which the path turns at each corner, in rad."""
    edges = path.edges
    return [
        cmath.phase(b.direction(0.0) / a.direction(1.0))
        for a, b in zip(edges, edges[1:] + edges[:1], strict=True)
    ]


SQUARE = [0j, 4 + 0j, 4 + 4j, 4j]


@pytest.mark.parametrize("corner", range(4))
def test_fillet_of_a_right_angle_takes_its_share_of_the_area(corner):
    """A convex right angle loses r^2 (1 - pi/4), closed form; the rest of the path stays."""
    path = fillet(polygon(SQUARE), corner, 1.5)
    assert area(path) == pytest.approx(16.0 - 1.5**2 * (1.0 - 0.25 * math.pi), rel=1e-14)
    assert len(path.edges) == 5


def test_fillet_of_a_clockwise_path_takes_the_same_area():
    """A hole run clockwise is rounded like the region it bounds: r^2 (1 - pi/4), closed form."""
    path = fillet(reversed_path(polygon(SQUARE)), 2, 1.5)
    assert area(path) == pytest.approx(-16.0 + 1.5**2 * (1.0 - 0.25 * math.pi), rel=1e-14)


def test_two_fillets_of_half_the_width_make_a_half_circle():
    """The edge between them is used up: no edge of length 0 is left, the end is one round."""
    path = fillet(fillet(polygon(SQUARE), 2, 2.0), 1, 2.0)
    assert len(path.edges) == 5
    assert all(edge.length > 1.0 for edge in path.edges)
    assert area(path) == pytest.approx(8.0 + 2.0 * math.pi, rel=1e-14)


def test_every_pair_of_lines_and_arcs_is_rounded_tangentially():
    """Line-line, line-arc, arc-line and arc-arc, left and right turns, 200 at random.

    The path turns by 0 at both ends of the fillet (to rounding, 1e-9) and the fillet has the
    asked radius. The fillet is small against the edges so that it always has room.
    """
    rng = np.random.default_rng(11)
    kinds = set()
    for _ in range(200):
        bulges = [float(rng.choice([0.0, rng.uniform(-0.5, 0.5)])) for _ in range(4)]
        corners = [c + complex(*rng.uniform(-0.4, 0.4, 2)) for c in SQUARE]
        sharp = polygon(corners, bulges)
        if abs(turns(sharp)[0]) < 0.2 or abs(turns(sharp)[0]) > 2.6:
            continue
        corner = 1
        if rng.random() < 0.5:  # the same corner run the other way turns to the right
            sharp, corner = reversed_path(sharp), 3
        path = fillet(sharp, corner, 0.05)
        assert len(path.edges) == 5
        assert path.edges[corner].radius == pytest.approx(0.05, rel=1e-9)
        assert abs(turns(path)[corner - 1]) < 1e-9
        assert abs(turns(path)[corner]) < 1e-9
        before, after = sharp.edges[corner - 1], sharp.edges[corner]
        kinds.add((before.is_line, after.is_line, turns(sharp)[corner - 1] > 0.0))
    assert len(kinds) == 8


def test_fillet_that_is_too_large_is_refused():
    """A radius above the edge's length finds no point of contact on it."""
    with pytest.raises(ValueError, match="does not fit on its edges"):
        fillet(polygon(SQUARE), 1, 4.5)


def test_fillet_without_a_corner_is_refused():
    """Where the edges already run on smoothly there is nothing to round."""
    path = closed([line(0j, 1 + 0j), line(1 + 0j, 2 + 0j), line(2 + 0j, 1j), line(1j, 0j)])
    with pytest.raises(ValueError, match="needs a corner"):
        fillet(path, 1, 0.1)


def test_crossings_lie_on_both_curves():
    """300 random pairs: each crossing is on both unbounded curves, to 1e-9 of their size."""
    rng = np.random.default_rng(12)
    found = 0
    for _ in range(300):
        first, second = random_edge(rng), random_edge(rng)
        for point in crossings(first, second):
            found += 1
            for edge in (first, second):
                if edge.is_line:
                    off = ((point - edge.start) / edge.direction(0.5)).imag
                else:
                    off = abs(point - edge.centre) - edge.radius
                assert abs(off) < 1e-8
    assert found > 200


def test_intersections_are_counted_like_sign_changes():
    """On a fine sampling an arc changes sides of a line as often as they intersect.

    600 samples; pairs that meet within 0.01 of an end of the line or arc are left out, there the
    sampling cannot tell.
    """
    rng = np.random.default_rng(13)
    shares, counted = np.linspace(0.0, 1.0, 601), 0
    for _ in range(200):
        cut, edge = line(*(complex(*p) for p in rng.normal(size=(2, 2)))), random_edge(rng, 4.0)
        ends = (cut.start, cut.end, edge.start, edge.end)
        points = intersections(cut, edge)
        if any(abs(point - end) < 0.01 for point in points for end in ends):
            continue
        samples = np.array([edge.point(share) for share in shares])
        local = (samples - cut.start) / (cut.end - cut.start)
        along = 0.5 * (local.real[1:] + local.real[:-1])
        flips = (local.imag[1:] * local.imag[:-1] < 0.0) & (along > 0.0) & (along < 1.0)
        assert len(points) == np.count_nonzero(flips)
        counted += len(points)
    assert counted > 30


def test_touching_circles_have_one_crossing():
    """Two unit circles whose centres lie 2 apart touch at the middle."""
    first, second = Edge(1 + 0j, -1 + 0j, 1.0), Edge(3 + 0j, 1 + 0j, 1.0)
    assert crossings(first, second) == (pytest.approx(1 + 0j, abs=1e-12),)
    assert crossings(first, first) == ()


def test_points_beyond_the_ends_are_not_within():
    """On the half circle above the real axis, the lowest point of the circle is not."""
    half = Edge(1 + 0j, -1 + 0j, 1.0)
    assert is_within(half, 1j)
    assert not is_within(half, -1j)
