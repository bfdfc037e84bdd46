"""A supplier's or an inspection's outline of a design: recognised, laid on it, and measured.

The design says what is to be found, so nothing need be closed, joined or in order: points are taken
on all that is drawn, laid on the designed outline, and each of its contours is fitted to them.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path as FilePath

import numpy as np
import numpy.typing as npt

from .dxf_reader import DrawnPieces, read_pieces
from .errors import OutlineError
from .outline_distance import ComplexArray, Feet, FloatArray, feet, is_inside
from .outline_places import place_text
from .outline_report import OutlineSource, source_of
from .section import CrossSection
from .supplier_align import Alignment, alignment, on_edges
from .supplier_circle import as_circle
from .supplier_cover import Cover, covered, whole_turn
from .supplier_fit import FittedContour, fitted_contour
from .supplier_ideal import Ideal, ideal_outline, is_circle
from .supplier_ribs import MeasuredRib, measured_ribs
from .supplier_samples import Samples, samples_of
from .supplier_section import measured_section

MM = 1e-3  # m
UM = 1e-6  # m
REACH_SHARE = 0.0125  # of the rim's radius: further off is no longer this design's outline
REACH = (1e-4, 5e-4)  # m, its range
SIZE_SHARE = 0.005  # of the diameter, by which a whole outline may be too large or small
UNITS = {25.4: "inches", 10.0: "cm", 1000.0: "m", 0.001: "um", 1.0 / 25.4: "mm", 0.1: "mm"}
STRAY = 6.0  # standard deviations of a contour's points
LEAST_STRAY = 2e-5  # m
MAP_STEP = 4e-4  # m, between the points of the deviation map
MOST_TRIED = 20_000  # points as to whether they lie in the steel: more is no lamination
CHORD = 1e-3  # m, of the outline in that test: its arcs rise less than points off it are away
MOST_PLACES = 6  # worst places named
APART = 0.08  # of the rim's radius, between places that are named each

IntArray = npt.NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class WorstPlace:
    """A place where the outline leaves the design the most nearby."""

    deviation: float  # m, positive where steel was left standing
    at: complex  # m, in the rotor's frame
    drawn: complex  # m, in the drawing
    text: str  # pole, radius, angle


@dataclass(frozen=True, slots=True)
class Ring:
    """A circle fitted to the measured rim or bore."""

    radius: float  # m
    designed: float
    centre: complex  # m, from the axis of the alignment
    unroundness: float  # m, greatest less least distance from that centre


@dataclass(frozen=True, slots=True, eq=False)
class SupplierOutline:
    """What was found in one drawing; lengths in m, places in the rotor's frame."""

    source: OutlineSource
    ideal: Ideal
    alignment: Alignment
    copies: int  # how often what was drawn stands in a whole turn
    contours: tuple[FittedContour, ...]
    at: ComplexArray  # (n,) points of the map, on the measured outline
    deviation: FloatArray  # (n,) of those points, positive where steel was left standing
    contour_of: IntArray  # (n,)
    worst: tuple[WorstPlace, ...]
    strays: tuple[WorstPlace, ...]  # farthest point of each contour that does not follow its fit
    ribs: tuple[MeasuredRib, ...]
    rim: Ring | None  # where the design's is round
    bore: Ring | None
    group: int  # period analysed, from 0
    left_out: int  # points on what is drawn besides, in cavities and outside
    section: CrossSection  # with the measured outline

    @property
    def noise(self) -> float:
        """Greatest standard deviation in m of the points about the contours fitted to them."""
        return max(fit.noise for fit in self.contours)

    @property
    def poles_analysed(self) -> tuple[int, ...]:
        """Numbers, from 1, of the poles that stand for all."""
        period = self.ideal.period
        return tuple(range(self.group * period + 1, (self.group + 1) * period + 1))


