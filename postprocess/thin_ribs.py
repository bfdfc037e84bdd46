"""The rule of the thinnest ribs: every one at its floor, or with just the margin asked for.

Let y be the logarithms of the widths, l those of the floors, r = log(margin / aim) of each group of
ribs that move together. Sought is

    y >= l,   r >= 0,   and for each group  y = l  or  r = 0,

a complementarity problem. Its linearisation with the slopes J = dr/dy is solved for the step d by
a primal-dual active set: groups at the floor have d = l - y, the others r + J d = 0; a group
changes sides where that makes its width less than the floor, or its margin less than the aim.
Source: Josephy-Newton with the primal-dual active set, textbook matter.
Axes: n groups.
"""

from dataclasses import dataclass, field

import numpy as np

from lamwright.geometry.rib_groups import RibGroup
from lamwright.solver.types import FloatArray

from .files import csv_text
from .quantities import COUNT, shown_as

LONGEST_STEP = 0.4  # of a logarithm: beyond, the slopes of a rib say little
USUAL_SLOPE = 0.7  # of log margin by log width, where the slopes cannot be used
# Of a group's own margin: the peak of a bent rib may hardly follow its width, and a step by so
# small a slope, or by one of the wrong sign, leads nowhere.
LEAST_SLOPE = 0.2
MOST_TURNS = 30  # of the active set; 2 or 3 are usual


def misfits(above: FloatArray, residual: FloatArray) -> FloatArray:
    """By how much each group misses the rule (n,), in logarithms.

    Args:
        above: y - l (n,), 0 at the floor.
        residual: r (n,).
    """
    return np.abs(np.minimum(above, residual))


def next_step(above: FloatArray, residual: FloatArray, slope: FloatArray) -> FloatArray:
    """Change (n,) of the logarithms of the widths that meets the rule to first order.

    Args:
        above: y - l (n,).
        residual: r (n,).
        slope: J (n, n), row by margin, column by width.
    """
    slope = slope.copy()
    np.fill_diagonal(slope, np.maximum(slope.diagonal(), LEAST_SLOPE))
    at_floor = above <= residual
    seen: list[bytes] = []
    for _ in range(MOST_TURNS):
        free = np.flatnonzero(~at_floor)
        step = -above
        if free.size:
            known = residual[free] + slope[np.ix_(free, np.flatnonzero(at_floor))] @ step[at_floor]
            try:
                step[free] = np.linalg.solve(slope[np.ix_(free, free)], -known)
            except np.linalg.LinAlgError:
                break
        left = residual + slope @ step
        then = np.where(at_floor, left >= 0.0, above + step < 0.0)
        if (then == at_floor).all():
            return np.asarray(step)
        if then.tobytes() in seen:
            break
        seen.append(then.tobytes())
        at_floor = then
    # No solution of the linear problem: each group by itself.
    return np.maximum(-above, -residual / USUAL_SLOPE)


def limited(step: FloatArray, longest: float = LONGEST_STEP) -> FloatArray:
    """The step with each component held to `longest`: one bad slope does not stop the others."""
    return np.clip(step, -longest, longest)


@dataclass(frozen=True, slots=True)
class ThinRib:
    """One group of ribs of the thinned design."""

    group: RibGroup
    width_before: float  # m, the least that the keys state
    width: float  # m
    floor: float  # m
    margin_before: float  # least of its ribs
    margin: float
    price: float | None  # N m of mean torque for each 0.1 mm more; None where not given

    @property
    def is_at_floor(self) -> bool:
        """Whether the floor decides, not the stress."""
        return self.width <= self.floor + 1e-9


@dataclass(frozen=True, slots=True, kw_only=True)
class ThinFigures:
    """What thinning has brought."""

    steps: int = field(
        metadata=shown_as("thin_steps", "thinnest ribs: designs solved", "", exact=COUNT)
    )
    yield_margin: float = field(
        metadata=shown_as("thin_yield_margin", "thinnest ribs: least yield margin of a rib", "")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ThinTorque:
    """Mean torque at rated current, each at its own angle of most torque."""

    torque_before: float = field(
        metadata=shown_as("thin_torque_before_nm", "torque, mean, ribs as stated", "N m")
    )
    torque: float = field(metadata=shown_as("thin_torque_nm", "torque, mean, thinnest ribs", "N m"))


COLUMNS = (
    "rib",
    "key",
    "width_before_mm",
    "width_mm",
    "floor_mm",
    "is_at_floor",
    "yield_margin_before",
    "yield_margin",
    "torque_change_nm_per_0.1_mm",
)


def thin_rows(ribs: tuple[ThinRib, ...]) -> list[dict[str, object]]:
    """The ribs as they stand in JSON; a price that is not given is left out."""
    rows: list[dict[str, object]] = []
    for rib in ribs:
        values = (
            rib.group.label,
            rib.group.keys[0],
            round(1e3 * rib.width_before, 6),
            round(1e3 * rib.width, 6),
            round(1e3 * rib.floor, 6),
            rib.is_at_floor,
            rib.margin_before,
            rib.margin,
            rib.price,
        )
        pairs = zip(COLUMNS, values, strict=True)
        rows.append({key: value for key, value in pairs if value is not None})
    return rows


def thin_csv(ribs: tuple[ThinRib, ...]) -> str:
    """One row for each group of ribs."""
    rows = [
        [_cell(row[column]) if column in row else "" for column in COLUMNS]
        for row in thin_rows(ribs)
    ]
    return csv_text(COLUMNS, rows)


def _cell(value: object) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:.6g}" if isinstance(value, float) else str(value)
