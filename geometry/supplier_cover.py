"""How much of a designed outline a drawing shows, and the whole turn from a part of it."""

import cmath
import math
from dataclasses import dataclass, replace

import numpy as np

from .outline_distance import FloatArray, feet
from .supplier_ideal import Ideal
from .supplier_samples import Samples

LEAST_GAP = 6e-4  # m, or
LEAST_STEPS = 2.5  # between points: a longer piece without one is missing
ON_SIDE = 3e-5  # m, of the straight sides of a drawn sector
PART = 0.9  # of one period's length, when all poles are laid on each other


@dataclass(frozen=True, slots=True)
class Cover:
    """What share of the outline is drawn; where it is not."""

    share: float  # of the whole outline's length
    is_part: bool  # a sector is drawn that holds every piece of a period
    missing: complex | None  # m, first place without a point, None where all is there
    missing_length: float  # m


def covered(points: Samples, ideal: Ideal, reach: float) -> Cover:
    """What of the outline has points near it.

    Args:
        points: in the rotor's frame.
        ideal: the designed outline.
        reach: m, how near.
    """
    cover = _cover(points, ideal, reach)
    if cover.missing is None or ideal.period == ideal.poles:
        return cover
    low, high = _span(points)
    if (high - low) > 2.0 * math.pi * (1.0 - 0.5 * ideal.period / ideal.poles):
        return cover
    laid = _cover(_unfolded(_without_sides(points, low, high), ideal), ideal, reach)
    if laid.share > PART:
        return replace(laid, is_part=True)
    return cover


def whole_turn(points: Samples, cover: Cover, ideal: Ideal, reach: float) -> tuple[Samples, int]:
    """The points of all poles, and how often what was drawn stands in a whole turn."""
    if not cover.is_part:
        return points, 1
    low, high = _span(points)
    found = feet(points.at, ideal.edges, reach)
    drawn = _without_sides(points, low, high)
    copies = round(2.0 * math.pi / (high - low)) if found.edge.size else 1
    return _unfolded(drawn, ideal), max(2, copies)


def _cover(points: Samples, ideal: Ideal, reach: float) -> Cover:
    found = feet(points.at, ideal.edges, reach)
    order = np.lexsort((found.share, found.edge))
    edge, share = found.edge[order], found.share[order]
    edges = ideal.edges
    bounds = np.searchsorted(edge, np.arange(len(edges) + 1))
    total = lost = 0.0
    missing: complex | None = None
    for k, one in enumerate(edges):
        at: FloatArray = np.concatenate([[0.0], share[bounds[k] : bounds[k + 1]], [1.0]])
        gaps = np.diff(at) * one.length
        total += one.length
        wide = gaps > max(LEAST_GAP, LEAST_STEPS * points.step)
        lost += float(gaps[wide].sum())
        if wide.any() and missing is None:
            first = int(np.flatnonzero(wide)[0])
            missing = one.point(0.5 * float(at[first] + at[first + 1]))
    return Cover(1.0 - lost / total, False, missing, lost)


def _span(points: Samples) -> tuple[float, float]:
    """First and last angle of the points, the widest empty angle left out."""
    angles = np.sort(np.angle(points.at[np.abs(points.at) > 1e-4]) % (2.0 * math.pi))
    gaps = np.diff(np.append(angles, angles[0] + 2.0 * math.pi))
    k = int(np.argmax(gaps))
    high = float(angles[k])
    return high - (2.0 * math.pi - float(gaps[k])), high


def _without_sides(points: Samples, low: float, high: float) -> Samples:
    """The points without those on the two rays that bound a drawn sector."""
    on = np.zeros(points.at.size, dtype=bool)
    for side in (low, high):
        turned = points.at * cmath.exp(-1j * side)
        on |= (np.abs(turned.imag) < ON_SIDE) & (turned.real > 0.0)
    return points.kept(~on)


def _unfolded(points: Samples, ideal: Ideal) -> Samples:
    """All points turned into one period and repeated round."""
    whole = ideal.period * ideal.pitch
    count = ideal.poles // ideal.period
    number = np.floor(np.angle(points.at) % (2.0 * math.pi) / whole)
    base = points.at * np.exp(-1j * number * whole)
    turns = np.exp(1j * whole * np.arange(count))
    at = (base[None, :] * turns[:, None]).ravel()
    return Samples(at, np.tile(points.is_between, count), points.step)
