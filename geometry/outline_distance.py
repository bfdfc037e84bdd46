"""Signed distances of many points from an outline: how much steel is there more than designed.

The sheet lies to the left of an outline's edges, so a point to the right of one lies outside the
steel: an edge measured there has left steel standing, and its distance counts as positive.
Axes: n points.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from .curves import Edge

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
ComplexArray = npt.NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Feet:
    """Where points lie beside an outline."""

    distance: FloatArray  # (n,) m, positive outside the steel, inf where no edge is near
    edge: IntArray  # (n,) number of the nearest edge, -1 where none is near
    share: FloatArray  # (n,) of that edge's length, 0 to 1


def feet(points: ComplexArray, edges: Sequence[Edge], reach: float) -> Feet:
    """The nearest edge of each point, no further than `reach` m away.

    Args:
        points: (n,) in m.
        edges: with the steel to their left, in m.
        reach: edges further off than this count as none.
    """
    best = np.full(points.size, np.inf)
    signed = np.full(points.size, np.inf)
    number = np.full(points.size, -1, dtype=np.int64)
    share = np.zeros(points.size)
    order = np.argsort(points.real, kind="stable")
    along_x = points.real[order]
    for k, edge in enumerate(edges):
        low, high = _box(edge, reach)
        first, last = np.searchsorted(along_x, (low.real, high.real))
        near = order[first:last]
        y = points.imag[near]
        near = near[(y >= low.imag) & (y <= high.imag)]
        if not near.size:
            continue
        off, at = beside(points[near], edge)
        gap = np.abs(points[near] - points_on(edge, at))
        is_nearer = (gap < best[near]) & (gap <= reach)
        won = near[is_nearer]
        best[won], number[won], share[won] = gap[is_nearer], k, at[is_nearer]
        signed[won] = np.copysign(gap[is_nearer], off[is_nearer])
    return Feet(signed, number, share)


def beside(points: ComplexArray, edge: Edge) -> tuple[FloatArray, FloatArray]:
    """How far points lie right of the unbounded line or circle (m), and their share along it."""
    if edge.is_line:
        chord = edge.end - edge.start
        ray = (points - edge.start) * np.conj(chord)
        return -ray.imag / abs(chord), np.clip(ray.real / abs(chord) ** 2, 0.0, 1.0)
    centre, middle = edge.centre, edge.point(0.5)
    ray = points - centre
    off = (np.abs(ray) - edge.radius) * np.sign(edge.bulge)
    share = 0.5 + np.angle(ray / (middle - centre)) / edge.sweep
    return off, np.clip(share, 0.0, 1.0)


def points_on(edge: Edge, share: FloatArray) -> ComplexArray:
    """Points (n,) in m at shares (n,) of the edge's length."""
    if edge.is_line:
        return np.asarray(edge.start + share * (edge.end - edge.start))
    return np.asarray(edge.centre + (edge.start - edge.centre) * np.exp(1j * share * edge.sweep))


def is_inside(points: ComplexArray, edges: Sequence[Edge], step: float) -> npt.NDArray[np.bool_]:
    """Whether each point lies in the steel, by counting crossings with chords of `step` m."""
    inside = np.zeros(points.size, dtype=bool)
    for edge in edges:
        count = 1 if edge.is_line else max(4, int(np.ceil(edge.length / step)))
        corners = points_on(edge, np.linspace(0.0, 1.0, count + 1))
        for a, b in pairwise(corners.tolist()):
            spans = (a.imag > points.imag) != (b.imag > points.imag)
            if spans.any():
                rise = (points.imag[spans] - a.imag) / (b.imag - a.imag)
                inside[spans] ^= points.real[spans] < a.real + rise * (b.real - a.real)
    return inside


def _box(edge: Edge, reach: float) -> tuple[complex, complex]:
    rise = 0.5 * abs(edge.end - edge.start) * abs(edge.bulge) + reach
    x, y = (edge.start.real, edge.end.real), (edge.start.imag, edge.end.imag)
    return complex(min(x) - rise, min(y) - rise), complex(max(x) + rise, max(y) + rise)
