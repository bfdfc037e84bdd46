"""The rows of a ledger as netCDF-4, for programs that read tables with units."""

import re
from collections.abc import Sequence
from pathlib import Path

import numpy as np

from lamwright.postprocess.netcdf import Variable, write_netcdf

from .ledger_rows import ERROR_ENDING, Columns, Row
from .ledger_study import KeptStudy
from .ledger_tables import unit_of, value_of
from .study_figures import known_figures


def write_rows(path: Path, study: KeptStudy, columns: Columns, rows: Sequence[Row]) -> None:
    """Rows as netCDF-4 over one axis of designs; texts as whole numbers with their meaning."""
    axis = ("design",)
    known = known_figures()
    numbers = np.array([row.number for row in rows], dtype=float)
    variables = [Variable("design", axis, numbers, "1", "number of the design in the ledger")]
    for name in ("outcome", "origin", "passes", "seconds", *columns.keys):
        values, meaning = _numbers([value_of(row, name) for row in rows])
        unit = "s" if name == "seconds" else unit_of(name)
        variables.append(Variable(_plain(name), axis, values, unit, f"{name}{meaning}"))
    for figure in columns.figures:
        label = known[figure].label if figure in known else figure
        for name in (figure, figure + ERROR_ENDING):
            if name == figure or figure in columns.errors:
                values, _ = _numbers([value_of(row, name) for row in rows])
                told = label if name == figure else f"error of {label}"
                variables.append(Variable(name, axis, values, unit_of(figure), told))
    write_netcdf(path, variables, {"title": study.name, "goals": _goals(study)})


def _numbers(
    values: Sequence[object],
) -> "tuple[np.ndarray[tuple[int], np.dtype[np.float64]], str]":
    texts = sorted({value for value in values if isinstance(value, str)})
    coded = [texts.index(value) if isinstance(value, str) else value for value in values]
    meaning = ", ".join(f"{k} {text}" for k, text in enumerate(texts))
    array = np.array([np.nan if value is None else value for value in coded], dtype=float)
    return array, f": {meaning}" if texts else ""


def _plain(name: str) -> str:
    return re.sub(r"\W+", "_", name.replace("[*]", "_all")).strip("_")


def _goals(study: KeptStudy) -> str:
    return ", ".join(f"{sense} {figure}" for figure, sense in study.goals) or "none"