def supplier_outline(
    section: CrossSection,
    path: FilePath,
    unit_mm: float | None = None,
    layers: Sequence[str] = (),
) -> SupplierOutline:
    """The outline in the DXF file `path` held against a design's cross-section.

    Args:
        section: the design.
        path: drawing of the rotor lamination, whole or a sector of whole poles.
        unit_mm: mm per drawing unit; by default the file's own, and mm where it states none.
        layers: that hold the outline; by default all that are shown.

    Raises:
        OutlineError: one line: not readable, another size, mirrored, something missing or more.
    """
    pieces = read_pieces(path, unit_mm, layers, assumed_mm=1.0)
    ideal = ideal_outline(section)
    samples = samples_of(pieces.edges)
    _raise_if_of_other_size(samples, ideal, pieces)
    reach = min(max(REACH_SHARE * ideal.rim, REACH[0]), REACH[1])
    laid = alignment(samples.at, ideal)
    points = samples.at_places(laid.aligned(samples.at))
    cover = covered(points, ideal, reach)
    _raise_if_unlike(cover, ideal, laid, points)
    points, copies = whole_turn(points, cover, ideal, reach)
    found = feet(points.at, ideal.edges, reach)
    left_out = _left_out(points, found, ideal, laid)
    _raise_if_mirrored(laid)
    owners = np.array(ideal.owners)
    contours = []
    for number, contour in enumerate(ideal.contours):
        own = (found.edge >= 0) & (owners[found.edge] == number)
        edges, held = contour.path.edges, points.kept(own)
        fit = fitted_contour(edges, held, reach)
        contours.append(as_circle(edges, fit, held, copies) if is_circle(edges) else fit)
    ribs = measured_ribs(ideal, contours)
    group = worst_group(ribs, ideal)
    at, contour_of = _map_points(contours)
    deviation = feet(at, ideal.edges, 2.0 * reach).distance
    return SupplierOutline(
        source=source_of(path.name, pieces),
        ideal=ideal,
        alignment=laid,
        copies=copies,
        contours=tuple(contours),
        at=at,
        deviation=deviation,
        contour_of=contour_of,
        worst=_worst(at, deviation, ideal, laid),
        strays=_strays(points, found, owners, contours, ideal, laid),
        ribs=ribs,
        rim=_ring(contours, ideal, "OUTER_CONTOUR", ideal.rim, section.ring_radius is None),
        bore=_ring(contours, ideal, "BORE", ideal.bore, True),
        group=group,
        left_out=left_out,
        section=measured_section(section, ideal, contours, ribs, group),
    )


def worst_group(ribs: Sequence[MeasuredRib], ideal: Ideal) -> int:
    """The period, from 0, with the rib that has the least share of its designed width."""
    if not ribs:
        return 0
    # To 1e-6, so that of ribs that are alike the first counts.
    thinnest = min(ribs, key=lambda rib: round(rib.width / rib.designed, 6))
    return (thinnest.pole - 1) // ideal.period


def _raise_if_of_other_size(samples: Samples, ideal: Ideal, pieces: DrawnPieces) -> None:
    x, y = samples.at.real, samples.at.imag
    wide, high = float(x.max() - x.min()), float(y.max() - y.min())
    size, designed = max(wide, high), 2.0 * ideal.rim
    told = (
        f"the outline is {wide / MM:.4g} x {high / MM:.4g} mm ({pieces.unit_source}), the design's "
        f"rotor {designed / MM:.4g} mm across"
    )
    for factor in UNITS:
        if abs(size * factor / designed - 1.0) < SIZE_SHARE:
            right = pieces.unit_mm * factor
            raise OutlineError(f"{told}; state --outline-unit-mm {right:.6g} if that is its unit")
    if size > designed + max(SIZE_SHARE * designed, 2.0 * REACH[1]):
        raise OutlineError(
            f"{told}; accepted the rotor alone at its size: name its layers by --outline-layer"
        )


def _raise_if_unlike(cover: Cover, ideal: Ideal, laid: Alignment, points: Samples) -> None:
    """What the design has and the drawing has not."""
    if cover.missing is None:
        return
    size = float(np.abs(points.at).max()) / MM
    raise OutlineError(
        f"{cover.missing_length / MM:.3g} mm of the design's outline are not drawn, first at "
        f"{ideal.place(cover.missing)}, in the drawing {place_text(laid.drawn(cover.missing))}"
        f" ({100.0 * cover.share:.3g} % of it were found; the drawing reaches {size:.5g} mm from"
        " the axis); accepted an outline of this design",
        laid.drawn(cover.missing),
    )


