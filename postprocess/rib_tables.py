"""One row for each rib, a unit in every key: what `ribs.csv` and the ribs of `ribs.json` hold.

A rib's figures come in groups of one kind for all ribs: the elastic ones here, others (what yields,
how long it lasts) from whoever computes them. What has no meaning for a rib, as the speed at which
one under pressure yields in tension, is not a number: null in JSON, empty in CSV.
Axes: n_rib ribs of the rotor's own period.
"""

import cmath
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING

from lamwright.geometry.corners import foot, is_within
from lamwright.geometry.curves import Edge, Point
from lamwright.geometry.section import CrossSection, Region, Rib, base_name, rotor_cell
from lamwright.solver.estimate_stress import BEYOND
from lamwright.solver.types import FloatArray

from .figure_errors import NOT_ESTIMATED, SUFFIX
from .files import csv_text
from .quantities import OUTLINE, RPM, Shown, scaled_by_key, shown_as
from .ribs import RibReport, RibStress
from .table_errors import Columns

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

ON_OUTLINE = 1e-6  # m, far above rounding and below any element
BARE = ("rotor_iron", "shaft", "gap_rotor", "rim_air")  # regions that cut nothing out of the iron
OTHER_SIDE = {"left": "right", "right": "left"}
AT_NODE = "not estimated: the mesh's node of most stress"
ALIKE = 5e-3  # of the peak: the two of a mirrored pair differ by their meshes
MM, MPA, DEGREE = 1e3, 1e-6, math.pi / 180.0


@dataclass(frozen=True, slots=True, kw_only=True)
class RibFigures:
    """One rib at overspeed, elastic."""

    width: float = field(metadata=shown_as("width_mm", "width", "mm", MM, exact=OUTLINE))
    tension: float = field(metadata=shown_as("tension_mean_mpa", "mean tension", "MPa", MPA))
    shear: float = field(metadata=shown_as("shear_mean_mpa", "mean shear", "MPa", MPA))
    bending: float = field(metadata=shown_as("bending_mpa", "bending", "MPa", MPA))
    peak: float = field(metadata=shown_as("peak_mpa", "peak von Mises stress", "MPa", MPA))
    peak_x: float = field(
        metadata=shown_as("peak_x_mm", "place of the peak, x", "mm", MM, exact=AT_NODE)
    )
    peak_y: float = field(
        metadata=shown_as("peak_y_mm", "place of the peak, y", "mm", MM, exact=AT_NODE)
    )
    peak_angle: float = field(
        metadata=shown_as(
            "peak_angle_deg", "place of the peak, from its q axis", "deg", 1 / DEGREE, exact=AT_NODE
        )
    )
    concentration: float = field(
        metadata=shown_as("stress_concentration", "peak over mean tension", "")
    )
    yield_margin: float = field(metadata=shown_as("yield_margin", "yield margin", ""))
    first_yield_speed: float = field(
        metadata=shown_as("speed_first_yield_rpm", "speed of first yield", "1/min", RPM)
    )
    mean_yield_speed: float = field(
        metadata=shown_as("speed_mean_yield_rpm", "speed of mean yield", "1/min", RPM)
    )


@dataclass(frozen=True, slots=True)
class RibRow:
    """One rib with all that is known of it."""

    rib: Rib
    peak_on: str  # what of the outline its peak sits on
    groups: "tuple[DataclassInstance, ...]"  # with fields made by `quantities.shown_as`
    errors: Mapping[str, float] = field(default_factory=dict)  # by key, of some of the figures

    @property
    def values(self) -> dict[str, float | None]:
        """The figures in their units by key; None where one has no meaning."""
        found: dict[str, float | None] = {}
        for group in self.groups:
            for item in fields(group):
                shown: Shown = item.metadata["shown"]
                value: float = getattr(group, item.name)
                found[shown.key] = shown.scale * value if math.isfinite(value) else None
        return found

    @property
    def record(self) -> dict[str, object]:
        """The rib as it stands in JSON."""
        rib = self.rib
        found: dict[str, object] = {
            "rib": rib.name,
            "kind": rib.kind,
            "barrier": rib.barrier,
            "peak_on": self.peak_on,
        }
        for key, value in self.values.items():
            found[key] = value
            if key in self.errors:
                error = self.errors[key]
                found[key + SUFFIX] = error if math.isfinite(error) else None
        return found


def elastic_figures(section: CrossSection, report: RibReport) -> tuple[RibFigures, ...]:
    """The ribs of a report at overspeed.

    Args:
        section: exact outlines.
        report: at overspeed.
    """
    return tuple(_figures(section, row, report.speed) for row in report.ribs)


