"""Roots of many equations at once, each held in a bracket: none can fail without a word.

Chandrupatla's method (1997, from memory): inverse quadratic interpolation where the last three
points say that it converges, bisection elsewhere, so the bracket shrinks in every case and a
smooth function takes some 6 to 9 calls. All equations go through one call of the function, those
already met included, which numpy does faster than picking the rest.
"""

from collections.abc import Callable

import numpy as np
import numpy.typing as npt

from lamwright.geometry.errors import NotConverged
from lamwright.solver.types import FloatArray

STEPS_MOST = 120  # bisection alone ends after 52

BoolArray = npt.NDArray[np.bool_]
Function = Callable[[FloatArray], FloatArray]


def roots(
    function: Function, low: FloatArray, high: FloatArray, tolerance: float = 1e-12
) -> FloatArray:
    """Where the function is zero between `low` and `high`.

    nan where it has one sign at both, or is nan somewhere on the way: there is no such root.

    Args:
        function: arguments in the shape of the brackets -> values in the same shape.
        low: one end of each bracket; nan for an equation that is not there.
        high: the other end.
        tolerance: of the argument, over the greater end's amount.

    Raises:
        NotConverged: the bracket has not closed; no function that holds its values can do this.
    """
    a, b = np.array(high, dtype=float), np.array(low, dtype=float)
    f_a, f_b = function(a), function(b)
    has_root = np.sign(f_a) * np.sign(f_b) <= 0.0
    best = np.where(np.abs(f_a) < np.abs(f_b), a, b)
    slack = tolerance * np.maximum(np.abs(a), np.abs(b)) + np.finfo(float).tiny
    c, f_c, share = a.copy(), f_a.copy(), np.full(a.shape, 0.5)
    best_f = np.where(np.abs(f_a) < np.abs(f_b), f_a, f_b)
    for _ in range(STEPS_MOST):
        is_open = has_root & (best_f != 0.0) & (np.abs(b - a) > 2.0 * slack)
        if not is_open.any():
            return np.where(has_root, best, np.nan)
        new = np.where(is_open, a + share * (b - a), best)
        f_new = np.where(is_open, function(new), best_f)
        has_root &= np.isfinite(f_new)
        a, b, c, f_a, f_b, f_c = _narrowed(new, f_new, (a, b, c, f_a, f_b, f_c), is_open)
        nearer = np.abs(f_a) < np.abs(f_b)
        best, best_f = np.where(nearer, a, b), np.where(nearer, f_a, f_b)
        share = _share((a, b, c, f_a, f_b, f_c), slack)
    raise NotConverged("a root in a bracket was not found", tuple(np.ravel(best_f).tolist()[:9]))


Held = tuple[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray, FloatArray]


def _narrowed(new: FloatArray, f_new: FloatArray, held: Held, is_open: BoolArray) -> Held:
    """Bracket a, b with the newest point as a and the one it replaces as c."""
    a, b, c, f_a, f_b, f_c = held
    same = np.sign(f_new) == np.sign(f_a)
    crossed = is_open & ~same
    c, f_c = np.where(same, a, b), np.where(same, f_a, f_b)
    b, f_b = np.where(crossed, a, b), np.where(crossed, f_a, f_b)
    return np.where(is_open, new, a), b, c, np.where(is_open, f_new, f_a), f_b, f_c


def _share(held: Held, slack: FloatArray) -> FloatArray:
    """Where to look next, from a at 0 to b at 1."""
    a, b, c, f_a, f_b, f_c = held
    with np.errstate(divide="ignore", invalid="ignore"):
        xi, phi = (a - b) / (c - b), (f_a - f_b) / (f_c - f_b)
        converges = (phi**2 < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
        by_three = f_a / (f_b - f_a) * f_c / (f_b - f_c)
        by_three += (c - a) / (b - a) * f_a / (f_c - f_a) * f_b / (f_c - f_b)
        least = np.minimum(0.5, slack / np.abs(b - a))
    share = np.where(converges & np.isfinite(by_three), by_three, 0.5)
    return np.clip(share, np.nan_to_num(least, nan=0.5), 1.0 - np.nan_to_num(least, nan=0.5))
