"""Iron loss over currents and speed: the coefficients of `iron_loss` interpolated over the grid.

Each coefficient is a bicubic spline through the grid's points (of lower degree where a grid has
fewer than four), continued as an even function where an axis is mirrored, so that losses are smooth
across zero current. A spline may dip under 0 beside a steep rise: what is negative counts as 0.

Axes: n_d and n_q currents, 3 parts (rotor, teeth, yoke), n_order orders, 4 coefficients.
"""

from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .iron_loss import PARTS, IronLaws, loss_at
from .loss_surface import LossSurface

CHUNK = 2048  # currents at once; each takes 432 coefficients at 12 positions
EDGE = 1e-9  # of the range, by which a current may lie outside through rounding


@dataclass(frozen=True, slots=True, eq=False)
class IronLossMap:
    """Iron loss over currents and frequency, by splines over a grid of currents."""

    i_d: tuple[float, float]  # A peak, least and greatest
    i_q: tuple[float, float]  # A peak
    mirrored: tuple[bool, bool]  # whether the loss is the same for -i_d, for -i_q, else for both
    knots: tuple[FloatArray, FloatArray]  # A
    degrees: tuple[int, int]
    splines: FloatArray  # (n_d', n_q', 3, n_order, 4), coefficients of the B-splines
    order: FloatArray  # (n_order,), electrical, those with any loss
    rotor: LossSurface
    stator: LossSurface


def iron_loss_map(
    i_d: FloatArray,
    i_q: FloatArray,
    coefficients: FloatArray,
    laws: IronLaws,
    mirrored: tuple[bool, bool] = (True, True),
) -> IronLossMap:
    """The map of the coefficients at every grid point.

    Args:
        i_d: (n_d,) A peak, rising.
        i_q: (n_q,) A peak, rising.
        coefficients: (n_d, n_q, 3, n_order, 4) by `loss_coefficients`.
        laws: by which they were computed.
        mirrored: whether the loss is the same for -i_d, for -i_q; without magnets both.

    Raises:
        ValueError: shapes that do not belong together, or currents that do not rise.
    """
    if coefficients.shape[:3] != (i_d.size, i_q.size, len(PARTS)):
        raise ValueError("coefficients: not those of the currents' grid")
    if min(i_d.size, i_q.size) < 2 or np.any(np.diff(i_d) <= 0) or np.any(np.diff(i_q) <= 0):
        raise ValueError("the grid's currents do not rise")
    kept = np.flatnonzero(coefficients.any(axis=(0, 1, 2, 4)))
    splines, along_d = _along(coefficients[..., kept, :], i_d, 0, mirrored[0])
    splines, along_q = _along(splines, i_q, 1, mirrored[1])
    return IronLossMap(
        i_d=(float(i_d[0]), float(i_d[-1])),
        i_q=(float(i_q[0]), float(i_q[-1])),
        mirrored=mirrored,
        knots=(along_d[0], along_q[0]),
        degrees=(along_d[1], along_q[1]),
        splines=np.ascontiguousarray(splines),
        order=np.asarray(6.0 / laws.steps * (kept + 1), dtype=np.float64),
        rotor=laws.rotor.surface,
        stator=laws.stator.surface,
    )


def iron_loss(
    loss_map: IronLossMap, i_d: FloatArray, i_q: FloatArray, omega_e: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Iron loss in W of stator and of rotor, arguments broadcast, any shape.

    Args:
        loss_map: of the machine.
        i_d: A peak.
        i_q: A peak.
        omega_e: electrical angular frequency in rad/s, of either sign.

    Raises:
        ValueError: currents outside the grid.
    """
    from scipy.interpolate import NdBSpline

    d, q, omega = np.broadcast_arrays(*(np.asarray(v, float) for v in (i_d, i_q, omega_e)))
    m = loss_map
    if not m.mirrored[0] and m.i_d[0] >= 0.0:
        # The reversal of both currents changes the sign of every field, and no loss.
        d, q = np.abs(d), np.where(d < 0.0, -q, q)
    on_d = _inside("i_d", d.ravel(), m.i_d, m.mirrored[0])
    on_q = _inside("i_q", q.ravel(), m.i_q, m.mirrored[1])
    spline = NdBSpline(m.knots, m.splines, m.degrees)
    f = np.abs(omega.ravel())[:, None] / (2.0 * np.pi) * m.order
    found = np.zeros((2, d.size))
    for start in range(0, d.size, CHUNK):
        part = slice(start, start + CHUNK)
        own = spline(np.column_stack([on_d[part], on_q[part]]))  # (n, 3, n_order, 4)
        found[0, part] = loss_at(own[:, 1:], f[part, None], m.stator).sum(axis=(1, 2, 3))
        found[1, part] = loss_at(own[:, 0], f[part], m.rotor).sum(axis=(1, 2))
    return found[0].reshape(d.shape), found[1].reshape(d.shape)


def _inside(name: str, values: FloatArray, ends: tuple[float, float], mirror: bool) -> FloatArray:
    low, high = ends
    place = np.abs(values) if mirror and low >= 0.0 else values
    room = EDGE * (high - low)
    if np.any((place < low - room) | (place > high + room)):
        raise ValueError(f"{name}: outside the map's {low:g} to {high:g} A")
    return np.clip(place, low, high)


def _along(
    values: FloatArray, axis: FloatArray, number: int, mirror: bool
) -> tuple[FloatArray, tuple[FloatArray, int]]:
    """B-spline coefficients along one axis of the grid, with its knots and degree."""
    from scipy.interpolate import make_interp_spline

    at, moved = axis, np.moveaxis(values, number, 0)
    if mirror and axis[0] == 0.0:
        at = np.concatenate([-axis[:0:-1], axis])
        moved = np.concatenate([moved[:0:-1], moved])
    degree = min(3, at.size - 1)
    spline = make_interp_spline(at, moved, k=degree)
    return np.moveaxis(spline.c, 0, number), (spline.t, degree)
