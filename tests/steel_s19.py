"""Test steel "S19": an invented explicit law, monotone, ends in slope mu0; no product.

H(B) = a B + (nu0 - a)/2 [sqrt((B-s)^2 + d^2) - sqrt((B+s)^2 + d^2) + 2 B],
a = 50 m/H, s = 1.9 T, d = 0.05 T.
"""

import numpy as np

from lamwright.solver.steel import NU_0, SteelLaw, law_from_function, law_from_points
from lamwright.solver.types import FloatArray

SLOPE, KNEE, WIDTH = 50.0, 1.9, 0.05  # m/H, T, T


def field_strength(b: FloatArray) -> FloatArray:
    """H in A/m at B in T."""
    bend = np.hypot(b - KNEE, WIDTH) - np.hypot(b + KNEE, WIDTH) + 2.0 * b
    return SLOPE * b + 0.5 * (NU_0 - SLOPE) * bend


def slope(b: FloatArray) -> FloatArray:
    """dH/dB in m/H at B in T."""
    bend = (b - KNEE) / np.hypot(b - KNEE, WIDTH) - (b + KNEE) / np.hypot(b + KNEE, WIDTH) + 2.0
    return SLOPE + 0.5 * (NU_0 - SLOPE) * bend


def energy_density(b: FloatArray) -> FloatArray:
    """Stored energy in J/m^3 at B in T."""

    def g(x: FloatArray) -> FloatArray:
        return 0.5 * (x * np.hypot(x, WIDTH) + WIDTH**2 * np.arcsinh(x / WIDTH))

    knee = np.asarray(KNEE)
    return 0.5 * SLOPE * b**2 + 0.5 * (NU_0 - SLOPE) * (
        b**2 + g(b - KNEE) - g(b + KNEE) + 2.0 * g(knee)
    )


def s19_points(count: int = 40, last: float = 2.1) -> tuple[FloatArray, FloatArray]:
    """B-H points as a card would have them: a third up to 1.4 T, the rest closer, to `last` T."""
    low = np.linspace(0.0, 1.4, count // 3 + 1)[1:]
    b = np.concatenate([low, np.linspace(1.4, last, count - low.size + 1)[1:]])
    return b, field_strength(b)


def s19_exact(stacking_factor: float = 1.0) -> SteelLaw:
    """The law from the explicit function."""
    return law_from_function(lambda b: (field_strength(b), slope(b)), stacking_factor)


def s19_tabulated(count: int = 40, last: float = 2.1) -> SteelLaw:
    """The law from points alone, as from a card."""
    return law_from_points(*s19_points(count, last))
