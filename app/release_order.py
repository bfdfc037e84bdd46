"""What the command line says of an order, as values; every fault is one line."""

import datetime
import math
from collections.abc import Mapping
from dataclasses import fields

from lamwright.geometry.errors import DesignError
from lamwright.geometry.nesting import Strip
from lamwright.geometry.punch_options import PunchOptions
from lamwright.postprocess.sheet_job import SheetOptions

from .release_record import Order

MM = 1e-3  # m
MOST = 3000.0  # mm, of a strip and what is left in it: coils are up to 2 m wide
LONGEST = 200  # characters of a text of the drawing


def order_of(values: Mapping[str, object]) -> Order:
    """The order by the names of the options' values.

    Raises:
        DesignError: one line for each value that cannot be.
    """
    faults = [*_strip_faults(values), *_text_faults(values)]
    date = str(values["date"])
    if date and not _is_date(date):
        faults.append(f"--date {date}: not a date; accepted as 2026-01-31")
    try:
        punch = PunchOptions(**_own(PunchOptions, values))  # type: ignore[arg-type]
    except DesignError as error:
        faults += str(error).split("\n")
    if faults:
        raise DesignError("\n".join(faults))
    sheet = SheetOptions(**_own(SheetOptions, values))  # type: ignore[arg-type]
    width = values["strip_width_mm"]
    strip = None
    if width is not None:
        strip = Strip(
            *(MM * _float(values[key]) for key in ("strip_width_mm", "bridge_mm", "edge_mm"))
        )
    return Order(punch, sheet, strip)


def _own(kind: type, values: Mapping[str, object]) -> dict[str, object]:
    return {item.name: values[item.name] for item in fields(kind) if item.name in values}


def _strip_faults(values: Mapping[str, object]) -> list[str]:
    names = {
        "strip_width_mm": "--strip-width",
        "bridge_mm": "--strip-bridge",
        "edge_mm": "--strip-edge",
    }
    faults = []
    for key, option in names.items():
        value = values[key]
        if value is None:
            continue
        least = 0.0 if key != "strip_width_mm" else 1.0
        if not (math.isfinite(_float(value)) and least <= _float(value) <= MOST):
            faults.append(f"{option} {value}: out of range; accepted {least:g} to {MOST:g}")
    return faults


def _text_faults(values: Mapping[str, object]) -> list[str]:
    faults = []
    for key, value in values.items():
        for text in value if isinstance(value, tuple) else (value,):
            if isinstance(text, str) and (len(text) > LONGEST or not text.isprintable()):
                option = "--remark" if key == "remarks" else f"--{key.replace('_', '-')}"
                faults.append(f"{option}: no line of text; accepted up to {LONGEST} characters")
    return faults


def _is_date(text: str) -> bool:
    try:
        return datetime.date.fromisoformat(text).isoformat() == text
    except ValueError:
        return False


def _float(value: object) -> float:
    assert isinstance(value, int | float)
    return float(value)
