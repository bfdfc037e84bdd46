"""Currents of given flux linkages: the map read the other way.

The currents are where F(i) = W'(i) - 3/2 (psi_d i_d + psi_q i_q) is least, since its slopes are
3/2 (psi(i) - psi). W' is convex (incremental inductances are those of a passive machine), so there
is one such place. Projected Newton steps (Bertsekas 1982, from memory): a current that stands at
the map's edge and would go out is held there, the others take Newton's step, halved until F falls;
where the matrix is not positive, the step is that of the steepest descent. F falls in every step,
so it cannot fail to settle: inside, at the currents, or at the edge with a slope outwards left
over, and then no currents of the map have these linkages.

Axes: n any shape of linkages.
"""

from dataclasses import dataclass
from functools import partial

import numpy as np

from lamwright.geometry.errors import NotConverged
from lamwright.solver.types import FloatArray

from .brackets import BoolArray
from .coenergy_surface import coenergy, incremental
from .terminals import Terminals, terminal_linkages

STEPS_MOST = 60  # 6 to 9 are usual, more at the edge of a saturated map
HALVINGS = 30
TOLERANCE = 1e-10  # of the greatest linkage asked for: what may be left of psi(i) - psi
STARTS = 13  # currents of each axis tried for the start


@dataclass(frozen=True, slots=True, eq=False)
class InverseMap:
    """Currents over a grid of linkages; nan where the flux map has none."""

    psi_d: FloatArray  # (n_d,), V s, rising, end winding included
    psi_q: FloatArray  # (n_q,), V s, rising
    i_d: FloatArray  # (n_d, n_q), A
    i_q: FloatArray  # (n_d, n_q), A


def inverse_map(drive: Terminals, count: int) -> InverseMap:
    """The inverse over `count` x `count` linkages, from the map's least to its greatest."""
    low_d, high_d, low_q, high_q = _box(drive)
    psi_d, psi_q = terminal_linkages(
        drive, np.array([low_d, high_d])[:, None], np.array([low_q, high_q])
    )
    # Along an axis the linkage is greatest where the other current is least: cross-saturation.
    far_d, _ = terminal_linkages(drive, np.array([low_d, high_d]), np.zeros(2))
    _, far_q = terminal_linkages(drive, np.zeros(2), np.array([low_q, high_q]))
    over_d, over_q = np.append(psi_d, far_d), np.append(psi_q, far_q)
    axis_d = np.linspace(over_d.min(), over_d.max(), count)
    axis_q = np.linspace(over_q.min(), over_q.max(), count)
    i_d, i_q = currents_of(drive, axis_d[:, None], axis_q)
    return InverseMap(axis_d, axis_q, i_d, i_q)


