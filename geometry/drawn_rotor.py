"""A drawn rotor lamination recognised: axis, rim, bore, cavities, poles and the q axis.

Idea: what is drawn, completed to a whole turn and closed by the rim circle, is cut into faces
(`arrangement`). Crossing a drawn edge changes steel for air and back; the rim circle where it is
not drawn closes cut-outs that are open to the gap. The steel that reaches the rim is the
lamination; contours inside its cavities are left out.

The q axis is found in the plane of w = (x + iy)^p, in which all poles lie on each other, up to a
half turn, and lines of flux that enter by one d axis and leave by the next are straight. Barriers
follow such lines, so their cavities are long along them: the second moment
M = sum of int (w - mean)^2 dA over the cavities is negative real in the frame of the q axis
(derived: turning by t multiplies M by exp(2ipt)). It cannot take a d axis for a q axis.
"""

import cmath
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from .arrangement import Arrangement, Face, arrangement, winds_about
from .curves import Edge, Path, Point, area
from .drawn_pole import PoleDrawing, drawn_poles
from .drawn_stator import DRAWN_TOL, bore_arcs, raise_if_open
from .errors import OutlineError
from .outline_axis import Lamination, is_about, whole_lamination
from .outline_edges import difference, turned_edges
from .outline_places import place_text

MM = 1e-3  # m
SAMPLES = 8  # of an edge, in the moments
NEAR_DEGREE = 1e-6  # degrees, a q axis this near a thousandth of a degree is on it
MOST_UNLIKE = 2  # poles after which a rotor must repeat
# m, by which poles that are meant alike may differ: the fine class of general tolerances for
# lengths up to 6 mm (ISO 2768-1, from memory). A published rotor drawing has 37 um.
ALIKE_TOL = 5e-5


@dataclass(frozen=True, slots=True)
class RotorDrawing:
    """A rotor recognised in a drawing (m)."""

    rotor_radius: float
    shaft_radius: float  # least, where the bore is not round
    poles: tuple[PoleDrawing, ...]  # of one period
    q_axis: float  # rad, of the first pole in the drawing
    is_symmetric: bool  # every pole about its q axis, within the tolerance
    sectors: int  # how often what was drawn stands in a whole turn
    axis: Point  # in the drawing
    healed: float  # m
    doubles: int
    unlikeness: float  # m, largest difference after one period
    left_out: int  # contours inside cavities


def recognised_rotor(
    edges: Sequence[Edge], heal: float, poles: int, q_axis: float | None = None
) -> RotorDrawing:
    """The rotor drawn by loose edges.

    Args:
        edges: in m.
        heal: m, gaps up to this are closed.
        poles: of the machine, even.
        q_axis: rad in the drawing, of any one q axis; found where it is not told.

    Raises:
        OutlineError: one line, with the place where there is one.
    """
    tolerance = heal + DRAWN_TOL
    lamination = whole_lamination(edges, tolerance)
    rim = _rim_radius(lamination, tolerance)
    raise_if_open(arrangement(lamination.pieces, heal), lamination, heal)
    circle = bore_arcs(lamination.pieces, rim, tolerance)
    whole = arrangement([*lamination.pieces, *circle], heal)
    kinds = _kinds(whole, len(lamination.pieces), lamination, rim, tolerance)
    border, cavities = _borders(whole, kinds)
    found = _q_axis(whole, cavities, poles, rim)
    if q_axis is None and found is None:
        text = "no barrier in the drawing, so no q axis; state q_axis_deg"
        raise OutlineError(text, lamination.axis)
    pitch = 2.0 * math.pi / poles
    axis = q_axis if q_axis is not None else (found or 0.0)
    first = axis % pitch
    frame = turned_edges(border, 0.5 * pitch - first)
    period, unlikeness = _period(frame, poles, lamination, first)
    shaft = _shaft_radius(whole, kinds, lamination)
    drawn, is_symmetric = drawn_poles(frame, rim, poles, period, (tolerance, ALIKE_TOL))
    return RotorDrawing(
        rotor_radius=rim,
        shaft_radius=shaft,
        poles=drawn,
        q_axis=first,
        is_symmetric=is_symmetric,
        sectors=lamination.sectors,
        axis=lamination.axis,
        healed=whole.healed,
        doubles=sum(k < len(lamination.pieces) for k in whole.doubles),
        unlikeness=unlikeness,
        left_out=sum(kind == "insert" for kind in kinds),
    )