def _raise_if_mirrored(laid: Alignment) -> None:
    if laid.is_mirrored:
        raise OutlineError(
            "the outline is the design's mirror image, as seen from the other side of the sheet: "
            "its poles would face the other way; accepted the side that the design shows, mirror "
            "the drawing"
        )


def _left_out(points: Samples, found: Feet, ideal: Ideal, laid: Alignment) -> int:
    """Points on nothing of the design; none may lie in the steel."""
    off = points.at[found.edge < 0]
    off = off[:: 1 + off.size // MOST_TRIED]
    inside = is_inside(off, ideal.edges, CHORD)
    if inside.any():
        place = laid.drawn(complex(off[inside][0]))
        text = f"something is drawn in the steel at {place_text(place)}, "
        raise OutlineError(
            text + f"{ideal.place(complex(off[inside][0]))}, where the design has nothing", place
        )
    return int((found.edge < 0).sum())


def _map_points(contours: Sequence[FittedContour]) -> tuple[ComplexArray, IntArray]:
    parts = [on_edges(fit.edges, MAP_STEP) for fit in contours]
    number = np.repeat(np.arange(len(parts)), [part.size for part in parts])
    return np.concatenate(parts), number


def _worst(
    at: ComplexArray, deviation: FloatArray, ideal: Ideal, laid: Alignment
) -> tuple[WorstPlace, ...]:
    places: list[WorstPlace] = []
    for k in np.argsort(-np.abs(deviation)):
        point = complex(at[k])
        if all(abs(point - place.at) > APART * ideal.rim for place in places):
            places.append(
                WorstPlace(float(deviation[k]), point, laid.drawn(point), ideal.place(point))
            )
        if len(places) == MOST_PLACES:
            break
    return tuple(places)


def _strays(
    points: Samples,
    found: Feet,
    owners: IntArray,
    contours: Sequence[FittedContour],
    ideal: Ideal,
    laid: Alignment,
) -> tuple[WorstPlace, ...]:
    """Points that lie off the contour fitted to all the others, the farthest of each.

    Points between the ends of a straight piece count too: they tell a chamfer in a fillet's place.
    """
    strays = []
    for number, fit in enumerate(contours):
        own = (found.edge >= 0) & (owners[found.edge] == number)
        off = np.where(np.isfinite(fit.residual), fit.residual, 0.0)
        k = int(np.argmax(np.abs(off)))
        if abs(off[k]) > max(STRAY * fit.noise, LEAST_STRAY):
            at = complex(points.at[own][k])
            strays.append(WorstPlace(float(off[k]), at, laid.drawn(at), ideal.place(at)))
    return tuple(sorted(strays, key=lambda stray: -abs(stray.deviation)))


def _ring(
    contours: Sequence[FittedContour], ideal: Ideal, layer: str, radius: float, is_round: bool
) -> Ring | None:
    """The circle of the measured arcs that are designed about the axis with this radius."""
    if not is_round:
        return None
    arcs = [
        now
        for contour, fit in zip(ideal.contours, contours, strict=True)
        if contour.layer == layer
        for was, now in zip(contour.path.edges, fit.edges, strict=True)
        if not was.is_line and abs(was.centre) < 1e-8 and abs(was.radius - radius) < 1e-8
    ]
    if not arcs:
        return None
    at = on_edges(arcs, 4.0 * MAP_STEP)
    rows = np.column_stack([at.real / radius, at.imag / radius, np.ones(at.size)])
    # |p| = r + Re(conj(c) p) / |p| for a circle whose centre c lies near the axis.
    x, y, r = np.linalg.lstsq(rows, np.abs(at), rcond=None)[0]
    centre = complex(x, y)
    gaps = np.abs(at - centre)
    return Ring(float(r), radius, centre, float(gaps.max() - gaps.min()))


def angle_text(alignment_found: Alignment) -> str:
    """How the outline lay, in words."""
    turn = math.degrees(alignment_found.angle)
    side = "as seen from either side" if alignment_found.is_either else "not mirrored"
    return f"axis at {place_text(alignment_found.axis)}, turned by {turn:.4f} deg, {side}"
