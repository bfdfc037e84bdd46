"""What differs between two designs, drawings or folders of results: keys, geometry, figures."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.contour_changes import contour_changes
from lamwright.geometry.errors import LamwrightError, OutlineError
from lamwright.geometry.outline_gaps import OutlineGaps, outline_gaps
from lamwright.geometry.outline_places import place_text
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.differences import (
    FigureDifference,
    Pair,
    difference_rows,
    figure_differences,
)
from lamwright.postprocess.files import json_text, prepared_folder

from .compare_side import Side, read_side, sizes
from .version import version

if TYPE_CHECKING:
    from lamwright.geometry.supplier_outline import SupplierOutline

MOST_CHANGES = 12  # contours named each
NONE = 1e-9  # m, less is rounding
MM, UM = 1e3, 1e6  # per m


@dataclass(frozen=True, slots=True, eq=False)
class CompareReport:
    """Everything that differs; empty where both sides do not tell."""

    first: Side
    second: Side
    keys: tuple[tuple[str, object, object], ...]
    sizes: tuple[Pair, ...]  # mm, mm2
    ribs: tuple[Pair, ...]  # m
    changes: tuple[str, ...]  # contours, in words
    gaps: OutlineGaps | None
    found: "SupplierOutline | None"  # of a design and a drawing
    figures: tuple[FigureDifference, ...]

    @property
    def largest(self) -> tuple[float, str] | None:
        """The largest deviation in m and where it is, in words."""
        if self.found is not None:
            worst = self.found.worst[0]
            return abs(worst.deviation), worst.text
        if self.gaps is None:
            return None
        gap, place = self.gaps.largest
        return gap, place_text(place)

    @property
    def is_same(self) -> bool:
        """Whether nothing differs."""
        return not (
            self.keys
            or any(pair.differs for pair in (*self.sizes, *self.ribs))
            or self.changes
            or (self.largest is not None and self.largest[0] > NONE)
            or any(one.differs for one in self.figures)
        )


def compare(first: str | Path, second: str | Path) -> CompareReport:
    """Compare what two paths hold.

    Raises:
        LamwrightError: one of them cannot be compared, or they have nothing in common; one line.
    """
    a, b = read_side(Path(first)), read_side(Path(second))
    found, ribs = None, _pairs(a.ribs, b.ribs)
    changes: tuple[str, ...] = ()
    gaps = None
    if {a.kind, b.kind} == {"design", "drawing"}:
        design, drawing = (a, b) if a.kind == "design" else (b, a)
        found = _held(design, drawing)
        pairs = [(f"p{rib.pole} {rib.name}", rib.designed, rib.width) for rib in found.ribs]
        changes = _drawn_twice(drawing)
        ribs = tuple(
            Pair(name, *((was, now) if a is design else (now, was))) for name, was, now in pairs
        )
    elif a.edges and b.edges:
        gaps = outline_gaps(a.edges, b.edges)
        if a.contours and b.contours:
            every = [change.text for change in contour_changes(a.contours, b.contours)]
            more = len(every) - MOST_CHANGES
            rest = (f"{more} further changes",) if more > 0 else ()
            changes = (*every[:MOST_CHANGES], *rest)
    report = CompareReport(
        a,
        b,
        _keys(a, b),
        _sizes(a, b),
        ribs,
        changes,
        gaps,
        found,
        figure_differences(a.figures, b.figures) if a.figures and b.figures else (),
    )
    if report.largest is None and not report.figures:
        raise LamwrightError(f"{first} and {second}: nothing that both have; accepted two alike")
    return report


def _held(design: Side, drawing: Side) -> "SupplierOutline":
    from lamwright.geometry.supplier_outline import supplier_outline

    assert design.section is not None
    try:
        return supplier_outline(design.section, drawing.path)
    except OutlineError as error:
        raise LamwrightError(f"{drawing.path}: {error}") from None


def _drawn_twice(drawing: Side) -> tuple[str, ...]:
    """One line where lines or arcs stand on each other: a machine would cut them twice."""
    known: set[tuple[frozenset[complex], complex]] = set()
    twice = []
    for edge in drawing.edges:
        ends = frozenset(_rounded(p) for p in (edge.start, edge.end))
        key = ends, _rounded(edge.point(0.5))
        if key in known:
            twice.append(edge)
        known.add(key)
    if not twice:
        return ()
    first = place_text(twice[0].start)
    return (f"{len(twice)} lines and arcs of the drawing stand twice, the first at {first}",)


def _rounded(point: complex) -> complex:
    return complex(round(point.real, 8), round(point.imag, 8))


def _sizes(a: Side, b: Side) -> tuple[Pair, ...]:
    """Sizes that both have: loose lines of a drawing tell neither area nor length."""
    pairs = _pairs(sizes(a), sizes(b))
    return tuple(p for p in pairs if p.first is not None and p.second is not None)


def _pairs(first: Mapping[str, float], second: Mapping[str, float]) -> tuple[Pair, ...]:
    if not first or not second:
        return ()
    return tuple(Pair(name, first.get(name), second.get(name)) for name in {**first, **second})


def _keys(a: Side, b: Side) -> tuple[tuple[str, object, object], ...]:
    """Keys of two designs with unlike values, in the order of the files."""
    if a.machine is None or b.machine is None:
        return ()
    first, second = (
        dict(_flat("", m.design.model_dump(mode="json"))) for m in (a.machine, b.machine)
    )
    return tuple(
        (key, first.get(key), second.get(key))
        for key in {**first, **second}
        if first.get(key) != second.get(key)
    )


def _flat(key: str, value: object) -> list[tuple[str, object]]:
    """A nested value as dotted keys, as findings name them."""
    if isinstance(value, dict):
        dot = f"{key}." if key else ""
        return [pair for k, v in value.items() for pair in _flat(f"{dot}{k}", v)]
    if isinstance(value, list):
        return [pair for k, v in enumerate(value, 1) for pair in _flat(f"{key}[{k}]", v)]
    return [(key, value)]


def compare_record(report: CompareReport) -> dict[str, object]:
    """The report for JSON."""
    largest = report.largest
    return {
        "a": {"path": str(report.first.path), "kind": report.first.kind},
        "b": {"path": str(report.second.path), "kind": report.second.kind},
        "same": report.is_same,
        "keys": [{"key": key, "a": a, "b": b} for key, a, b in report.keys],
        "geometry": {
            "sizes": [
                {"figure": p.key, "a": p.first, "b": p.second, "change": p.change}
                for p in report.sizes
            ],
            "largest_deviation_um": None if largest is None else UM * largest[0],
            "where": None if largest is None else largest[1],
            "has_partner_everywhere": report.gaps is None or not report.gaps.is_beyond,
            "changes": list(report.changes),
            "ribs": [
                {"rib": p.key, "a_mm": _mm(p.first), "b_mm": _mm(p.second)} for p in report.ribs
            ],
        },
        "figures": difference_rows(report.figures, ("a", "b")),
        "version": version(),
    }


def _mm(value: float | None) -> float | None:
    return None if value is None else round(MM * value, 6)


def write_compare(report: CompareReport, json_file: Path | None, folder: Path | None) -> None:
    """Write record and picture where they are wanted.

    Raises:
        LamwrightError: the folder cannot be written.
    """
    if json_file is not None:
        write_text(json_file, json_text(compare_record(report)))
    if folder is None:
        return
    ready = prepared_folder(folder)
    name = f"{report.first.path.name} and {report.second.path.name}"
    if report.found is not None:
        from lamwright.postprocess.figures_deviation import write_deviation

        write_deviation(ready, name, report.found)
    elif report.gaps is not None:
        from lamwright.postprocess.figures_compare import write_gaps

        write_gaps(ready, name, report.first.edges, report.second.edges, report.gaps)
