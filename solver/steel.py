"""Magnetisation of laminated steel: points of a card to reluctivity and its slope.

Idea: one smooth monotone H(B), sampled once into a fine uniform table of cubics in B, from which
nu = H / B, its derivative and the energy density all come, so that residual, tangent and energy
of the field are the exact derivatives of one another and the energy is convex (dH/dB > 0).

1. Between the points: cubic spline with slopes limited to 2.5 times the smaller neighbouring
   secant. Fritsch & Carlson (1980) prove monotone up to 3; below 3 the slope is also positive.
   30 points of S19 (half of them above 1.4 T): error of B at given H 1.5e-4, PCHIP 9e-3 (measured).
2. Beyond the last point dJ/dB decays exponentially at the pace of the last points (J = B - mu0 H,
   the polarisation), so the curve ends in slope mu0 without a kink; common practice, no source.
3. Trailing points whose slope dB/dH is below mu0 are impossible and dropped.
4. Insulation between sheets: B = k B_fe + (1 - k) mu0 H along the sheet, exact for parallel sheets.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from lamwright.geometry.design import SteelCard
from lamwright.geometry.errors import DesignError

from .types import FloatArray

MU_0 = 4e-7 * np.pi  # H/m; the 2019 SI value differs by 1e-9
NU_0 = 1.0 / MU_0  # m/H

TABLE_STEP = 2e-3  # T; the table adds less than 1e-6 of H to the error of the spline
TABLE_END = 4.0  # T; above it H goes on with the last slope
SLOPE_LIMIT = 2.5  # times the smaller secant; 3 would allow dH/dB = 0 inside an interval
TAIL_BOUNDS = (0.02, 0.2)  # T, decay length of dJ/dB beyond the last point
INVERSE_POINTS = 2049
TINY_B2 = 1e-24  # T^2, keeps nu(0) = dH/dB(0) without a branch

# B in T -> H in A/m and dH/dB in m/H.
MagnetisationFunction = Callable[[FloatArray], tuple[FloatArray, FloatArray]]


@dataclass(frozen=True, slots=True, eq=False)
class SteelLaw:
    """H(B) as cubics in t = (B - B_k) / step on equal intervals; the last one is a straight line.

    A `ReluctivityLaw`: calling it with |B|^2 gives nu and d nu / d |B|^2.
    """

    step: float  # T
    cubic: FloatArray  # (4, n_interval + 1), coefficients of 1, t, t^2, t^3 in A/m
    energy: FloatArray  # (n_interval + 1,), energy density at the interval's start, J/m^3
    inverse: FloatArray  # (n_inverse,), B in T at H with equal steps of log(1 + H / 1 A/m)

    def __call__(self, b2: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Reluctivity and its slope.

        Args:
            b2: |B|^2 in T^2, any shape.

        Returns:
            nu in m/H and d nu / d |B|^2 in m/(H T^2), shaped as `b2`.
        """
        b2 = b2 + TINY_B2
        b = np.sqrt(b2)
        c0, c1, c2, c3, t = self._interval(b)
        nu = c3 * t
        for c in (c2, c1):
            nu += c
            nu *= t
        nu += c0
        nu /= b
        # (dH/dB - nu) / (2 B^2); in place, which saves a fifth
        dnu = c3
        dnu *= 3.0 * t
        dnu += 2.0 * c2
        dnu *= t
        dnu += c1
        dnu /= self.step
        dnu -= nu
        dnu /= 2.0 * b2
        return nu, dnu

    def field_strength(self, b: FloatArray) -> FloatArray:
        """H in A/m at the flux density `b` in T (not negative)."""
        c0, c1, c2, c3, t = self._interval(b)
        return ((c3 * t + c2) * t + c1) * t + c0

    def flux_density(self, h: FloatArray) -> FloatArray:
        """B in T at the field strength `h` in A/m (not negative), to 1e-4 of it.

        Near enough to choose where to linearise; `field_strength` is not its exact inverse.
        """
        beyond = np.maximum(h - self.cubic[0, -1], 0.0)
        place = np.log1p(h - beyond) * ((self.inverse.size - 1) / np.log1p(self.cubic[0, -1]))
        k = np.minimum(place, self.inverse.size - 2).astype(np.intp)
        low, high = self.inverse.take(k), self.inverse.take(k + 1)
        b: FloatArray = low + (place - k) * (high - low) + MU_0 * beyond
        return b

    def energy_density(self, b2: FloatArray) -> FloatArray:
        """Stored energy int H dB in J/m^3 at |B|^2 = `b2` in T^2, exact for the table's H."""
        b = np.sqrt(b2)
        c0, c1, c2, c3, t = self._interval(b)
        integral = (((c3 / 4.0 * t + c2 / 3.0) * t + c1 / 2.0) * t + c0) * t
        return self.energy[self._index(b)] + self.step * integral

    def coenergy_density(self, b2: FloatArray) -> FloatArray:
        """Coenergy int B dH = H B - int H dB in J/m^3 at |B|^2 = `b2` in T^2."""
        b = np.sqrt(b2)
        return self.field_strength(b) * b - self.energy_density(b2)

    def _index(self, b: FloatArray) -> npt.NDArray[np.intp]:
        return np.minimum(b * (1.0 / self.step), self.energy.size - 1.0).astype(np.intp)

    def _interval(self, b: FloatArray) -> tuple[FloatArray, ...]:
        k = self._index(b)
        c0, c1, c2, c3 = (row.take(k) for row in self.cubic)
        return c0, c1, c2, c3, b * (1.0 / self.step) - k