def elastic_errors(
    section: CrossSection, report: RibReport, finer: RibReport, peaks: FloatArray
) -> tuple[dict[str, float], ...]:
    """Errors of each rib's figures by key, in their units; what has no meaning has none.

    Args:
        section: exact outlines.
        report: what the figures are of.
        finer: the same from the mesh four times as fine.
        peaks: (n_rib or more,), relative, of the peaks.
    """
    found = []
    for own, fine, share in zip(report.ribs, finer.ribs, peaks.tolist(), strict=False):
        figures = _figures(section, own, report.speed)
        tension = BEYOND * abs(fine.mean_tension - own.mean_tension)
        of_tension = tension / own.mean_tension if own.mean_tension > 0.0 else math.nan
        errors = {
            "tension": tension,
            "shear": BEYOND * abs(fine.mean_shear - own.mean_shear),
            "bending": BEYOND * abs(fine.bending - own.bending),
            "peak": share * own.peak,
            "concentration": (share + of_tension) * figures.concentration,
            "yield_margin": share * own.yield_margin,
            # Speeds go with the root of a margin.
            "first_yield_speed": 0.5 * share * figures.first_yield_speed,
            "mean_yield_speed": 0.5 * of_tension * figures.mean_yield_speed,
        }
        found.append(scaled_by_key(figures, errors))
    return tuple(found)


def rib_columns(rows: Sequence[RibRow]) -> Columns:
    """Why columns of `ribs.csv` have no error beside them."""
    return {
        item.metadata["shown"].key: item.metadata["shown"].exact or NOT_ESTIMATED
        for group in rows[0].groups
        for item in fields(group)
        if item.metadata["shown"].key not in rows[0].errors
    }


def _figures(section: CrossSection, row: RibStress, speed: float) -> RibFigures:
    angle = cmath.phase(row.peak_at) % section.pole_angle - 0.5 * section.pole_angle
    return RibFigures(
        width=row.rib.width,
        tension=row.mean_tension,
        shear=row.mean_shear,
        bending=row.bending,
        peak=row.peak,
        peak_x=row.peak_at.real,
        peak_y=row.peak_at.imag,
        peak_angle=angle,
        # Of a rib that is pressed or hardly pulled the ratio says nothing.
        concentration=row.peak / row.mean_tension if row.mean_tension > 0.0 else math.nan,
        yield_margin=row.yield_margin,
        first_yield_speed=speed * math.sqrt(row.yield_margin),
        mean_yield_speed=row.mean_yield_speed,
    )


def rib_rows(
    section: CrossSection,
    report: RibReport,
    *groups: "Sequence[DataclassInstance]",
    errors: Sequence[Mapping[str, float]] = (),
) -> tuple[RibRow, ...]:
    """One row for each rib.

    Args:
        section: exact outlines.
        report: whose ribs and places of peaks they are.
        groups: each of n_rib groups of figures of one kind.
        errors: of each rib by the figures' keys; of none if empty.
    """
    known = errors or [{}] * len(report.ribs)
    return tuple(
        RibRow(row.rib, outline_place(section, row.peak_at), tuple(of_rib), own)
        for row, own, *of_rib in zip(report.ribs, known, *groups, strict=True)
    )


def ribs_csv(rows: Sequence[RibRow]) -> str:
    """One line for each rib; places in the rotor's frame, d axis along x."""
    header = list(rows[0].record)
    return csv_text(header, [[_text(value) for value in row.record.values()] for row in rows])


def _text(value: object) -> str:
    if isinstance(value, float):
        return f"{value:.6g}"
    return "" if value is None else str(value)


def outline_place(section: CrossSection, at: Point) -> str:
    """What of the rotor's outline lies at a point in m: which cut, straight or which arc."""
    section = rotor_cell(section)
    for region in section.rotor:
        if base_name(region.name) in BARE:
            continue
        for edge in region.outer.edges:
            if _away(edge, at) < ON_OUTLINE:
                return f"{_words(region)}, {_shape(edge)}"
    if abs(abs(at) - section.shaft_radius) < ON_OUTLINE:
        return "bore"
    rims = (r.outer.edges for r in section.rotor if base_name(r.name) == "rotor_iron")
    if any(_away(edge, at) < ON_OUTLINE for edges in rims for edge in edges):
        return "rim"
    return "inside the iron"


def _away(edge: Edge, at: Point) -> float:
    """Distance in m of a point from an edge."""
    ends = min(abs(at - edge.start), abs(at - edge.end))
    nearest = foot(edge, at)
    return min(ends, abs(at - nearest)) if is_within(edge, nearest) else ends


def _shape(edge: Edge) -> str:
    return "straight side" if edge.is_line else f"arc of {MM * edge.radius:.3g} mm"


def _words(region: Region) -> str:
    kind, *rest = base_name(region.name).split("_")
    return " ".join([kind, "".join(rest) if len(rest) < 3 else " ".join(rest)])


def shown_ribs(rows: Sequence[RibRow]) -> list[tuple[str, RibRow]]:
    """Ribs by falling peak, each with its name; of a mirrored pair the more stressed for both."""
    found: list[tuple[str, RibRow]] = []
    names = {row.rib.name: row for row in rows}
    for row in sorted(rows, key=_peak, reverse=True):
        stem, _, side = row.rib.name.rpartition("_")
        other = names.get(f"{stem}_{OTHER_SIDE.get(side)}")
        is_pair = other is not None and abs(_peak(row) - _peak(other)) <= ALIKE * _peak(row)
        if is_pair and any(shown is other for _, shown in found):
            continue
        words = f"{stem}, both" if is_pair else row.rib.name
        found.append((words.replace("_", " "), row))
    return found


def _peak(row: RibRow) -> float:
    peak = row.values["peak_mpa"]
    assert peak is not None
    return peak
