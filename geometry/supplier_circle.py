"""Rim and bore of a measured outline as one circle each, where the points do not deny it.

Cut into arcs, a circle has three unknowns an arc, and the noise of a few hundred points makes it
wander by a micrometre. One circle through all points has three in all. So, as a line stays one
unless the points bend it, a circle does unless the arcs leave it by more than their noise explains.
"""

from collections.abc import Sequence

import numpy as np

from .curves import Edge, arc
from .outline_distance import ComplexArray, FloatArray
from .supplier_fit import FittedContour, outlying
from .supplier_samples import Samples

SIGNS = 4.0  # standard errors of an arc's place
LEAST_OFF = 1e-7  # m, an arc's distance from the circle that counts
SHARES = (0.0, 0.25, 0.5, 0.75)  # of each arc, where that is tried
STEPS = 4


def as_circle(
    designed: Sequence[Edge], fit: FittedContour, samples: Samples, copies: int = 1
) -> FittedContour:
    """The contour as one circle, or `fit` itself where its points say that it is none.

    Args:
        designed: arcs about the shaft axis with one radius, m.
        fit: of those arcs one by one.
        samples: that they were fitted to.
        copies: how often each point was taken, turned from pole to pole.
    """
    use = ~samples.is_between & (np.abs(fit.residual) < outlying(fit.noise))
    points = samples.at[use]
    if points.size < 3 * len(designed):
        return fit
    centre, radius = 0j, abs(designed[0].start)
    for _ in range(STEPS):
        ray = points - centre
        rows = _rows(ray)
        step = np.linalg.lstsq(rows, np.abs(ray) - radius, rcond=None)[0]
        centre, radius = centre + complex(step[0], step[1]), radius + float(step[2])
    for number, edge in enumerate(fit.edges):
        for share in SHARES:
            off = abs(abs(edge.point(share) - centre) - radius)
            if off > max(SIGNS * fit.standard_error(number, share), LEAST_OFF):
                return fit
    units = np.array([edge.start / abs(edge.start) for edge in designed])
    joints = centre + radius * units
    is_ccw = designed[0].bulge > 0.0
    edges = tuple(
        arc(complex(a), complex(b), centre, ccw=is_ccw)
        for a, b in zip(joints, np.roll(joints, -1), strict=True)
    )
    # Of joints x and y by centre and radius; sweeps stay.
    zero = np.zeros(units.size)
    by_x = np.concatenate([np.ones(units.size), zero, zero])
    by_y = np.concatenate([zero, np.ones(units.size), zero])
    by_radius = np.concatenate([units.real, units.imag, zero])
    moves = np.column_stack([by_x, by_y, by_radius])
    spread = copies * fit.noise**2 * np.linalg.inv(rows.T @ rows)
    outward = 1.0 if is_ccw else -1.0  # the steel lies inside a rim, outside a bore
    residual = np.where(
        np.isfinite(fit.residual), outward * (np.abs(samples.at - centre) - radius), np.inf
    )
    return FittedContour(edges, fit.noise, residual, moves @ spread @ moves.T)


def _rows(ray: ComplexArray) -> FloatArray:
    """Derivative (n, 3) of distances from a circle by its centre and radius, with the sign off."""
    unit = ray / np.abs(ray)
    return np.column_stack([unit.real, unit.imag, np.ones(unit.size)])
