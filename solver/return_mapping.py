"""Return of trial stresses to a yield surface in plane stress, and the consistent tangent.

With m = (sx + sy)/2, d = (sx - sy)/2, t = sxy and their work conjugates ex + ey, ex - ey, gxy the
elastic law is diagonal: m = a (ex + ey), d = G (ex - ey), t = G gxy with a = E / (2 (1 - nu)).

von Mises: s_vm^2 = m^2 + 3 d^2 + 3 t^2. One backward Euler step with the multiplier L gives
    m = m_trial / (1 + a L),   d, t = trial / (1 + 3 G L),   p = p_n + L s_vm,
and the single equation s_vm(L) = s_y(p(L)) for L. It is solved as 1/s_vm = 1/s_y: for perfect
plasticity the left side is concave and Newton climbs to the root without a search; a bracket
guards hardening. Source: Simo & Taylor, Int. J. Numer. Methods Eng. 22 (1986), and Simo & Hughes,
Computational Inelasticity (1998), both from memory; derived again in the variables above.
1. Deviation: no trigonometry and no matrix of eigenvectors; the variables above are diagonal.

Tresca (perfectly plastic): the closest point of a hexagon in the energy norm, the principal
directions kept. Source: derived.

Both steps are minimisers of a convex energy, so the tangent is symmetric.
Axes: n_point points; 3 components xx yy xy (strain xy engineering), or m d t.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from .types import FloatArray, IntArray

Criterion = Literal["von Mises", "Tresca"]

MAX_ROUNDS = 60  # of the scalar equation; 3 to 6 are usual
ROOT_TOL = 1e-14  # of the stress, near rounding: the global iteration must not see this one
INSIDE = 1.0 + 1e-12  # of the yield stress: rounding beyond it is not yielding


@dataclass(frozen=True, slots=True, eq=False)
class YieldCurve:
    """True stress in Pa against equivalent plastic strain, straight between points."""

    plastic_strain: FloatArray  # (n,), rising from 0
    stress: FloatArray  # (n,), Pa, not falling
    end_slope: float = 0.0  # Pa, beyond the last point

    def at(self, hardened: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Yield stress and its slope, both in Pa, at plastic strains of any shape."""
        slopes = np.append(np.diff(self.stress) / np.diff(self.plastic_strain), self.end_slope)
        piece = np.searchsorted(self.plastic_strain, hardened, side="right") - 1
        slope = slopes[np.maximum(piece, 0)]
        start = np.maximum(piece, 0)
        return self.stress[start] + slope * (hardened - self.plastic_strain[start]), slope

    @property
    def first(self) -> float:
        """Yield strength of the virgin material in Pa."""
        return float(self.stress[0])


def perfectly_plastic(yield_strength: float) -> YieldCurve:
    """A material that flows at `yield_strength` in Pa."""
    return YieldCurve(np.zeros(1), np.array([yield_strength]))


def linear_hardening(yield_strength: float, modulus: float) -> YieldCurve:
    """Yield strength in Pa that rises by `modulus` in Pa per unit of plastic strain."""
    return YieldCurve(np.zeros(1), np.array([yield_strength]), modulus)


@dataclass(frozen=True, slots=True, eq=False)
class Returned:
    """Where trial stresses end, and what their tangent needs; all in m, d, t."""

    stress: FloatArray  # (n_point, 3), Pa
    hardened: FloatArray  # (n_point,), equivalent plastic strain
    multiplier: FloatArray  # (n_point,), 1/Pa; Tresca: number of the facet, or of the corner


def split(stress: FloatArray) -> FloatArray:
    """m, d, t of stresses xx, yy, xy (..., 3)."""
    sx, sy, t = stress[..., 0], stress[..., 1], stress[..., 2]
    return np.stack([0.5 * (sx + sy), 0.5 * (sx - sy), t], axis=-1)


def joined(parts: FloatArray) -> FloatArray:
    """Stresses xx, yy, xy of m, d, t (..., 3)."""
    m, d, t = parts[..., 0], parts[..., 1], parts[..., 2]
    return np.stack([m + d, m - d, t], axis=-1)


def equivalent(parts: FloatArray, criterion: Criterion) -> FloatArray:
    """Equivalent stress (...) of m, d, t (..., 3) that yields at the yield strength, Pa."""
    m = parts[..., 0]
    q2 = parts[..., 1] ** 2 + parts[..., 2] ** 2
    if criterion == "von Mises":
        return np.asarray(np.sqrt(m * m + 3.0 * q2))
    q = np.sqrt(q2)
    return np.asarray(np.maximum(np.abs(m) + q, 2.0 * q))


