r"""AC loss of copper strands: bars in a slot, and single strands in a field across them.

Bars in a slot with parallel sides (Field 1905, Emde 1908, from memory; derived again, and held by a
solution of the eddy currents in `tests/external`). With xi = h sqrt(pi f mu0 sigma b_c / b_s)

    phi = xi (sinh 2 xi + sin 2 xi) / (cosh 2 xi - cos 2 xi)
    psi = 2 xi (sinh xi - sin xi) / (cosh xi + cos xi)

bar k from the bottom of m in series loses R I^2 (phi + k (k - 1) psi). In its middle the field of
all is H = (k - 1/2) I / b_s, so that is R [(phi - psi / 4) I^2 + psi (b_s H)^2]: what a bar does by
itself, and in a field across it, which may be any. Exact where the field is across the slot.

A round strand alone, radius a, in a field of amplitude B across it has inside (derived)

    A = 2 B / (k J_0(k a)) J_1(k r) sin(angle),   k^2 = -j omega mu0 sigma

and loses sigma omega^2 / 2 int |A|^2; pi sigma omega^2 B^2 d^4 / 128 a metre where it is thin.
"""

import math

import numpy as np

from lamwright.solver.steel import MU_0
from lamwright.solver.types import FloatArray

LEAST_XI = 0.02  # under it phi and psi lose digits to cancellation; their series hold to 1e-9
MOST_XI = 300.0  # over it the hyperbolic functions overflow; phi = xi, psi = 2 xi long before


def bar_xi(height: float, frequency: FloatArray, resistivity: float, share: float) -> FloatArray:
    """Reduced height xi of a bar, SI; `share` is copper's part of the slot's width."""
    xi: FloatArray = height * np.sqrt(math.pi * frequency * MU_0 * share / resistivity)
    return xi


def bar_phi(xi: FloatArray) -> FloatArray:
    """Loss of a bar in its own field, over that of direct current."""
    x = np.clip(xi, LEAST_XI, 0.5 * MOST_XI)
    exact = x * (np.sinh(2 * x) + np.sin(2 * x)) / (np.cosh(2 * x) - np.cos(2 * x))
    return np.where(xi < LEAST_XI, 1.0 + 4.0 / 45.0 * xi**4, np.where(xi > x, xi, exact))


def bar_psi(xi: FloatArray) -> FloatArray:
    """Loss of a bar in the field of those below it; see the file's head."""
    x = np.clip(xi, LEAST_XI, MOST_XI)
    exact = 2 * x * (np.sinh(x) - np.sin(x)) / (np.cosh(x) + np.cos(x))
    return np.where(xi < LEAST_XI, xi**4 / 3.0, np.where(xi > x, 2.0 * xi, exact))


def bar_leakage(xi: FloatArray) -> FloatArray:
    """Slot leakage of a bar over that of direct current: 3 / (2 xi) (sinh - sin) / (cosh - cos)."""
    x = np.clip(xi, 0.5 * LEAST_XI, 0.5 * MOST_XI)
    double = 2.0 * x
    exact = 3.0 / double * (np.sinh(double) - np.sin(double)) / (np.cosh(double) - np.cos(double))
    return np.where(xi < 0.1, 1.0 - 8.0 / 315.0 * xi**4, np.where(xi > x, 1.5 / xi, exact))


def layer_factors(xi: float, layers: int) -> FloatArray:
    """Loss factors (layers,) of bars in series above each other, from the bottom up."""
    k = np.arange(1, layers + 1)
    factors: FloatArray = bar_phi(np.array(xi)) + k * (k - 1) * bar_psi(np.array(xi))
    return factors


def mean_factor(xi: FloatArray, layers: int) -> FloatArray:
    """Their mean, phi + (m^2 - 1) psi / 3."""
    return bar_phi(xi) + (layers**2 - 1) / 3.0 * bar_psi(xi)


def bar_alone(xi: FloatArray) -> FloatArray:
    """Part of a bar's loss that its own current makes without a field across, phi - psi / 4."""
    # The series spares the difference of two nearly equal terms: xi^4 / 180.
    return np.where(xi < 0.1, 1.0 + xi**4 / 180.0, bar_phi(xi) - 0.25 * bar_psi(xi))


def bar_in_field(
    height: float, width: float, frequency: FloatArray, resistivity: float, share: float
) -> FloatArray:
    """Loss per metre over the square of the amplitude across, W/(m T^2): rectangular strand.

    Args:
        height: of the strand square to the field, in m.
        width: along the field, in m.
        frequency: Hz.
        resistivity: Ohm m.
        share: copper's part of the width along the field.
    """
    xi = np.maximum(bar_xi(height, frequency, resistivity, share), 1e-12)
    # rho / (h b) psi (b_s H)^2, H rms, and xi by b / b_s = share
    psi_free = bar_psi(xi) / (share * share)
    loss: FloatArray = 0.5 * resistivity * width / height * psi_free / MU_0**2
    return loss


def round_in_field(diameter: float, frequency: FloatArray, resistivity: float) -> FloatArray:
    """Loss per metre over the square of the amplitude across, W/(m T^2): round strand."""
    from scipy.special import jv

    omega = np.maximum(2.0 * math.pi * frequency, 1e-6)
    a = 0.5 * diameter
    k = np.sqrt(omega * MU_0 / resistivity) * np.exp(-0.25j * math.pi)
    j0, j1 = jv(0, k * a), jv(1, k * a)
    # Lommel: int r J1(k r) J1(k* r) dr = a (k* J1 J0* - k J0 J1*) / (k^2 - k*^2)
    integral = a * (k.conj() * j1 * j0.conj() - k * j0 * j1.conj()) / (k**2 - k.conj() ** 2)
    amplitude = np.abs(2.0 / (k * j0)) ** 2
    loss: FloatArray = 0.5 * omega**2 / resistivity * amplitude * math.pi * integral.real
    return loss


def round_alone(diameter: float, frequency: FloatArray, resistivity: float) -> FloatArray:
    """Loss of a round strand by its own current over that of direct current (Kelvin 1889, m)."""
    from scipy.special import jv

    omega = np.maximum(2.0 * math.pi * frequency, 1e-6)
    k = np.sqrt(omega * MU_0 / resistivity) * np.exp(-0.25j * math.pi)
    z = 0.5 * diameter * k
    factor: FloatArray = (0.5 * z * jv(0, z) / jv(1, z)).real
    return factor
