"""Parts that the reports of several commands share."""

import platform
from collections.abc import Iterable, Mapping, Sequence
from importlib.metadata import PackageNotFoundError
from importlib.metadata import version as installed_version
from pathlib import Path

from lamwright.postprocess.quantities import Figure
from lamwright.postprocess.report import (
    Cell,
    Grid,
    Lines,
    Paragraph,
    Picture,
    Section,
    numeral,
    word_rows,
    words,
)
from lamwright.postprocess.verdict import Outcome

from .lines import error_number, number, valued
from .version import version

LIBRARIES = ("numpy", "scipy", "gmsh", "cvxopt", "scikit-fem", "ezdxf")
CAUTION = (
    "These results support, and never replace, a qualified engineer's judgement, the supplier's "
    "material certificate, an overspeed test in containment, and local codes and standards. "
    "Rotors burst."
)
LIMITS = {
    "least_torque_nm": "least torque, mean",
    "most_ripple_percent": "most torque ripple",
    "least_saliency_ratio": "least saliency ratio",
    "least_yield_margin": "least yield margin at overspeed",
}
# What a picture shows, by its file's name; others are named by their file.
CAPTIONS = {
    "section": "The pole that is computed: regions, ribs and winding.",
    "flux": "Flux density (colour) and flux lines at rated current, first of all positions.",
    "torque": "Torque over 60 electrical degrees, and its orders.",
    "deviation": "The outline as supplied against the design.",
    "stress": "Von Mises stress at overspeed, the deformation enlarged; the ribs close up.",
    "ribs": "Yield margin, peak and life of each rib.",
    "plastic": "What has yielded at overspeed.",
    "fit_pressure": "Pressure of the shaft's fit over speed.",
    "modes": "The lowest modes of rotor and stator, and the speeds at which orders meet them.",
    "thin": "What the thinnest ribs cost and bring.",
    "map": "Flux linkages over the currents; mean torque and ripple over their plane.",
    "control_plane": "Most torque per ampere, per volt and within both limits over the currents.",
    "envelope": "Most torque and power over speed within current and voltage.",
    "efficiency": "Efficiency over torque and speed.",
    "ripple": "Where the ripple comes from.",
    "forces": "Radial forces on the stator by order.",
    "losses": "Losses at rated load.",
    "loss_density": "Iron loss where it arises.",
    "yardsticks": "The machine against yardsticks of the trade.",
}


def figure_grid(figures: Iterable[Figure], errors: Mapping[str, float], note: str = "") -> Grid:
    """A table of figures with their error bars."""
    rows = tuple(
        (
            words(figure.label),
            numeral(figure_text(figure), figure.key),
            error_cell(errors, figure.key),
        )
        for figure in figures
    )
    return without_empty(Grid(("what", "value", "+-"), rows, note))


def without_empty(grid: Grid) -> Grid:
    """The table without the columns of error bars that have none."""
    kept = [
        k
        for k, column in enumerate(grid.columns)
        if column != "+-" or any(row[k].text for row in grid.rows)
    ]
    rows = tuple(tuple(row[k] for k in kept) for row in grid.rows)
    return Grid(tuple(grid.columns[k] for k in kept), rows, grid.note)


def limits_grid(outcomes: Iterable[Outcome], errors: Mapping[str, float], note: str) -> Grid:
    """A row for each limit with what was found."""

    def row(outcome: Outcome) -> tuple[Cell, ...]:
        figure = outcome.figure
        sign = ">=" if outcome.is_least else "<="
        limit = f"{sign} {number(outcome.limit)} {figure.unit}".rstrip()
        return (
            words(LIMITS[outcome.key]),
            numeral(limit, f"limits/{outcome.key}"),
            numeral(valued(figure), figure.key),
            error_cell(errors, figure.key),
            words("holds", "good") if outcome.holds else words("MISSED", "bad"),
        )

    heads = ("limit", "asked", "found", "+-", "outcome")
    return without_empty(Grid(heads, tuple(row(outcome) for outcome in outcomes), note))


def figure_text(figure: Figure) -> str:
    """A figure with its unit as on the terminal, but counts whole."""
    return str(figure.value) if isinstance(figure.value, int) else valued(figure)


def error_cell(errors: Mapping[str, float], key: str, place: str = "") -> Cell:
    """The figure's error, in its unit; empty where there is none.

    Args:
        errors: by key.
        key: of the figure.
        place: of the figure in the JSON file, where it is not the key alone.
    """
    if key not in errors:
        return numeral("")
    return numeral(error_number(errors[key]), f"{place or key}_error")


def picture_blocks(folder: Path, names: Sequence[str]) -> tuple[Picture, ...]:
    """Those of the pictures that have been drawn."""
    return tuple(
        Picture(name, CAPTIONS.get(name, name.replace("_", " ")))
        for name in names
        if (folder / f"{name}.png").exists()
    )


def records_grid(
    records: Sequence[Mapping[str, object]],
    heads: Sequence[tuple[str, str]],
    place: str,
    note: str = "",
) -> Grid:
    """A row for each record, a column for each (key, head) of it; one "+-" where it has an error.

    Args:
        records: as in the JSON file.
        heads: keys and heads of the columns; a key that no record has is left out.
        place: of the records in the JSON file, as `ribs`.
        note: that stands below.
    """

    def shown(k: int, key: str, value: object) -> Cell:
        if isinstance(value, int):
            return numeral(str(value), f"{place}/{k}/{key}")
        if isinstance(value, float):
            told = error_number(value) if key.endswith("_error") else number(value)
            return numeral(told, f"{place}/{k}/{key}")
        return numeral("-") if value is None else words(str(value))

    columns = [(key, head) for key, head in heads if any(key in record for record in records)]
    rows = tuple(
        tuple(shown(k, key, record.get(key)) for key, _ in columns)
        for k, record in enumerate(records)
    )
    return Grid(tuple(head for _, head in columns), rows, note)


def method_grid(lines: Sequence[tuple[str, str, str]]) -> Grid:
    """What was done, how, and whose it is."""
    return Grid(("what", "how", "source"), word_rows(lines), "(m): cited from memory")


def lines_section(title: str, items: Sequence[str], otherwise: str) -> Section:
    """A section that is a list, or one sentence where there is nothing to list."""
    return Section(title, (Lines(tuple(items)) if items else Paragraph(otherwise),))


def times_grid(seconds: Mapping[str, float]) -> Grid:
    """Wall time by phase."""
    rows = tuple(
        (words(phase), numeral(f"{spent:.2f}", f"seconds/{phase}"))
        for phase, spent in seconds.items()
    )
    return Grid(("phase", "s"), rows)


def made_by() -> Grid:
    """The versions of the programs that took part."""
    programs = [("lamwright", version()), ("Python", platform.python_version()), *_libraries()]
    return Grid(("program", "version"), tuple((words(n), words(v)) for n, v in programs))


def _libraries() -> list[tuple[str, str]]:
    found = []
    for name in LIBRARIES:
        try:
            found.append((name, installed_version(name)))
        except PackageNotFoundError:
            continue
    return found
