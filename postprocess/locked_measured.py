"""Measured values beside the curves of a locked rotor: reading the table, and how far they lie.

The table is the one that `locked` writes, its `measured_...` columns filled in, in any rows; rows
may be taken out or added, at any angle. Measured inductances hold the end winding, so they are
compared with the field's value and the end winding's estimate together.
"""

import csv
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

from .locked import DEGREE, MM, LockedCurves, at_angles

CURRENT, ANGLE = "current_a", "angle_mech_deg"
# Column of a measured value -> name, unit, SI of one unit.
MEASURED = {
    "measured_torque_nm": ("torque", "N m", 1.0),
    "measured_inductance_apparent_mh": ("apparent inductance", "mH", 1.0 / MM),
    "measured_inductance_incremental_mh": ("incremental inductance", "mH", 1.0 / MM),
    "measured_inductance_no_current_mh": ("inductance without current", "mH", 1.0 / MM),
}
NO_CURRENT = "measured_inductance_no_current_mh"  # an a.c. bridge's; its rows need no current_a
SAME_CURRENT = 5e-3  # relative: a clamp's reading this near to a computed current is that


@dataclass(frozen=True, slots=True, eq=False)
class Measured:
    """Measured values of one kind at one current."""

    column: str
    current: float  # A, one of the computed ones; 0 without direct current
    angle: FloatArray  # (n,) mechanical rad, d axis ahead of the feed's axis
    value: FloatArray  # (n,) SI


@dataclass(frozen=True, slots=True, eq=False)
class Comparison:
    """Measured values and what is computed there."""

    measured: Measured
    computed: FloatArray  # (n,) SI

    @property
    def difference(self) -> FloatArray:
        """Measured less computed."""
        return self.measured.value - self.computed

    @property
    def rms(self) -> float:
        """Root of the mean square of the differences."""
        return float(np.sqrt(np.mean(self.difference**2)))

    @property
    def worst(self) -> int:
        """Number of the value that lies furthest off."""
        return int(np.argmax(np.abs(self.difference)))


def read_measured(
    path: Path, currents: Sequence[float], zero_deg: float = 0.0
) -> tuple[Measured, ...]:
    """The measured values in the file `path`.

    Args:
        path: CSV with a header row; columns `current_a`, `angle_mech_deg` and any of `MEASURED`.
        currents: A, the computed ones, to which the values must belong.
        zero_deg: reading of the file's angles with the d axis on the feed's axis.

    Raises:
        LamwrightError: it cannot be read, or a value is none.
    """
    try:
        text = path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError) as error:
        reason = getattr(error, "strerror", None) or "is no text"
        raise LamwrightError(f"--measured {path}: cannot be read: {reason.lower()}") from None
    reader = csv.DictReader(text.splitlines())
    header = reader.fieldnames or ()
    columns = [name for name in MEASURED if name in header]
    missing = [name for name in (CURRENT, ANGLE) if name not in header]
    if missing or not columns:
        lacks = missing[0] if missing else "measured_..."
        accepted = ", ".join((CURRENT, ANGLE, *MEASURED))
        raise LamwrightError(f"--measured {path}:1: no column {lacks}; accepted {accepted}")
    found: dict[tuple[str, float], list[tuple[float, float]]] = {}
    for row in reader:
        for column in columns:
            if (row[column] or "").strip():
                place = f"--measured {path}:{reader.line_num}"
                current = 0.0
                if column != NO_CURRENT:
                    current = _known_current(place, _number(place, row, CURRENT), currents)
                angle = DEGREE * (_number(place, row, ANGLE) - zero_deg)
                value = MEASURED[column][2] * _number(place, row, column)
                found.setdefault((column, current), []).append((angle, value))
    if not found:
        raise LamwrightError(
            f"--measured {path}: no row has a measured value; fill in {columns[0]}"
        )
    ordered = sorted(found.items(), key=lambda item: (columns.index(item[0][0]), item[0][1]))
    return tuple(
        Measured(column, current, *np.array(sorted(pairs)).T)
        for (column, current), pairs in ordered
    )


def compared(curves: LockedCurves, measured: Measured) -> Comparison:
    """Measured values beside the curve that they belong to."""
    k = int(np.argmin(np.abs(curves.currents - measured.current)))
    values = predicted(curves, measured.column)[k]
    return Comparison(measured, at_angles(curves, values, measured.angle.tolist()))


def predicted(curves: LockedCurves, column: str) -> FloatArray:
    """What a measured column holds if the computed machine is right, (n_cur, n_pos)."""
    if column == "measured_torque_nm":
        return curves.torque
    if column == NO_CURRENT:
        return (
            np.tile(curves.bare_slope, (curves.currents.size, 1)) + curves.terminal_end_inductance
        )
    field = curves.apparent if "apparent" in column else curves.slope
    return field + curves.terminal_end_inductance


def has_measured(path: Path) -> bool:
    """Whether the table at `path` holds a measured value, which must not be written over."""
    try:
        rows = list(csv.DictReader(path.read_text(encoding="utf-8-sig").splitlines()))
    except (OSError, UnicodeDecodeError, csv.Error):
        return False
    return any((row.get(column) or "").strip() for row in rows for column in MEASURED)


def _number(place: str, row: Mapping[str, str | None], column: str) -> float:
    text = (row[column] or "").strip()
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise LamwrightError(f"{place}: {column} = {text!r}: no number; accepted as 12.5")
    return value


def _known_current(place: str, current: float, currents: Sequence[float]) -> float:
    nearest = min(currents, key=lambda known: abs(known - current))
    if abs(current - nearest) > SAME_CURRENT * nearest:
        computed = ", ".join(f"{value:g}" for value in currents)
        raise LamwrightError(
            f"{place}: {CURRENT} = {current:g}: not computed; accepted {computed}, or add it to"
            " --currents"
        )
    return nearest
