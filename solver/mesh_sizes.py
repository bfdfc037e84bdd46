"""Where nodes go on the edges of an outline: size functions that grow no faster than asked.

A size at a place x is the least of h_k + growth |x - x_k| over all sources k (points with a
wanted size; every edge is itself a row of sources). Each edge then gets nodes such that each
step covers the same share of the integral of ds / h. Source: common practice, no source.
Axes: n_source sources, n_sample samples on edges.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.curves import Edge

from .mesh_outline import ComplexArray
from .types import FloatArray

# Steps of a turn that an arc is cut into at the least: the area of a full circle is then right to
# 1e-5 (derived: a parabola through three points of an arc of angle f misses r^2 f^5 / 960).
STEP_ANGLE = np.pi / 12.0
MAX_SAMPLES = 400  # per edge; finer would only cost time


@dataclass(frozen=True, slots=True, eq=False)
class SizeSources:
    """Points with a wanted edge length."""

    points: ComplexArray  # (n_source,), m
    sizes: FloatArray  # (n_source,), m


def points_at(edge: Edge, shares: FloatArray) -> ComplexArray:
    """Points of the edge at `shares` (any shape, 0 to 1) of its length."""
    if edge.is_line:
        points = edge.start + shares * (edge.end - edge.start)
    else:
        points = edge.centre + (edge.start - edge.centre) * np.exp(1j * shares * edge.sweep)
    return np.asarray(points, dtype=np.complex128)


def sample_shares(edges: Sequence[Edge], spacing: float) -> list[FloatArray]:
    """Evenly spaced shares of each edge, about `spacing` m apart, at least nine."""
    counts = [int(np.clip(np.ceil(edge.length / spacing), 8, MAX_SAMPLES)) for edge in edges]
    return [np.linspace(0.0, 1.0, count + 1) for count in counts]


def size_at(points: ComplexArray, sources: SizeSources, growth: float) -> FloatArray:
    """Size at each point: least of h_k + growth |x - x_k|."""
    best = np.full(points.size, np.inf)
    for at in range(0, sources.points.size, 512):  # blocks bound the memory
        block = slice(at, at + 512)
        away = np.abs(points[:, None] - sources.points[None, block])
        best = np.minimum(best, np.min(sources.sizes[None, block] + growth * away, axis=1))
    return best


def node_shares(
    edges: Sequence[Edge], sizes: FloatArray, extra: SizeSources | None, growth: float
) -> list[FloatArray]:
    """Shares of length at which each edge gets its nodes, ends included.

    Args:
        edges: the edges.
        sizes: (n_edge,) wanted step in m on each edge.
        extra: more places with wanted sizes.
        growth: change of size per distance.
    """
    least = float(np.min(sizes))
    if extra is not None and extra.sizes.size:
        least = min(least, float(np.min(extra.sizes)))
    samples = sample_shares(edges, 2.0 * least)
    places = [points_at(edge, share) for edge, share in zip(edges, samples, strict=True)]
    own = np.concatenate([np.full(p.size, h) for p, h in zip(places, sizes, strict=True)])
    every = np.concatenate(places)
    sources = SizeSources(every, own)
    if extra is not None:
        sources = SizeSources(
            np.concatenate([every, extra.points]), np.concatenate([own, extra.sizes])
        )
    graded = np.minimum(own, size_at(every, sources, growth))
    parts = np.split(graded, np.cumsum([p.size for p in places])[:-1])
    return [_spread(e, s, h) for e, s, h in zip(edges, samples, parts, strict=True)]


def _spread(edge: Edge, samples: FloatArray, sizes: FloatArray) -> FloatArray:
    """Shares of the nodes of one edge from sizes at its samples."""
    step = np.diff(samples) * edge.length
    # Trapezoid in 1/h; the running sum is made symmetric so that an edge with symmetric sizes
    # gets symmetric nodes to the last bit but one.
    forward = np.concatenate([[0.0], np.cumsum(step * 0.5 * (1 / sizes[1:] + 1 / sizes[:-1]))])
    count = max(1, int(np.ceil(forward[-1] - 0.05)), int(np.ceil(abs(edge.sweep) / STEP_ANGLE)))
    if np.ptp(sizes) <= 1e-9 * sizes[0]:
        return np.linspace(0.0, 1.0, count + 1)
    wanted = np.linspace(0.0, forward[-1], count + 1)
    shares = np.interp(wanted, forward, samples)
    shares[0], shares[-1] = 0.0, 1.0
    return np.asarray(shares, dtype=np.float64)