def _rim_radius(lamination: Lamination, tolerance: float) -> float:
    about = [e for e in lamination.pieces if is_about(e, 0j, tolerance)]
    if not about:
        raise OutlineError("no arc about the shaft axis in the drawing", lamination.axis)
    rim = max(abs(e.start) for e in about)
    near = [e for e in about if abs(abs(e.start) - rim) < 2.0 * tolerance]
    rim = sum(e.length * abs(e.start) for e in near) / sum(e.length for e in near)
    rim = round(rim, 9) if abs(rim - round(rim, 9)) < 1e-10 else rim
    _raise_if_not_round(lamination, rim, tolerance)
    for piece in lamination.pieces:
        for share in (0.0, 0.5, 1.0):
            if abs(piece.point(share)) > rim + 2.0 * tolerance:
                place = lamination.place(piece.point(share))
                text = f"something is drawn outside the rim at {place_text(place)}"
                raise OutlineError(text + "; name the rotor's layers by outline_layers", place)
    return rim


def _raise_if_not_round(lamination: Lamination, circle: float, tolerance: float) -> None:
    """Whether the largest circle about the axis is the bore, so that the rim is none."""
    points = [e.point(share) for e in lamination.pieces for share in (0.0, 0.5, 1.0)]
    far = max(points, key=abs)
    if min(map(abs, points)) > circle - 2.0 * tolerance and abs(far) > circle + 2.0 * tolerance:
        raise OutlineError(
            f"the rim is no circle about the shaft axis at {place_text(lamination.axis)}: no arc of"
            f" it is about that, {abs(far) / MM:.4f} mm from it at "
            f"{place_text(lamination.place(far))}; accepted a round rim, or the rotor's own keys"
            " with assess --outline",
            lamination.place(far),
        )


def _kinds(
    whole: Arrangement, drawn: int, lamination: Lamination, rim: float, tolerance: float
) -> list[str]:
    """What each face is: iron, shaft, cavity, cut_out (open to the gap) or insert."""
    beside = _beside(whole)
    steel: dict[int, bool] = {}
    todo: list[tuple[int, bool]] = []
    for number, faces in beside.items():
        if len(faces) == 1:  # the outside is air
            todo.append((faces[0], whole.sources[number - 1] < drawn))
    while todo:
        face, is_steel = todo.pop()
        if face in steel:
            continue
        steel[face] = is_steel
        for number in whole.faces[face].numbers:
            changes = whole.sources[number - 1] < drawn
            todo += [(other, is_steel != changes) for other in beside[number] if other != face]
    at_rim = {k for k, face in enumerate(whole.faces) if whole.reaches(face, rim, tolerance)}
    iron = [k for k in at_rim if steel.get(k, False)]
    if len(iron) != 1:
        fault = (
            "no iron is enclosed at the rim"
            if not iron
            else (f"the iron is in {len(iron)} pieces; accepted one lamination")
        )
        place = lamination.place(_inside(whole, whole.faces[iron[-1]])) if iron else None
        raise OutlineError(fault, place)
    kinds = []
    for k, one in enumerate(whole.faces):
        outer = whole.path(one.loops[0])
        if k in iron:
            kinds.append("iron")
        elif winds_about(outer, 0j) and not any(
            winds_about(whole.path(loop), 0j) for loop in one.loops[1:]
        ):
            kinds.append("shaft")
        elif k in at_rim:
            kinds.append("cut_out")
        else:
            kinds.append("insert" if _is_inserted(whole, k, iron[0], beside) else "cavity")
    if "shaft" not in kinds:
        raise OutlineError("no bore round the shaft axis is enclosed", lamination.axis)
    return kinds


def _is_inserted(whole: Arrangement, face: int, iron: int, beside: dict[int, list[int]]) -> bool:
    """Whether the face does not touch the iron: a contour inside a cavity."""
    return all(iron not in beside[number] for number in whole.faces[face].numbers)


def _beside(whole: Arrangement) -> dict[int, list[int]]:
    beside: dict[int, list[int]] = {}
    for k, face in enumerate(whole.faces):
        for number in face.numbers:
            beside.setdefault(number, []).append(k)
    return beside