def dissipation(strain: FloatArray, criterion: Criterion) -> FloatArray:
    """Plastic work (...) per unit of yield stress of strains xx, yy, xy (..., 3), unsigned.

    The support function of the yield surface: the largest work of any stress inside. Derived.
    """
    ex, ey, g = strain[..., 0], strain[..., 1], strain[..., 2]
    total, slide2 = ex + ey, (ex - ey) ** 2 + g * g
    if criterion == "von Mises":
        return np.asarray(np.sqrt(total * total + slide2 / 3.0))
    largest = 0.5 * (np.abs(total) + np.sqrt(slide2))  # of the principal strains, by size
    return np.asarray(np.maximum(largest, np.abs(total)))


def returned(
    trial: FloatArray,
    hardened: FloatArray,
    modulus: FloatArray,
    shear: FloatArray,
    curve: YieldCurve,
    criterion: Criterion,
) -> Returned:
    """The stresses that trial stresses beyond the yield surface return to.

    Args:
        trial: (n_point, 3), m d t in Pa, all beyond it.
        hardened: (n_point,), equivalent plastic strain before.
        modulus: (n_point,), a in Pa.
        shear: (n_point,), G in Pa.
        curve: yield stress; Tresca takes its first value alone.
        criterion: which surface.
    """
    if criterion == "von Mises":
        multiplier = _multiplier(trial, hardened, modulus, shear, curve)
        stress = _shrunk(trial, multiplier, modulus, shear)
        return Returned(stress, hardened + multiplier * equivalent(stress, criterion), multiplier)
    stress, facet = _on_hexagon(trial, modulus, shear, curve.first)
    lost = (trial - stress) / np.stack([modulus, shear, shear], axis=-1)  # plastic strains
    work = np.sum(stress * lost, axis=-1)
    return Returned(stress, hardened + work / curve.first, facet.astype(np.float64))


def _shrunk(
    trial: FloatArray, multiplier: FloatArray, modulus: FloatArray, shear: FloatArray
) -> FloatArray:
    by = np.stack([1.0 + modulus * multiplier, 1.0 + 3.0 * shear * multiplier], axis=-1)
    return np.asarray(trial / by[:, [0, 1, 1]])


def _multiplier(
    trial: FloatArray,
    hardened: FloatArray,
    modulus: FloatArray,
    shear: FloatArray,
    curve: YieldCurve,
) -> FloatArray:
    """Root L (n_point,) in 1/Pa of 1/s_vm(L) - 1/s_y(p_n + L s_vm(L)), which rises with L."""
    low = np.zeros(len(trial))
    # s_vm <= trial / (1 + min(a, 3 G) L), and hardening only shortens L.
    start = curve.at(hardened)[0]
    high = (equivalent(trial, "von Mises") / start - 1.0) / np.minimum(modulus, 3.0 * shear)
    found = low.copy()
    m2 = trial[:, 0] ** 2
    q2 = 3.0 * (trial[:, 1] ** 2 + trial[:, 2] ** 2)
    for _ in range(MAX_ROUNDS):
        u, v = 1.0 + modulus * found, 1.0 + 3.0 * shear * found
        level2 = m2 / u**2 + q2 / v**2
        level = np.sqrt(level2)
        fall = -(modulus * m2 / u**3 + 3.0 * shear * q2 / v**3) / level  # d s_vm / d L
        yields, slope = curve.at(hardened + found * level)
        value = 1.0 / level - 1.0 / yields
        rise = -fall / level2 + slope * (level + found * fall) / yields**2
        low = np.where(value <= 0.0, found, low)
        high = np.where(value >= 0.0, found, high)
        if np.all(np.abs(level - yields) <= ROOT_TOL * yields):
            break
        newton = found - value / rise
        inside = (newton >= low) & (newton <= high)
        found = np.where(inside, newton, 0.5 * (low + high))
    return found


def tangent(
    at: Returned,
    trial: FloatArray,
    modulus: FloatArray,
    shear: FloatArray,
    curve: YieldCurve,
    criterion: Criterion,
) -> FloatArray:
    """Derivative (n_point, 3, 3) in Pa of the returned stresses by strains, both xx yy xy."""
    if criterion == "von Mises":
        return _in_xy(_mises_tangent(at, modulus, shear, curve))
    return _in_xy(_tresca_tangent(at, trial, modulus, shear, curve.first))


