"""A stack of parallel steel sheets and air gaps as one material, saturation included.

Gaps take the share k of the thickness. Along the sheets (d) both have the same H, across them (q)
the same B:

    B_d = (1 - k) B_t + k mu_0 H_d         H_d = nu B_t
    H_q = (1 - k) nu B_q + k B_q / mu_0    nu = nu(B_t^2 + B_q^2) of the steel

so that B_t, what the steel carries along itself, is the zero of a rising function for each B. Not
saturated, mu_d = (1 - k) mu + k and mu_q = 1 / ((1 - k) / mu + k), the usual bounds. The energy
density w(B_d, B_q) is the least over B_t of the parts' own, hence convex: Newton's iteration on
the field converges. Source: derived; the bounds are textbook matter.

Cost: some 5 evaluations of the steel's law for one of a solid rotor.
"""

from dataclasses import dataclass

import numpy as np

from .steel import MU_0, NU_0, SteelLaw
from .types import FloatArray

FLUX_TOL = 1e-12  # T, of B_t: rounding
MOST_STEPS = 60  # bisection alone would take 45 to get there


@dataclass(frozen=True, slots=True, eq=False)
class LaminateState:
    """Field strength and its slopes by flux density; all of one shape."""

    h_d: FloatArray  # A/m
    h_q: FloatArray
    dd: FloatArray  # d H_d / d B_d, m/H
    dq: FloatArray  # d H_d / d B_q = d H_q / d B_d
    qq: FloatArray


@dataclass(frozen=True, slots=True)
class Laminate:
    """The material: the sheets' law and the share of gaps in the thickness."""

    steel: SteelLaw
    gap_share: float  # k, 0 to below 1

    def state(self, b_d: FloatArray, b_q: FloatArray) -> LaminateState:
        """Field strength at a flux density in T, along and across the sheets."""
        k = self.gap_share
        b_t = self.sheet_flux(b_d, b_q)
        nu, dnu = self.steel(b_t**2 + b_q**2)
        # dH/dB of the steel, nu I + 2 nu' B B^T
        tt, tq, qq = nu + 2.0 * dnu * b_t**2, 2.0 * dnu * b_t * b_q, nu + 2.0 * dnu * b_q**2
        # dB_d = (1 - k + k mu_0 tt) dB_t + k mu_0 tq dB_q
        share = 1.0 / (1.0 - k + k * MU_0 * tt)
        return LaminateState(
            h_d=nu * b_t,
            h_q=((1.0 - k) * nu + k * NU_0) * b_q,
            dd=tt * share,
            dq=(1.0 - k) * tq * share,
            qq=(1.0 - k) * (qq - k * MU_0 * tq**2 * share) + k * NU_0,
        )

    def sheet_flux(self, b_d: FloatArray, b_q: FloatArray) -> FloatArray:
        """B_t in T: flux density in the sheets along them."""
        k, wanted = self.gap_share, np.abs(b_d)
        low, high = np.zeros_like(wanted), wanted / (1.0 - k)
        b_t = high
        for _ in range(MOST_STEPS):
            nu, dnu = self.steel(b_t**2 + b_q**2)
            miss = (1.0 - k + k * MU_0 * nu) * b_t - wanted
            slope = 1.0 - k + k * MU_0 * (nu + 2.0 * dnu * b_t**2)
            low, high = np.where(miss < 0.0, b_t, low), np.where(miss < 0.0, high, b_t)
            step = b_t - miss / slope
            after = np.where((step < low) | (step > high), 0.5 * (low + high), step)
            moved = float(np.abs(after - b_t).max(initial=0.0))
            b_t = after
            if moved < FLUX_TOL:
                break
        return np.copysign(b_t, b_d)

    def energy_density(self, b_d: FloatArray, b_q: FloatArray) -> FloatArray:
        """Stored energy int H . dB in J/m^3."""
        k = self.gap_share
        b_t = self.sheet_flux(b_d, b_q)
        b2 = b_t**2 + b_q**2
        h_d = self.steel(b2)[0] * b_t
        gaps = 0.5 * (MU_0 * h_d**2 + NU_0 * b_q**2)
        return (1.0 - k) * self.steel.energy_density(b2) + k * gaps