def reluctivity_law(card: SteelCard, stacking_factor: float = 1.0) -> SteelLaw:
    """Law of a stack of sheets of the card's steel.

    Args:
        card: steel card with B-H points.
        stacking_factor: share of steel in the stack's height.

    Returns:
        Law for the flux density averaged over steel and insulation.

    Raises:
        DesignError: when the points are not rising in both B and H.
    """
    curve = card.magnetisation
    try:
        return law_from_points(np.array(curve.b_t), np.array(curve.h_a_per_m), stacking_factor)
    except DesignError as error:
        raise DesignError(f"{card.name}: {error}") from error


def law_from_points(b: FloatArray, h: FloatArray, stacking_factor: float = 1.0) -> SteelLaw:
    """Law through B-H points of the steel, (0, 0) understood.

    Args:
        b: (n_point,) flux density in T, rising.
        h: (n_point,) field strength in A/m, rising.
        stacking_factor: share of steel in the stack's height.

    Raises:
        DesignError: when the points are not rising in both B and H.
    """
    b, h = _usable_points(b, h)
    secants = np.diff(h) / np.diff(b)
    limit = SLOPE_LIMIT * np.minimum(np.append(secants, secants[-1]), np.insert(secants, 0, 1e99))
    limit[0] = SLOPE_LIMIT * secants[0]
    least = 0.05 * limit  # a slope of zero would make the tangent matrix singular
    slopes = np.clip(natural_slopes(b, h), least, np.minimum(limit, NU_0))
    tail = _tail_length(b, secants)

    def curve(b_fe: FloatArray) -> tuple[FloatArray, FloatArray]:
        inside_h, inside_dh = _hermite(b, h, slopes, np.minimum(b_fe, b[-1]))
        x = np.maximum(b_fe - b[-1], 0.0)
        lack = 1.0 - MU_0 * slopes[-1]  # dJ/dB at the last point
        decay = np.exp(-x / tail)
        beyond_h = h[-1] + NU_0 * (x - lack * tail * (1.0 - decay))
        beyond_dh = NU_0 * (1.0 - lack * decay)
        beyond = b_fe > b[-1]
        return np.where(beyond, beyond_h, inside_h), np.where(beyond, beyond_dh, inside_dh)

    return law_from_function(curve, stacking_factor)


def law_from_function(curve: MagnetisationFunction, stacking_factor: float = 1.0) -> SteelLaw:
    """Law that tables an explicit curve of the steel.

    Args:
        curve: flux density in T -> H in A/m and dH/dB in m/H (> 0), from 0 T upward, H(0) = 0.
        stacking_factor: share of steel in the stack's height.
    """
    b = np.arange(0.0, TABLE_END + TABLE_STEP / 2.0, TABLE_STEP)
    b_fe = _steel_flux_density(curve, b, stacking_factor)
    h, dh_fe = curve(b_fe)
    # dH/dB of the stack from dB = (k + (1 - k) mu0 dH/dB_fe) dB_fe, derived.
    dh = dh_fe / (stacking_factor + (1.0 - stacking_factor) * MU_0 * dh_fe)
    secants = np.diff(h) / TABLE_STEP
    limit = SLOPE_LIMIT * np.minimum(np.append(secants, secants[-1]), np.insert(secants, 0, 1e99))
    m = TABLE_STEP * np.minimum(dh, limit)
    rise = np.diff(h)
    # Hermite cubic on the unit interval: values h_k, h_k+1 and slopes m_k, m_k+1.
    cubic = np.zeros((4, b.size))
    cubic[0] = h
    cubic[1] = m
    cubic[2, :-1] = 3.0 * rise - 2.0 * m[:-1] - m[1:]
    cubic[3, :-1] = m[:-1] + m[1:] - 2.0 * rise
    per_interval = TABLE_STEP * (cubic / np.array([[1.0], [2.0], [3.0], [4.0]])).sum(axis=0)
    energy = np.concatenate([[0.0], np.cumsum(per_interval[:-1])])
    at = np.expm1(np.linspace(0.0, np.log1p(h[-1]), INVERSE_POINTS))
    return SteelLaw(TABLE_STEP, cubic, energy, np.interp(at, h, b))


