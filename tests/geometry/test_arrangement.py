"""Loose pieces to faces: areas in closed form, and what is healed or reported."""

import math

import numpy as np
import pytest

from lamwright.geometry.arrangement import arrangement, winds_about
from lamwright.geometry.curves import Edge, area, circle, line

TOL = 1e-5  # m


def sizes(made):
    return sorted(sum(area(made.path(loop)) for loop in face.loops) for face in made.faces)


def square(side, at=0j):
    corners = [at, at + side, at + side * (1 + 1j), at + 1j * side]
    return [line(a, b) for a, b in zip(corners, corners[1:] + corners[:1], strict=True)]


def test_crossing_squares_make_three_faces():
    """Two unit squares (1 mm) overlap by a quarter: 0.75, 0.25, 0.75 mm2 (closed form)."""
    made = arrangement([*square(1e-3), *square(1e-3, 0.5e-3 + 0.5e-3j)], 1e-7)
    assert sizes(made) == pytest.approx([0.25e-6, 0.75e-6, 0.75e-6], rel=1e-12)


def test_a_hole_belongs_to_the_face_around_it():
    """Ring of two concentric circles and a line across the inner one: three faces."""
    pieces = [*circle(0j, 0.03).edges, *circle(0j, 0.01).edges, line(-0.01 + 0j, 0.01 + 0j)]
    half = math.pi * 0.01**2 / 2
    assert sizes(arrangement(pieces, TOL)) == pytest.approx(
        [half, half, math.pi * (0.03**2 - 0.01**2)], rel=1e-12
    )


def test_gaps_are_healed_and_told():
    """Corners up to 5 um apart close; the widest gap is reported, within the shift's twice."""
    rng = np.random.default_rng(2)
    shifted = []
    for edge in square(0.02):
        shift = 2.5e-6 * np.exp(2j * np.pi * rng.uniform())
        shifted.append(Edge(edge.start + shift, edge.end + shift))
    made = arrangement(shifted, TOL)
    assert len(made.faces) == 1
    assert not made.open_ends
    assert 0.0 < made.healed <= 5e-6


def test_doubles_are_dropped_whole_or_in_part():
    """A side drawn twice, one in three parts, one arc on another: the same two faces."""
    parts = [line(0j, 0.004 + 0j), line(0.004 + 0j, 0.013 + 0j), line(0.02 + 0j, 0.013 + 0j)]
    ring = circle(0.01 + 0.01j, 0.005).edges
    twice = [*square(0.02), *parts, *ring, ring[0]]
    made = arrangement(twice, TOL)
    assert sizes(made) == pytest.approx(
        [math.pi * 0.005**2, 0.02**2 - math.pi * 0.005**2], rel=1e-9
    )
    assert set(made.doubles) == {4, 5, 6, 9}


def test_open_ends_are_reported_and_taken_off():
    """A stray line inside a square leaves the square whole."""
    made = arrangement([*square(0.02), line(0.005 + 0.005j, 0.01 + 0.005j)], TOL)
    assert sorted(made.open_ends, key=lambda p: p.real) == [0.005 + 0.005j, 0.01 + 0.005j]
    assert sizes(made) == pytest.approx([0.02**2])


@pytest.mark.parametrize("point", [0j, 0.004 + 0.003j, 0.0099j, -0.0099 + 0j, 0.0099 + 0j])
def test_a_circle_of_two_halves_winds_about_its_inside(point):
    """On the chord, too, where the halves seem to turn by half a turn either way."""
    whole = circle(0j, 0.01)
    assert winds_about(whole, point)
    assert not winds_about(whole, point + 0.0201)
