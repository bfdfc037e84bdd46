"""What a package promises against its design solved again: a promise forged everywhere shows.

Processors differ in the last digits, and in the steps that an iteration takes. Measured, the demo
on a processor's full and on its oldest instructions: figures to 6e-10 of themselves, errors of
figures, which are differences of close numbers, to 1.1e-5. So figures are compared to `NEARLY`,
and how they were solved (elements, steps, residuals) is not.
"""

import cmath
import math
from collections.abc import Mapping
from dataclasses import fields
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING, TypeGuard

from lamwright.geometry.design_file import Machine
from lamwright.postprocess.files import VERDICT_FILE
from lamwright.postprocess.verdict import SolverFigures

from .progress import Progress
from .release_manifest import Promise, Record, promise_of, read_record
from .release_record import differences

if TYPE_CHECKING:
    from lamwright.solver.tolerance import ToleranceName

NEARLY = 1e-6  # relative, of a figure
NEARLY_ERROR = 1e-2  # relative, of a figure's error
NEARLY_NONE = 1e-6  # in a figure's own unit, of figures that are about nothing
HARMONICS = "torque_harmonics"
HALF = 0.5  # of the progress is before


def solved_changes(machine: Machine, promise: Promise, progress: Progress) -> list[str]:
    """One line for each figure promised that the design, solved again, does not have.

    Raises:
        NotConverged: an iteration did not end.
    """
    from .run import assess

    stated = promise.record
    tolerance: ToleranceName = stated.get("tolerance", "normal")  # type: ignore[assignment]
    if tolerance not in ("coarse", "normal", "fine"):
        return [f"{VERDICT_FILE}: tolerance = {tolerance!r}: not one of assess"]

    def told(phase: str, share: float) -> None:
        progress(phase, HALF + (1.0 - HALF) * share)

    with TemporaryDirectory() as folder:
        assess(machine.path, folder, told, tolerance, pictures=False)
        record = read_record(Path(folder) / VERDICT_FILE, "a verdict")
    again = promise_of(record, machine.design.limits).record
    lines = differences(*compared(stated, again))
    return [f"{VERDICT_FILE}: {line}, when solved again" for line in lines]


def compared(stated: Record, again: Record) -> tuple[Record, Record]:
    """Both records without what no promise is; numbers that agree are the stated ones in both."""
    work = {item.metadata["shown"].key for item in fields(SolverFigures)}
    left_out = work | {f"{key}_error" for key in work} | {"version"}
    both = [{k: v for k, v in record.items() if k not in left_out} for record in (stated, again)]
    return both[0], {key: _aligned(key, value, both[0]) for key, value in both[1].items()}


def _aligned(key: str, value: object, stated: Mapping[str, object]) -> object:
    """A value solved again, or the stated one where the two agree."""
    other = stated.get(key)
    if key == HARMONICS:
        return other if _same_harmonics(other, value, stated.get("torque_nm")) else value
    if isinstance(value, Mapping) and isinstance(other, Mapping):
        return {inner: _aligned(inner, item, other) for inner, item in value.items()}
    if isinstance(value, list) and isinstance(other, list):
        pairs = {str(k): item for k, item in enumerate(other)}
        return [_aligned(str(k), item, pairs) for k, item in enumerate(value)]
    if not (_is_number(value) and _is_number(other)):
        return value
    if key.endswith("_error"):
        figure = stated.get(key.removesuffix("_error"))
        room = NEARLY * abs(figure) if _is_number(figure) else 0.0
        is_same = abs(value - other) <= room + NEARLY_ERROR * abs(value)
    else:
        is_same = abs(value - other) <= NEARLY * abs(value) + NEARLY_NONE
    return other if is_same else value


def _same_harmonics(stated: object, again: object, torque: object) -> bool:
    """Whether waves agree to `NEARLY` of the torque: the phase of one of no height says nothing."""
    waves, others = _waves(stated), _waves(again)
    if waves is None or others is None or not _is_number(torque):
        return False
    room = NEARLY * abs(torque)
    return waves.keys() == others.keys() and all(
        abs(waves[order] - others[order]) <= room for order in waves
    )


def _waves(value: object) -> dict[int, complex] | None:
    """Amplitude and phase of each order as one complex number; None of anything else."""
    try:
        return {
            int(one["order_el"]): cmath.rect(one["amplitude_nm"], math.radians(one["phase_deg"]))
            for one in value  # type: ignore[attr-defined]
        }
    except (TypeError, KeyError, ValueError):
        return None


def _is_number(value: object) -> TypeGuard[float]:
    return isinstance(value, int | float) and not isinstance(value, bool)
