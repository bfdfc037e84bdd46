"""The pictures of a study from its ledger: rows as plain arrays, rotors of the designs it shows."""

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Literal, cast

import click
import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.figures_study import rotors_shown, write_study_figures
from lamwright.postprocess.studied import Studied, StudyAxis
from lamwright.solver.types import FloatArray

from .ledger import Ledger
from .ledger_rows import Row
from .ledger_study import KeptStudy
from .ledger_tables import reason_classes
from .study_figures import known_figures

if TYPE_CHECKING:
    from lamwright.geometry.section import CrossSection

    from .study import Study

# Shown beside goals and limits where they vary, in this order.
USUAL = (
    "torque_nm",
    "torque_ripple_percent",
    "saliency_ratio",
    "power_factor",
    "yield_margin",
    "rib_stress_peak_mpa",
    "rotor_mass_kg",
)
# Endings of keys and the units that they say.
_UNITS = {
    "mm": "mm",
    "deg": "deg",
    "rpm": "1/min",
    "a": "A",
    "v": "V",
    "percent": "%",
    "mpa": "MPa",
}


def write_pictures(ledger: Ledger, folder: str | Path) -> tuple[Path, ...]:
    """Write the pictures of a study beside its ledger, as PNG and SVG.

    Raises:
        LamwrightError: no design has figures yet.
    """
    figures = (*ledger.study.figures, *USUAL)
    rows = sorted(
        ledger.rows(figures=figures), key=lambda row: row.hash
    )  # the same for any order of finishing
    if not any(row.figures for row in rows):
        raise LamwrightError(f"{ledger.path}: no design has figures yet, so there is no picture")
    studied = studied_of(ledger.study, rows)
    sections = {}
    for k in rotors_shown(studied):
        section = _section(ledger, rows[k])
        if section is not None:
            sections[k] = section
    return write_study_figures(Path(folder), studied, sections)


def draw_study(folder: Path, study: "Study", command: str, options: str) -> None:
    """Write pictures and report of a study beside its ledger and say where, or why there are none.

    Args:
        folder: of the ledger.
        study: as read from its file.
        command: that computes it again, for the report, as `sweep`.
        options: of that command, as they are typed.

    Raises:
        KeyboardInterrupt: with a line for the user; the designs are kept whatever happens.
    """
    try:
        with Ledger.read(folder) as ledger:
            written = write_pictures(ledger, folder)
            from .report_files import HTML_FILE, PDF_FILE, write_report
            from .report_study import study_report

            write_report(study_report(study, ledger, written, command, options), folder)
    except KeyboardInterrupt:
        told = f"no pictures, all designs are kept; lamwright ledger {folder} --pictures draws them"
        raise KeyboardInterrupt(f"interrupted: {told}") from None
    except LamwrightError as error:
        click.echo(f"no pictures: {error}")
        return
    names = ", ".join(path.stem for path in written if path.suffix == ".png")
    click.echo(f"pictures (PNG, SVG) in {folder}: {names}")
    click.echo(f"report: {folder / HTML_FILE}, {PDF_FILE}")


def studied_of(study: KeptStudy, rows: Sequence[Row]) -> Studied:
    """Rows as the plain arrays that the pictures take."""
    known = known_figures()
    limits = {figure: (least, most) for figure, least, most in study.limits}
    senses = dict(study.goals)
    figures = []
    for name in dict.fromkeys((*study.figures, *USUAL)):
        values = np.array([row.figures.get(name, np.nan) for row in rows])
        if not np.isfinite(values).any():
            continue
        errors = np.array([row.errors.get(name, np.nan) for row in rows])
        shown = known.get(name)
        least, most = limits.get(name, (None, None))
        figures.append(
            StudyAxis(
                name,
                shown.label if shown else name,
                shown.unit if shown else "",
                values,
                errors=errors if np.isfinite(errors).any() else None,
                least=least,
                most=most,
                sense=cast("Literal['most', 'least'] | None", senses.get(name)),
            )
        )
    return Studied(
        study.name,
        np.array([row.number for row in rows]),
        np.array([row.passes is True for row in rows]),
        tuple(reason_classes(rows)),
        _keys(study, rows),
        tuple(figures),
    )


def _keys(study: KeptStudy, rows: Sequence[Row]) -> tuple[StudyAxis, ...]:
    labels = [_label(key) for key in study.keys]
    found = []
    for key, (label, unit) in zip(study.keys, labels, strict=True):
        twice = labels.count((label, unit)) > 1
        values, texts = _numbers([row.values.get(key) for row in rows])
        found.append(StudyAxis(key, key if twice else label, unit, values, texts, is_key=True))
    return tuple(found)


def _label(key: str) -> tuple[str, str]:
    """A key in words without the table it stands in, and its unit: `gap`, `mm`."""
    words = key.partition(".")[2] or key
    name, _, ending = words.rpartition("_")
    unit = _UNITS.get(ending, "")
    plain = (name if unit else words).replace("_", " ").replace(".", " ")
    return plain, unit


def _numbers(values: Sequence[object]) -> tuple[FloatArray, tuple[str, ...]]:
    texts = sorted({value for value in values if isinstance(value, str)})
    coded = [texts.index(value) if isinstance(value, str) else value for value in values]
    return np.array([np.nan if v is None else v for v in coded], dtype=float), tuple(texts)


def _section(ledger: Ledger, row: Row) -> "CrossSection | None":
    """The cross-section of a row's design; None where it cannot be drawn."""
    from lamwright.geometry.cross_section import cross_section

    from .study_machine import machine_of

    kept = ledger.design(row.number)
    try:
        machine = machine_of("design.toml", kept.text, kept.cards, kept.drawings)
        return cross_section(machine.design)
    except LamwrightError:
        return None
