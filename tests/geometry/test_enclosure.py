"""Points inside closed paths of lines and arcs, against another library's polygons."""

import numpy as np
import pytest
import shapely

from lamwright.geometry.curves import Edge, Path, circle
from lamwright.geometry.enclosure import encloses


@pytest.mark.parametrize("bulge", [0.0, 0.4, -0.4, 1.0, 2.5])
def test_same_answer_as_a_polygon_of_short_chords(bulge):
    """400 random points, those within 1 % of the outline left out (chords err by less)."""
    path = Path((Edge(0j, 1 + 0j, bulge), Edge(1 + 0j, 0.5 + 1j), Edge(0.5 + 1j, 0j)))
    points = [edge.point(k / 200) for edge in path.edges for k in range(200)]
    body = shapely.Polygon([(p.real, p.imag) for p in points])
    rng = np.random.default_rng(3)
    for x, y in rng.uniform(-1.5, 2.5, (400, 2)):
        spot = shapely.Point(x, y)
        if body.exterior.distance(spot) > 0.01 and body.is_valid:
            assert encloses(path, complex(x, y)) == body.contains(spot)


def test_circle_of_two_halves():
    """Inside up to the radius, outside beyond, either way round."""
    whole = circle(2 + 1j, 0.5)
    assert encloses(whole, 2.3 + 1.3j)
    assert not encloses(whole, 2.4 + 1.4j)


def test_points_on_the_line_between_two_half_circles():
    """Which side of its chord rounding takes a point for must not matter: 1000 turned circles.

    Points lie on the joints' line, at every tenth of it, within and beyond the circle; without
    the care taken for them 1 of 3 within it was told to be outside.
    """
    rng = np.random.default_rng(5)
    for angle in rng.uniform(0.0, 2.0 * np.pi, 1000):
        turn = np.exp(1j * angle)
        path = Path(tuple(Edge(a * turn, b * turn, 1.0) for a, b in ((3.0, 1.0), (1.0, 3.0))))
        for share in (-0.1, 0.1, 0.3, 0.5, 0.7, 0.9, 1.1):
            assert encloses(path, complex((1.0 + 2.0 * share) * turn)) == (0.0 < share < 1.0)
