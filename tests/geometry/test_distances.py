"""Distances between edges against closed forms and a fine sampling."""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import Edge, line
from lamwright.geometry.distances import distance, nearest

from .test_curves import random_edge

SHARES = np.linspace(0.0, 1.0, 301)


def sampled_distance(first, second):
    a = np.array([first.point(share) for share in SHARES])
    b = np.array([second.point(share) for share in SHARES])
    return np.abs(a[:, None] - b[None, :]).min()


def test_distance_is_that_of_a_fine_sampling():
    """80 random pairs: never above the sampled distance, and below it by less than a step.

    Two samples lie at most half a step from the nearest points, so the sampled distance errs by
    at most one step of either edge.
    """
    rng = np.random.default_rng(21)
    for _ in range(80):
        first, second = random_edge(rng), random_edge(rng)
        exact, sampled = distance([first], [second]), sampled_distance(first, second)
        step = 0.5 * (first.length + second.length) / (len(SHARES) - 1)
        assert exact <= sampled + 1e-9
        assert exact >= sampled - step


def test_nearest_points_lie_on_their_edges_at_that_distance():
    """The pair returned is a pair of points of the edges; samples are 1/300 of an edge apart."""
    rng = np.random.default_rng(22)
    for _ in range(50):
        first, second = random_edge(rng), random_edge(rng)
        p, q = nearest(first, second)
        for edge, point in ((first, p), (second, q)):
            off = min(abs(edge.point(share) - point) for share in SHARES)
            assert off <= 0.5 * edge.length / (len(SHARES) - 1) + 1e-9


@pytest.mark.parametrize(
    ("first", "second", "expected"),
    [
        (line(0j, 1 + 0j), line(0.2 + 1j, 3 + 1j), 1.0),  # parallel, side by side
        (line(0j, 1 + 0j), line(0.5 - 1j, 0.5 + 1j), 0.0),  # crossing
        (line(-2 + 3j, 2 + 3j), Edge(1 + 0j, -1 + 0j, 1.0), 2.0),  # common normal of line and arc
        (Edge(1 + 0j, -1 + 0j, 1.0), Edge(2 + 0j, -2 + 0j, 1.0), 1.0),  # concentric
        (Edge(1 - 1j, 1 + 1j, 1.0), Edge(5 + 1j, 5 - 1j, 1.0), 2.0),  # circles apart
    ],
)
def test_distances_known_in_closed_form(first, second, expected):
    """Elementary geometry, to rounding."""
    assert distance([first], [second]) == pytest.approx(expected, abs=1e-12)
    assert distance([second], [first]) == pytest.approx(expected, abs=1e-12)


def test_distance_of_chains_is_the_least_of_their_edges():
    """The bound that spares pairs never spares the nearest one: 200 chains of 4 random edges.

    Edges of different lengths, so that the pair with the least bound often is not the nearest.
    """
    rng = np.random.default_rng(23)
    for _ in range(200):
        first, second = (scattered(rng, 4) for _ in range(2))
        least = min(distance([a], [b]) for a in first for b in second)
        assert distance(first, second) == pytest.approx(least, abs=1e-12)


def scattered(rng, count):
    edges = []
    for _ in range(count):
        edge, place = random_edge(rng, 2.0), complex(*rng.normal(size=2) * 3.0)
        scale = math.exp(rng.normal())
        edges.append(Edge(place + scale * edge.start, place + scale * edge.end, edge.bulge))
    return edges
