"""Lines and arcs against closed forms and against quadrature along the curve."""

import cmath
import math
from itertools import pairwise

import numpy as np
import pytest

from lamwright.geometry.curves import (
    Edge,
    Path,
    arc,
    area,
    chained,
    circle,
    closed,
    line,
    mirrored_edge,
    offset_edge,
    perimeter,
    piece,
    reversed_edge,
    reversed_path,
    share_of,
    turned,
)

NODES, WEIGHTS = np.polynomial.legendre.leggauss(20)


def random_edge(rng, largest_sweep=6.0):
    start, end = rng.normal(size=2) + 1j * rng.normal(size=2)
    sweep = rng.uniform(-largest_sweep, largest_sweep) if rng.random() < 0.8 else 0.0
    return Edge(complex(start), complex(end), math.tan(0.25 * sweep))


def area_by_quadrature(path):
    """1/2 int x dy - y dx by Gauss points on each edge, from points and tangents alone."""
    total = 0.0
    for edge in path.edges:
        for node, weight in zip(NODES, WEIGHTS, strict=True):
            share = 0.5 * (node + 1.0)
            step = edge.direction(share) * edge.length
            total += 0.25 * weight * (edge.point(share).conjugate() * step).imag
    return total


@pytest.mark.parametrize(
    ("sweep_deg", "bulge"),
    [(90.0, 0.414214), (60.0, 0.267949), (45.0, 0.198912), (30.0, 0.131652), (180.0, 1.0)],
)
def test_bulge_is_the_tangent_of_a_quarter_of_the_sweep(sweep_deg, bulge):
    """DXF group 42, table D5 of the check values: tan(angle / 4); printed to 6 decimals."""
    end = cmath.rect(2.0, math.radians(sweep_deg))
    edge = arc(2.0 + 0j, end, 0j, ccw=True)
    assert edge.bulge == pytest.approx(bulge, abs=5e-7)
    assert edge.radius == pytest.approx(2.0, rel=1e-14)
    assert abs(edge.centre) < 1e-14
    assert arc(end, 2.0 + 0j, 0j, ccw=False).bulge == pytest.approx(-edge.bulge, rel=1e-14)


def test_square_with_four_round_sides_is_a_circle():
    """Square of side 10 with four 90 degree bulges, corners on R = 7.07107: pi 50 and 2 pi R."""
    corners = [5.0 * (x + 1j * y) for x, y in ((1, 1), (-1, 1), (-1, -1), (1, -1))]
    bulge = math.tan(math.pi / 8)
    ends = corners[1:] + corners[:1]
    path = Path(tuple(Edge(a, b, bulge) for a, b in zip(corners, ends, strict=True)))
    assert area(path) == pytest.approx(50.0 * math.pi, rel=1e-14)
    assert perimeter(path) == pytest.approx(44.4288, abs=5e-5)
    assert area(reversed_path(path)) == pytest.approx(-50.0 * math.pi, rel=1e-14)


def test_area_of_random_paths_is_the_line_integral():
    """Green's theorem on 30 random closed paths; Gauss quadrature of order 39 is exact to 1e-12."""
    rng = np.random.default_rng(3)
    for _ in range(30):
        corners = [complex(*p) for p in rng.normal(size=(5, 2))]
        sweeps = rng.uniform(-2.5, 2.5, 5)
        path = Path(
            tuple(
                Edge(a, b, math.tan(0.25 * s))
                for a, b, s in zip(corners, corners[1:] + corners[:1], sweeps, strict=True)
            )
        )
        assert area(path) == pytest.approx(area_by_quadrature(path), rel=1e-11, abs=1e-12)


def test_circle_has_the_area_and_length_of_a_circle():
    """Area pi r^2 and length 2 pi r, to rounding."""
    path = circle(0.3 + 0.1j, 0.7)
    assert area(path) == pytest.approx(0.49 * math.pi, rel=1e-14)
    assert perimeter(path) == pytest.approx(1.4 * math.pi, rel=1e-14)


def test_direction_is_the_derivative_of_the_point():
    """Central differences over 1e-5 of the length err by its square, 1e-10."""
    rng = np.random.default_rng(4)
    for _ in range(30):
        edge, share = random_edge(rng), rng.uniform(0.1, 0.9)
        step = (edge.point(share + 1e-5) - edge.point(share - 1e-5)) / 2e-5
        assert step / edge.length == pytest.approx(edge.direction(share), abs=1e-8)


def test_offset_is_parallel_at_the_given_distance_to_the_left():
    """Every point of the offset is the point of the edge plus the left normal; to rounding."""
    rng = np.random.default_rng(5)
    for _ in range(50):
        edge = random_edge(rng)
        distance = rng.uniform(-0.9, 0.9) * min(edge.radius, 1.0)
        parallel = offset_edge(edge, distance)
        for share in (0.0, 0.37, 1.0):
            expected = edge.point(share) + 1j * edge.direction(share) * distance
            assert parallel.point(share) == pytest.approx(expected, abs=1e-12)


def test_offset_past_the_centre_is_refused():
    """An arc has no parallel beyond its centre."""
    with pytest.raises(ValueError, match="passes the centre"):
        offset_edge(arc(1.0 + 0j, 1j, 0j, ccw=True), 1.5)


def test_pieces_of_an_edge_add_up():
    """Cut at two shares: the piece has that share of the length and lies on the same circle."""
    rng = np.random.default_rng(6)
    for _ in range(50):
        edge = random_edge(rng)
        low, high = sorted(rng.uniform(0.0, 1.0, 2))
        part = piece(edge, edge.point(low), edge.point(high))
        assert share_of(edge, edge.point(low)) == pytest.approx(low, abs=1e-11)
        assert part.length == pytest.approx((high - low) * edge.length, rel=1e-9)
        middle = edge.point(0.5 * (low + high))
        assert part.point(0.5) == pytest.approx(middle, abs=1e-11)


def test_reversed_mirrored_and_turned_edges_keep_their_points():
    """Reversal swaps the ends, a mirror image conjugates, a turn multiplies; to rounding."""
    rng = np.random.default_rng(7)
    for _ in range(20):
        edge = random_edge(rng)
        assert reversed_edge(edge).point(0.3) == pytest.approx(edge.point(0.7), abs=1e-12)
        mirrored = mirrored_edge(edge).point(0.3)
        assert mirrored == pytest.approx(edge.point(0.3).conjugate(), abs=1e-12)
        quarter = turned(Path((edge,)), 0.5 * math.pi).edges[0].point(0.3)
        assert quarter == pytest.approx(1j * edge.point(0.3), abs=1e-12)


def test_chains_close_without_a_gap_of_rounding():
    """Ends that differ in the last digits are made the same number, not merely close."""
    edges = [line(0j, 1 + 0j), line(1 + 1e-16j, 1j), line(1j, 1e-17 + 0j)]
    assert all(a.end == b.start for a, b in pairwise(chained(edges)))
    path = closed(edges)
    assert path.edges[-1].end == path.edges[0].start


def test_a_line_has_no_centre():
    """Asking a line for its centre is an error, not a huge number."""
    with pytest.raises(ValueError, match="a line has no centre"):
        _ = line(0j, 1j).centre