def _inside(whole: Arrangement, face: Face) -> Point:
    return whole.edge(face.loops[0][0]).point(0.5)


def _borders(whole: Arrangement, kinds: Sequence[str]) -> tuple[list[Edge], list[Face]]:
    """Edges between unlike kinds, and the faces of the cavities."""
    air = {"cavity", "insert"}
    border = []
    for number, faces in _beside(whole).items():
        beside = {"air" if kinds[k] in air else kinds[k] for k in faces}
        if len(faces) == 1 or len(beside) == 2:
            border.append(whole.edges[number - 1])
    return border, [
        f for f, kind in zip(whole.faces, kinds, strict=True) if kind in ("cavity", "cut_out")
    ]


def _q_axis(whole: Arrangement, cavities: Iterable[Face], poles: int, rim: float) -> float | None:
    """Angle of a q axis in the drawing, None where the cavities do not tell."""
    order = poles // 2
    moment, spread = 0j, 0.0
    for face in cavities:
        points = [
            edge.point(k / SAMPLES)
            for edge in whole.path(face.loops[0]).edges
            for k in range(SAMPLES)
        ]
        second, sum_ = _second_moment(np.array([(point / rim) ** order for point in points]))
        moment += second
        spread += sum_
    if spread == 0.0 or abs(moment) < 1e-3 * spread:
        return None
    angle = (cmath.phase(moment) - math.pi) / (2.0 * order)
    degrees = math.degrees(angle)
    near = round(degrees, 3)
    return math.radians(near) if abs(degrees - near) < NEAR_DEGREE else angle


def _second_moment(
    points: "np.ndarray[tuple[int], np.dtype[np.complex128]]",
) -> tuple[complex, float]:
    """Int (w - mean)^2 dA of a polygon, and int |w - mean|^2 dA; its sense does not matter."""
    middle = complex(points.mean())
    p = points - middle
    q = np.roll(p, -1)
    cross = (p.conj() * q).imag
    size = 0.5 * cross.sum()
    if size == 0.0:
        return 0j, 0.0
    centroid = ((p + q) * cross).sum() / (6.0 * size)
    # Triangles (0, p, q): int w^2 = cross/12 (p^2 + pq + q^2), int |w|^2 likewise (derived).
    second = (cross * (p**2 + p * q + q**2)).sum() / 12.0 - size * centroid**2
    square = (cross * (abs(p) ** 2 + (p.conj() * q).real + abs(q) ** 2)).sum() / 12.0
    square -= size * abs(centroid) ** 2
    sign = math.copysign(1.0, size)
    return complex(sign * second), float(sign * square)


def _period(
    edges: Sequence[Edge], poles: int, lamination: Lamination, first: float
) -> tuple[int, float]:
    """Poles after which the rotor repeats, and how well it does."""
    pitch = 2.0 * math.pi / poles
    worst, place = math.inf, 0j
    for period in range(1, min(MOST_UNLIKE, poles // 2) + 1):
        if poles % period:
            continue
        gap, point = difference(turned_edges(edges, period * pitch), edges)
        if gap <= ALIKE_TOL:
            return period, gap
        if gap < worst:
            worst, place = gap, point
    if poles == MOST_UNLIKE:  # of two poles, both are the whole
        return MOST_UNLIKE, 0.0
    at = lamination.place(place * cmath.exp(1j * (first - 0.5 * pitch)))
    text = (
        f"the {poles} poles are alike neither one by one nor in pairs: "
        f"{worst / MM:.4g} mm off at {place_text(at)}"
    )
    raise OutlineError(text, at)


def _shaft_radius(whole: Arrangement, kinds: Sequence[str], lamination: Lamination) -> float:
    face = whole.faces[list(kinds).index("shaft")]
    path: Path = whole.path(face.loops[0])
    radii = [abs(e.point(k / 4)) for e in path.edges for k in range(4)]
    least, most = min(radii), max(radii)
    mean = math.sqrt(abs(area(path)) / math.pi)
    if most - least < 2.0 * DRAWN_TOL:
        return round(mean, 9) if abs(mean - round(mean, 9)) < 1e-9 else mean
    return least