def currents_of(
    drive: Terminals, psi_d: FloatArray, psi_q: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """i_d and i_q in A (n) with the linkages in V s, end winding included; nan outside the map.

    Raises:
        NotConverged: an iteration has not settled, which a convex map does not let happen.
    """
    psi_d, psi_q = np.broadcast_arrays(np.asarray(psi_d, float), np.asarray(psi_q, float))
    shape = psi_d.shape
    wanted = np.stack([psi_d.ravel(), psi_q.ravel()])
    box = np.reshape(_box(drive), (2, 2))
    size = max(float(np.abs(wanted).max(initial=0.0)), np.finfo(float).tiny)
    current = _start(drive, wanted, box)
    is_open = np.ones(current.shape[1], dtype=np.bool_)
    history = []
    for _ in range(STEPS_MOST):
        active = np.flatnonzero(is_open)
        part, target = current[:, active], wanted[:, active]
        slope = np.stack(terminal_linkages(drive, *part)) - target  # V s, of F over 3/2
        held = _held(part, slope, box)
        left = np.abs(np.where(held, 0.0, slope)).max(axis=0)
        history.append(float(left.max(initial=0.0)))
        is_open[active] = left > TOLERANCE * size
        if not is_open.any():
            break
        going = left > TOLERANCE * size
        step = _step(drive, part[:, going], slope[:, going], held[:, going])
        current[:, active[going]] = _lowered(
            drive, part[:, going], target[:, going], slope[:, going], step, box
        )
    else:
        raise NotConverged("the inverse of the flux map has not settled", tuple(history))
    off = np.abs(np.stack(terminal_linkages(drive, *current)) - wanted).max(axis=0)
    is_met = off <= 10.0 * TOLERANCE * size
    i_d, i_q = np.where(is_met, current, np.nan)
    return i_d.reshape(shape), i_q.reshape(shape)


def _box(drive: Terminals) -> tuple[float, float, float, float]:
    """Least and greatest i_d and i_q in A: the motoring half, both signs of i_q with magnets."""
    low_d, high_d = drive.surface.i_d_range
    low_q, high_q = drive.surface.i_q_range
    low_d, high_d = (0.0, high_d) if drive.side > 0 else (low_d, 0.0)
    return low_d, high_d, 0.0 if drive.surface.even_q else low_q, high_q


def _start(drive: Terminals, wanted: FloatArray, box: FloatArray) -> FloatArray:
    """The nearest in linkage of a coarse grid of currents (2, n)."""
    i_d, i_q = (
        axis.ravel()
        for axis in np.meshgrid(*np.linspace(box[:, 0], box[:, 1], STARTS).T, indexing="ij")
    )
    have = np.stack(terminal_linkages(drive, i_d, i_q))
    spread = np.ptp(have, axis=1)[:, None, None]
    off = (((have[:, :, None] - wanted[:, None, :]) / spread) ** 2).sum(axis=0)
    nearest = np.argmin(off, axis=0)
    return np.stack([i_d[nearest], i_q[nearest]])


def _held(current: FloatArray, slope: FloatArray, box: FloatArray) -> BoolArray:
    """Currents at the map's edge that would lower F outside."""
    slack = 1e-12 * np.ptp(box, axis=1)[:, None]
    at_low = (current <= box[:, :1] + slack) & (slope > 0.0)
    held: BoolArray = at_low | ((current >= box[:, 1:] - slack) & (slope < 0.0))
    return held


def _step(drive: Terminals, current: FloatArray, slope: FloatArray, held: BoolArray) -> FloatArray:
    """Newton's step in A (2, n) of the currents that are not held."""
    l_dd, l_dq, l_qq = incremental(drive.surface, *current)
    l_dd, l_qq = l_dd + drive.end_inductance, l_qq + drive.end_inductance
    l_dq = np.where(held.any(axis=0), 0.0, l_dq)
    right = np.where(held, 0.0, slope)
    area = l_dd * l_qq - l_dq**2
    is_sound = (l_dd > 0.0) & (l_qq > 0.0) & (area > 0.0)
    l_most = np.maximum(np.maximum(np.abs(l_dd), np.abs(l_qq)), np.finfo(float).tiny)
    newton = -np.stack([l_qq * right[0] - l_dq * right[1], l_dd * right[1] - l_dq * right[0]])
    return np.where(is_sound, newton / np.where(is_sound, area, 1.0), -right / l_most)


def _lowered(
    drive: Terminals,
    current: FloatArray,
    wanted: FloatArray,
    slope: FloatArray,
    step: FloatArray,
    box: FloatArray,
) -> FloatArray:
    """Currents (2, n) after a step, cut at the map's edge and halved until F falls enough."""
    value = partial(_energy, drive, wanted=wanted)
    before, share = value(current), np.ones(current.shape[1])
    for _ in range(HALVINGS):
        new = np.clip(current + share * step, box[:, :1], box[:, 1:])
        gain = (slope * (new - current)).sum(axis=0)
        # Rounding in F hides what the last steps gain.
        enough = value(new) <= before + 1e-4 * gain + 1e-14 * np.abs(before)
        if enough.all():
            break
        share = np.where(enough, share, 0.5 * share)
    return new


def _energy(drive: Terminals, current: FloatArray, wanted: FloatArray) -> FloatArray:
    """F over 3/2 in J at currents (2, n)."""
    inside = coenergy(drive.surface, *current) / 1.5
    end = 0.5 * drive.end_inductance * (current**2).sum(axis=0)
    value: FloatArray = inside + end - (wanted * current).sum(axis=0)
    return value
