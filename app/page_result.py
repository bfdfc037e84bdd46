"""What a finished job says, in one form for coarse and full verdicts.

Numbers of a full verdict are those of its `verdict.json`, unchanged; labels and units come from
where the figures are declared.
"""

import csv
import json
from collections.abc import Mapping, Sequence
from pathlib import Path

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.postprocess.files import VERDICT_FILE
from lamwright.postprocess.quantities import Figure, figures_of
from lamwright.postprocess.torque import TorqueWaveform
from lamwright.postprocess.verdict import Outcome, judged

from .coarse_bars import coarse_bars
from .page_drawing import MM, Record
from .study_figures import NOT_QUICK, known_figures
from .study_quick import QuickWork

DEGREE = 57.29577951308232  # per rad
MPA = 1e-6
SHOWN_SUFFIXES = (".png", ".svg", ".csv", ".json", ".html", ".pdf", ".dxf")
COARSE_CAUTIONS = (
    "coarse: a mesh half as fine and fewer rotor positions than assess; its error bars are from "
    "other designs that both were computed of; the full verdict computes its own",
)


def coarse_record(machine: Machine, work: QuickWork, seconds: float) -> Record:
    """The result of a quick evaluation."""
    groups = (
        ("magnetic", work.magnetic),
        ("terminal", work.terminal),
        ("stress", work.stress),
        ("masses", work.masses),
    )
    known = [
        (group, figure)
        for group, own in groups
        for figure in figures_of(own)
        if figure.key not in NOT_QUICK
    ]
    values = {figure.key: float(figure.value) for _, figure in known}
    bars = coarse_bars(values, machine.design.pole_pairs)
    outcomes = judged(machine.design.limits, work.magnetic, work.stress)
    return {
        "design_name": machine.design.name,
        "design_hash": design_hash(machine.design, machine.cards),
        "effort": "coarse",
        "seconds": round(seconds, 3),
        "figures": [_figure_record(group, one, bars.get(one.key)) for group, one in known],
        "outcomes": [_outcome_record(one, bars.get(one.figure.key)) for one in outcomes],
        "passes": all(one.holds for one in outcomes),
        "torque": _torque_record(work.field.waveform),
        "ribs": [
            {
                "name": row.rib.name,
                "kind": row.rib.kind,
                "barrier": row.rib.barrier,
                "width_mm": round(MM * row.rib.width, 6),
                "peak_mpa": MPA * row.peak,
                "peak_mpa_error": None,
                "tension_mean_mpa": MPA * row.mean_tension,
                "yield_margin": row.yield_margin,
            }
            for row in work.ribs.ribs
        ],
        "cautions": list(COARSE_CAUTIONS),
        "files": [],
    }


def full_record(folder: Path) -> Record:
    """The result of an `assess` in its folder.

    Raises:
        OSError, ValueError, KeyError: the folder does not hold a whole one.
    """
    verdict = json.loads((folder / VERDICT_FILE).read_text(encoding="utf-8"))
    estimates = set(verdict["estimates"])
    known = known_figures()
    groups = _groups()
    figures = []
    for key, shown in known.items():
        if isinstance(verdict.get(key), int | float):
            figure = Figure(key, shown.label, verdict[key], shown.unit, key in estimates)
            figures.append(_figure_record(groups[key], figure, verdict.get(f"{key}_error")))
    outcomes = []
    for key, one in verdict["outcomes"].items():
        shown = known[one["figure"]]
        figure = Figure(one["figure"], shown.label, one["value"], shown.unit, False)
        outcome = Outcome(key, figure, one["limit"], key.startswith("least_"))
        outcomes.append(_outcome_record(outcome, verdict.get(f"{one['figure']}_error")))
        assert outcome.holds == one["holds"]
    return {
        "design_name": verdict["design"],
        "design_hash": verdict["design_hash"],
        "effort": "full",
        "tolerance": verdict["tolerance"],
        "seconds": verdict["seconds"]["total"],
        "figures": figures,
        "outcomes": outcomes,
        "passes": verdict["passes"],
        "torque": _torque_of(folder / "torque.csv"),
        "ribs": _ribs_of(folder / "ribs.csv"),
        "cautions": verdict["cautions"],
        "files": shown_files(folder),
    }


def shown_files(folder: Path) -> list[str]:
    """Names of the files in a result's folder that the page may ask for."""
    files = [path for path in folder.iterdir() if path.suffix in SHOWN_SUFFIXES]
    return sorted(
        path.name
        for path in files
        if path.is_file() and not path.is_symlink() and not path.name.startswith(".")
    )


def _figure_record(group: str, figure: Figure, error: float | None) -> Record:
    return {
        "key": figure.key,
        "label": figure.label,
        "unit": figure.unit,
        "group": group,
        "value": figure.value,
        "error": error,
        "estimate": figure.is_estimate,
    }


def _outcome_record(outcome: Outcome, error: float | None) -> Record:
    return {
        "key": f"limits.{outcome.key}",
        "figure": outcome.figure.key,
        "label": outcome.figure.label,
        "value": outcome.figure.value,
        "error": error,
        "limit": outcome.limit,
        "unit": outcome.figure.unit,
        "sense": "least" if outcome.is_least else "most",
        "passes": outcome.holds,
    }


def _torque_record(waveform: TorqueWaveform) -> Record:
    return {
        "angle_deg": [round(DEGREE * float(angle), 6) for angle in waveform.angle_el],
        "torque_nm": [float(torque) for torque in waveform.torque],
    }


def _torque_of(path: Path) -> Record:
    rows = _table(path)
    return {
        "angle_deg": [float(row["angle_el_deg"]) for row in rows],
        "torque_nm": [float(row["torque_nm"]) for row in rows],
    }


def _ribs_of(path: Path) -> list[Record]:
    numbers = ("width_mm", "peak_mpa", "peak_mpa_error", "tension_mean_mpa", "yield_margin")
    return [
        {
            "name": row["rib"],
            "kind": row["kind"],
            "barrier": int(row["barrier"]),
            **{name: float(row[name]) if row.get(name) else None for name in numbers},
        }
        for row in _table(path)
    ]


def _table(path: Path) -> Sequence[Mapping[str, str]]:
    with path.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def _groups() -> dict[str, str]:
    """The group that a figure's key stands in."""
    from dataclasses import fields

    from lamwright.postprocess.magnet_figures import MagnetFigures
    from lamwright.postprocess.masses import MassFigures
    from lamwright.postprocess.quantities import OutlineFigures
    from lamwright.postprocess.verdict import (
        MagneticFigures,
        SolverFigures,
        StressFigures,
        TerminalFigures,
    )

    named = (
        ("magnetic", MagneticFigures),
        ("terminal", TerminalFigures),
        ("stress", StressFigures),
        ("masses", MassFigures),
        ("outline", OutlineFigures),
        ("solver", SolverFigures),
        ("magnets", MagnetFigures),
    )
    return {item.metadata["shown"].key: name for name, group in named for item in fields(group)}