def linear_law(relative_permeability: float) -> SteelLaw:
    """Law of a linear material."""
    nu = NU_0 / relative_permeability
    return law_from_function(lambda b: (nu * b, np.full_like(b, nu)))


def _usable_points(b: FloatArray, h: FloatArray) -> tuple[FloatArray, FloatArray]:
    b, h = np.insert(b, 0, 0.0), np.insert(h, 0, 0.0)
    for name, values in (("b_t", b), ("h_a_per_m", h)):
        falling = np.flatnonzero(np.diff(values) <= 0.0)
        if falling.size:
            raise DesignError(
                f"magnetisation.{name}[{falling[0]}] = {values[falling[0] + 1]:g}: not above the "
                f"value before it ({values[falling[0]]:g}); accepted: rising from 0"
            )
    impossible = np.flatnonzero(np.diff(h) / np.diff(b) > NU_0)
    last = int(impossible[0]) + 1 if impossible.size else b.size
    if last < 3:
        raise DesignError("magnetisation: slope dB/dH below mu_0 from the start; check the units")
    return b[:last], h[:last]


def natural_slopes(x: FloatArray, y: FloatArray) -> FloatArray:
    """Slopes (n_point,) at the knots of the cubic spline without curvature at its ends.

    Dense, as a card has some tens of points: SciPy's own spline takes 0.4 s to import.
    """
    width = np.diff(x)
    rise = np.diff(y) / width
    # Continuity of the curvature at every knot, derived; the ends' curvature is 0.
    before, after = np.append(width[1:], 1.0), np.insert(width[:-1], 0, 1.0)
    middle = 2.0 * np.concatenate([[1.0], width[:-1] + width[1:], [1.0]])
    matrix = np.diag(middle) + np.diag(before, -1) + np.diag(after, 1)
    inner = width[1:] * rise[:-1] + width[:-1] * rise[1:]
    rhs = 3.0 * np.concatenate([rise[:1], inner, rise[-1:]])
    return np.asarray(np.linalg.solve(matrix, rhs), dtype=np.float64)


def _tail_length(b: FloatArray, secants: FloatArray) -> float:
    """Decay length of dJ/dB in T from the last two intervals, within `TAIL_BOUNDS`."""
    before, last = 1.0 - MU_0 * secants[-2:]
    distance = 0.5 * (b[-1] - b[-3])
    pace = np.log(before / max(last, 1e-6)) / distance
    return float(np.clip(1.0 / max(pace, 1e-6), *TAIL_BOUNDS))


def _hermite(
    x: FloatArray, y: FloatArray, slopes: FloatArray, at: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Value and derivative of the piecewise cubic with given nodal slopes."""
    k = np.clip(np.searchsorted(x, at, side="right") - 1, 0, x.size - 2)
    width = x[k + 1] - x[k]
    t = (at - x[k]) / width
    rise, m0, m1 = y[k + 1] - y[k], slopes[k] * width, slopes[k + 1] * width
    c2, c3 = 3.0 * rise - 2.0 * m0 - m1, m0 + m1 - 2.0 * rise
    return y[k] + ((c3 * t + c2) * t + m0) * t, ((3.0 * c3 * t + 2.0 * c2) * t + m0) / width


def _steel_flux_density(
    curve: MagnetisationFunction, b: FloatArray, stacking_factor: float
) -> FloatArray:
    """Flux density in the sheets where the stack's average is `b`, by Newton's method."""
    k = stacking_factor
    # The start interpolates the inverse on a grid; B_fe <= B / k always.
    grid = np.linspace(0.0, TABLE_END / k, 4001)
    b_fe = np.interp(b, k * grid + (1.0 - k) * MU_0 * curve(grid)[0], grid)
    for _ in range(4):  # quadratic from 1e-3: two steps reach rounding
        h, dh = curve(b_fe)
        b_fe -= (k * b_fe + (1.0 - k) * MU_0 * h - b) / (k + (1.0 - k) * MU_0 * dh)
        b_fe = np.maximum(b_fe, 0.0)
    return b_fe