def _mises_tangent(
    at: Returned, modulus: FloatArray, shear: FloatArray, curve: YieldCurve
) -> FloatArray:
    """X - X n n' X / (n' X n + s_vm^2 h / (1 - h L)), X = diag(a/(1 + a L), G/(1 + 3 G L), same).

    n = (m, 3 d, 3 t), h the slope of the yield curve. Derived by linearising the equations above.
    """
    step = at.multiplier
    first, second = modulus / (1.0 + modulus * step), shear / (1.0 + 3.0 * shear * step)
    x = np.stack([first, second, second], axis=-1)
    normal = at.stress * [1.0, 3.0, 3.0]
    xn = x * normal
    slope = curve.at(at.hardened)[1]
    left = 1.0 - slope * step
    level2 = equivalent(at.stress, "von Mises") ** 2
    share = left / (left * np.sum(normal * xn, axis=-1) + level2 * slope)
    out = -share[:, None, None] * xn[:, :, None] * xn[:, None, :]
    out[:, [0, 1, 2], [0, 1, 2]] += x
    return np.asarray(out)


def _hexagon(yield_strength: float) -> FloatArray:
    """Corners (4, 2) of the half of Tresca's hexagon with q >= 0, as (m, q) in Pa."""
    return yield_strength * np.array([[1.0, 0.0], [0.5, 0.5], [-0.5, 0.5], [-1.0, 0.0]])


def _on_hexagon(
    trial: FloatArray, modulus: FloatArray, shear: FloatArray, yield_strength: float
) -> tuple[FloatArray, IntArray]:
    """Closest points (n_point, 3), and the side (0 to 2) they are on, 3 for a corner."""
    q_trial = np.hypot(trial[:, 1], trial[:, 2])
    unit = np.sqrt(np.stack([modulus, shear], axis=-1))  # the energy norm is plain in s / unit
    point = np.stack([trial[:, 0], q_trial], axis=-1) / unit
    nearest = np.full(len(trial), np.inf)
    best, facet = np.zeros((len(trial), 2)), np.zeros(len(trial), dtype=np.int64)
    corners = _hexagon(yield_strength)
    for side in range(3):
        start, along = corners[side] / unit, (corners[side + 1] - corners[side]) / unit
        share = np.sum((point - start) * along, axis=-1) / np.sum(along**2, axis=-1)
        at = start + np.clip(share, 0.0, 1.0)[:, None] * along
        away = np.sum((point - at) ** 2, axis=-1)
        closer = away < nearest
        nearest[closer], best[closer] = away[closer], at[closer]
        facet[closer] = np.where((share > 0.0) & (share < 1.0), side, 3)[closer]
    m, q = (best * unit).T
    keep = q / np.where(q_trial > 0.0, q_trial, 1.0)
    return np.stack([m, keep * trial[:, 1], keep * trial[:, 2]], axis=-1), facet


def _tresca_tangent(
    at: Returned,
    trial: FloatArray,
    modulus: FloatArray,
    shear: FloatArray,
    yield_strength: float,
) -> FloatArray:
    """The projection's slope along the side, none at a corner, and the turn of the directions."""
    q_trial = np.hypot(trial[:, 1], trial[:, 2])
    safe = np.where(q_trial > 0.0, q_trial, 1.0)
    ray = np.stack([np.zeros_like(safe), trial[:, 1] / safe, trial[:, 2] / safe], axis=-1)
    turned = np.stack([np.zeros_like(safe), -ray[:, 2], ray[:, 1]], axis=-1)
    keep = np.hypot(at.stress[:, 1], at.stress[:, 2]) / safe
    out = (keep * shear)[:, None, None] * turned[:, :, None] * turned[:, None, :]
    sides = np.diff(_hexagon(yield_strength), axis=0)
    on = np.flatnonzero(at.multiplier < 3)
    along = sides[at.multiplier[on].astype(np.int64)]  # (n, 2), m and q
    length2 = along[:, 0] ** 2 / modulus[on] + along[:, 1] ** 2 / shear[on]
    full = along[:, 1, None] * ray[on]
    full[:, 0] += along[:, 0]
    out[on] += full[:, :, None] * full[:, None, :] / length2[:, None, None]
    return np.asarray(out)


def _in_xy(c: FloatArray) -> FloatArray:
    """Tangent (n_point, 3, 3) from m d t by their conjugates to xx yy xy by strains."""
    back = np.array([[1.0, 1.0, 0.0], [1.0, -1.0, 0.0], [0.0, 0.0, 1.0]])
    return np.asarray(back @ c @ back.T)
