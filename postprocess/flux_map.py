"""The flux map: linkages, torque and coenergy over a grid of currents and rotor positions.

dq, amplitude-invariant, peak values; linkages hold no end winding. Positions are equally spaced
over 60 electrical degrees, end excluded, so a mean over them is exact for every order below
the sampling limit (see `torque`), and they are mirror symmetric where the machine is.

At every position the discrete field has psi = 2/3 grad W' over (i_d, i_q) exactly (derived: it is
stationary, and sum psi_k di_k = 3/2 (psi_d di_d + psi_q di_q)), so the means have it too.

Axes: n_d and n_q currents, n_pos positions.
"""

from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .torque import interpolant

LEAST_TORQUE = 0.01  # of the greatest mean: below it a ripple in percent says nothing


@dataclass(frozen=True, slots=True, eq=False)
class FluxMap:
    """Linkages, torque and coenergy of the whole machine over currents and positions."""

    pole_pairs: int
    i_d: FloatArray  # (n_d,), A peak, rising
    i_q: FloatArray  # (n_q,), A peak, rising
    position: FloatArray  # (n_pos,), rad mechanical, equally spaced over 60 electrical degrees
    psi_d: FloatArray  # (n_d, n_q, n_pos), V s
    psi_q: FloatArray  # (n_d, n_q, n_pos), V s
    torque: FloatArray  # (n_d, n_q, n_pos), N m, Maxwell stress
    coenergy: FloatArray  # (n_d, n_q, n_pos), J

    def _repr_html_(self) -> str:
        """Pictures and main figures, as a notebook shows them."""
        from .notebook import flux_map_html  # it needs all that is here

        return flux_map_html(self)


def mean_linkages(flux_map: FluxMap) -> tuple[FloatArray, FloatArray]:
    """Means of psi_d and psi_q over the positions, V s, (n_d, n_q) each."""
    return flux_map.psi_d.mean(axis=-1), flux_map.psi_q.mean(axis=-1)


def mean_torque(flux_map: FluxMap) -> FloatArray:
    """Mean torque by the Maxwell stress in N m, (n_d, n_q)."""
    mean: FloatArray = flux_map.torque.mean(axis=-1)
    return mean


def mean_coenergy(flux_map: FluxMap) -> FloatArray:
    """Mean coenergy in J, (n_d, n_q)."""
    mean: FloatArray = flux_map.coenergy.mean(axis=-1)
    return mean


def linkage_torque(flux_map: FluxMap) -> FloatArray:
    """Mean torque by the mean linkages in N m, (n_d, n_q)."""
    psi_d, psi_q = mean_linkages(flux_map)
    # T = 3/2 p (psi_d i_q - psi_q i_d), derived: power balance, mean over a period
    return 1.5 * flux_map.pole_pairs * (psi_d * flux_map.i_q - psi_q * flux_map.i_d[:, None])


def torque_swing(flux_map: FluxMap) -> FloatArray:
    """Greatest less least torque over the positions' interpolant in N m, (n_d, n_q)."""
    return np.apply_along_axis(lambda wave: float(np.ptp(interpolant(wave))), -1, flux_map.torque)


def ripple(flux_map: FluxMap) -> FloatArray:
    """Swing over mean torque (n_d, n_q); nan where the mean is under 1 % of the greatest."""
    mean = np.abs(mean_torque(flux_map))
    says_something = mean > LEAST_TORQUE * mean.max(initial=0.0)
    return torque_swing(flux_map) / np.where(says_something, mean, np.nan)


def apparent_inductances(flux_map: FluxMap) -> tuple[FloatArray, FloatArray]:
    """psi_d / i_d and psi_q / i_q in H, (n_d, n_q) each; nan where that current is zero."""
    psi_d, psi_q = mean_linkages(flux_map)
    i_d = np.where(flux_map.i_d == 0.0, np.nan, flux_map.i_d)
    i_q = np.where(flux_map.i_q == 0.0, np.nan, flux_map.i_q)
    return psi_d / i_d[:, None], psi_q / i_q
