"""Surfaces of the coenergy that are off by a map's errors, to see what figures make of them.

    W'(i_d, i_q) + a W'(i_d, 0) + b (W'(i_d, i_q) - W'(i_d, 0))

moves psi_q by the share b everywhere and psi_d by a where there is no i_q, so linkages stay slopes
of one surface (derived). Between two such surfaces and the map's own a figure differs by what it
may be off by: a bound, for errors of both linkages that help each other.
"""

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
from scipy.interpolate import BSpline

from .coenergy_surface import DEGREE, CoenergySurface
from .figure_errors import differences

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


def shifted(surface: CoenergySurface, share_d: float, share_q: float) -> CoenergySurface:
    """The surface with psi_d and psi_q larger by these shares."""
    low, high = surface.i_q_range
    start = surface.knots_q[DEGREE]
    zero = float(np.clip(0.0, max(low, start), high))
    at_zero = BSpline.design_matrix(np.array([zero]), surface.knots_q, DEGREE).toarray()[0]
    # The splines sum to 1, so equal coefficients along i_q are a function of i_d alone.
    along_d = (surface.coefficients @ at_zero)[:, None]
    moved = surface.coefficients + share_d * along_d
    moved += share_q * (surface.coefficients - along_d)
    return replace(surface, coefficients=moved)


def summed(errors: Sequence[dict[str, float]]) -> dict[str, float]:
    """Errors of independent causes added by key; those that one cause lacks are left out."""
    if not errors:
        return {}
    keys = set(errors[0]).intersection(*errors[1:])
    return {key: sum(own[key] for own in errors) for key in errors[0] if key in keys}


def shift_errors(
    groups: "Sequence[DataclassInstance]", others: "Sequence[Sequence[DataclassInstance]]"
) -> dict[str, float]:
    """Errors of figures by key, in their units.

    Args:
        groups: of the map's own surface.
        others: the same of each shifted surface.
    """
    return summed([differences(groups, other) for other in others])


def with_angle(errors: dict[str, float], angle: float, keys: Sequence[str]) -> dict[str, float]:
    """The errors, those of best angles in degrees at the least an angle in rad.

    One share for all currents hardly moves a best angle; errors that change with it do.
    """
    least = {key: max(errors[key], np.degrees(angle)) for key in keys if key in errors}
    return {**errors, **{key: float(error) for key, error in least.items()}}
