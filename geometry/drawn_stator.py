"""A drawn stator lamination recognised: axis, bore, slots, their number and their likeness.

Idea: what is drawn, completed to a whole turn and closed by the bore circle, is cut into faces
(`arrangement`). The face round the axis is the bore, the one at the outermost circle the iron;
groups of touching faces between them are slots. All slots must be one slot, turned; that one is
taken to its own frame, made symmetric where it is so within the tolerance, and named in parts.
"""

import cmath
import math
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from .arrangement import Arrangement, Face, arrangement, winds_about
from .curves import Edge, Point, arc, area
from .drawn_slot import DrawnSlot, SlotHints, drawn_slot, slot_reach
from .errors import OutlineError
from .outline_axis import Lamination, is_about, whole_lamination
from .outline_edges import difference, joined_parts, made_symmetric, turned_edges
from .outline_places import place_text

DRAWN_TOL = 5e-6  # m, digits of a drawing and fits of its curves; a punch keeps 1e-5 m
LIKE_SHARE = 0.2  # of the largest: a group of faces at the bore at least as large is a slot
MM = 1e-3  # m


@dataclass(frozen=True, slots=True)
class StatorDrawing:
    """A stator recognised in a drawing (m), in the stator's own frame."""

    slots: int
    bore_radius: float
    outer_radius: float
    slot: DrawnSlot
    is_symmetric: bool  # the slot about its centre line, within the tolerance
    sectors: int  # how often what was drawn stands in a whole turn
    axis: Point  # in the drawing
    turn: float  # rad, of slot 0's centre line in the drawing
    healed: float  # m
    doubles: int
    unlikeness: float  # m, largest difference of a slot from the one taken


def recognised_stator(edges: Sequence[Edge], heal: float, hints: SlotHints) -> StatorDrawing:
    """The stator drawn by loose edges.

    Args:
        edges: in m.
        heal: m, gaps up to this are closed.
        hints: what the drawing does not show.

    Raises:
        OutlineError: one line, with the place where there is one.
    """
    tolerance = heal + DRAWN_TOL
    lamination = whole_lamination(edges, tolerance)
    bore, outer = _radii(lamination, tolerance)
    raise_if_open(arrangement(lamination.pieces, heal), lamination, heal)
    circle = bore_arcs(lamination.pieces, bore, tolerance)
    whole = arrangement([*lamination.pieces, *circle], heal)
    groups = _slot_groups(whole, lamination, bore, outer, tolerance)
    return _one_slot(whole, lamination, groups, (bore, outer), tolerance, hints)


def raise_if_open(whole: Arrangement, lamination: Lamination, heal: float) -> None:
    """Refuse a drawing with an open end, telling how far the next end is.

    Raises:
        OutlineError: with the place of the open end whose neighbour is nearest.
    """
    ends = whole.open_ends
    if not ends:
        return
    rivals = [
        (min((abs(other - end) for other in ends if other != end), default=math.inf), end)
        for end in ends[:400]
    ]
    gap, end = min(rivals, key=lambda rival: rival[0])
    place = lamination.place(end)
    text = f"the outline is open at {place_text(place)}"
    if gap < math.inf:
        text += f", {gap / MM:.4g} mm from the next open end; heal_um = {heal * 1e6:g}"
    raise OutlineError(text, place)


def bore_arcs(pieces: Sequence[Edge], radius: float, tolerance: float) -> list[Edge]:
    """A full circle about the axis, cut at the ends of the pieces that lie on it."""
    on_circle = [
        e for e in pieces if is_about(e, 0j, tolerance) and abs(abs(e.start) - radius) < tolerance
    ]
    ends = sorted({cmath.phase(p) for e in on_circle for p in (e.start, e.end)})
    stops: list[float] = []
    for angle in ends:
        if not stops or (angle - stops[-1]) * radius > 2.0 * tolerance:
            stops.append(angle)
    spread = [*stops, *([stops[0] + math.pi] if len(stops) == 1 else [])] or [0.0, math.pi]
    points = [radius * cmath.exp(1j * angle) for angle in spread]
    return [
        half
        for start, end in zip(points, points[1:] + points[:1], strict=True)
        for half in _at_most_half(arc(start, end, 0j, ccw=True))
    ]


def _at_most_half(edge: Edge) -> list[Edge]:
    if edge.sweep <= math.pi * (1.0 + 1e-9):
        return [edge]
    middle = edge.point(0.5)
    return [arc(edge.start, middle, 0j, ccw=True), arc(middle, edge.end, 0j, ccw=True)]


def _radii(lamination: Lamination, tolerance: float) -> tuple[float, float]:
    about = [e for e in lamination.pieces if is_about(e, 0j, tolerance)]
    if not about:
        raise OutlineError("no arc about the shaft axis in the drawing", lamination.axis)
    bore = _mean_radius(about, min, tolerance)
    outer = _mean_radius(about, max, tolerance)
    _raise_if_partial(about, lamination, outer, tolerance)
    for piece in lamination.pieces:
        for share in (0.0, 0.5, 1.0):
            point = piece.point(share)
            place = lamination.place(point)
            if abs(point) < bore - 2.0 * tolerance:
                text = f"something is drawn inside the bore at {place_text(place)}"
                raise OutlineError(text + "; name the stator's layers by outline_layers", place)
            if abs(point) > outer + 2.0 * tolerance:
                text = f"something is drawn outside the outer circle at {place_text(place)}"
                raise OutlineError(text + "; accepted a round outer contour", place)
    if outer - bore < 100.0 * tolerance:
        raise OutlineError("bore and outer circle are one", lamination.place(complex(outer)))
    return bore, outer


def _raise_if_partial(
    about: Sequence[Edge], lamination: Lamination, outer: float, tolerance: float
) -> None:
    """Refuse an outermost circle that is not drawn all round: it is some other arc."""
    on_outer = [e for e in about if abs(abs(e.start) - outer) < 2.0 * tolerance]
    spans = sorted(
        (cmath.phase(e.start if e.bulge > 0.0 else e.end) % (2.0 * math.pi), abs(e.sweep))
        for e in on_outer
    )
    reach = spans[0][0]
    room = 4.0 * tolerance / outer
    for start, sweep in [*spans, (spans[0][0] + 2.0 * math.pi, 0.0)]:
        if start > reach + room:
            place = lamination.place(outer * cmath.exp(1j * reach))
            text = (
                f"no closed outer circle: the outermost arcs, radius {outer / MM:.4f} mm, end at "
                f"{place_text(place)}"
            )
            raise OutlineError(text, place)
        reach = max(reach, start + sweep)


def _mean_radius(
    arcs: Sequence[Edge], pick: Callable[[Iterable[float]], float], tolerance: float
) -> float:
    extreme = pick(abs(e.start) for e in arcs)
    near = [e for e in arcs if abs(abs(e.start) - extreme) < 2.0 * tolerance]
    # To the nearest nanometre where that is what was drawn: a mean has rounding errors.
    total = sum(e.length for e in near)
    mean = sum(e.length * 0.5 * (abs(e.start) + abs(e.end)) for e in near) / total
    return round(mean, 9) if abs(mean - round(mean, 9)) < 1e-10 else mean


def _slot_groups(
    whole: Arrangement, lamination: Lamination, bore: float, outer: float, tolerance: float
) -> list[list[Face]]:
    """Touching faces of each slot, counter-clockwise."""
    inside = [f for f in whole.faces if winds_about(whole.path(f.loops[0]), 0j)]
    iron = [f for f in whole.faces if whole.reaches(f, outer, tolerance)]
    if not iron:
        place = lamination.place(complex(outer))
        raise OutlineError(f"the outer contour is not closed, radius {outer / MM:.4f} mm", place)
    disc = min(inside, key=lambda f: area(whole.path(f.loops[0])), default=None)
    if disc is None or disc in iron:
        raise OutlineError("no bore round the shaft axis is enclosed", lamination.axis)
    for face in iron:
        for signed in face.loops[0]:
            point = whole.edge(signed).point(0.5)
            if face in inside and abs(abs(point) - outer) > 2.0 * tolerance:
                place = lamination.place(point)
                raise OutlineError(f"the outer contour is not round at {place_text(place)}", place)
    if not _reaches_any(whole, iron, bore, tolerance):
        place = lamination.place(complex(bore))
        text = f"what is drawn innermost, at {place_text(place)}, is not the bore of the iron"
        raise OutlineError(text + "; name the stator's layers by outline_layers", place)
    rest = [f for f in whole.faces if f not in iron and f is not disc]
    groups = _grouped(rest)
    if not groups:
        raise OutlineError("no slot between bore and outer circle", lamination.axis)
    sizes = [_size(whole, group) for group in groups]
    at_bore = [_reaches_any(whole, group, bore, tolerance) for group in groups]
    wanted = any(at_bore)
    largest = max(s for s, at in zip(sizes, at_bore, strict=True) if at == wanted)
    slots = []
    for group, size, at in zip(groups, sizes, at_bore, strict=True):
        if at == wanted and size > LIKE_SHARE * largest:
            slots.append(group)
            continue
        place = lamination.place(_middle(whole, group))
        what = "an opening at the bore" if at else "a hole in the iron"
        raise OutlineError(f"{what} at {place_text(place)} is no slot", place)
    return sorted(slots, key=lambda group: cmath.phase(_middle(whole, group)))


def _reaches_any(
    whole: Arrangement, faces: Iterable[Face], radius: float, tolerance: float
) -> bool:
    return any(whole.reaches(face, radius, tolerance) for face in faces)


def _grouped(faces: Sequence[Face]) -> list[list[Face]]:
    """Faces that share an edge, together."""
    home: dict[int, list[Face]] = {}
    groups: list[list[Face]] = []
    for face in faces:
        touching = {id(home[n]): home[n] for n in face.numbers if n in home}
        group = [face, *(f for other in touching.values() for f in other)]
        groups = [g for g in groups if id(g) not in touching]
        groups.append(group)
        for member in group:
            for n in member.numbers:
                home[n] = group
    return groups


def _size(whole: Arrangement, faces: Iterable[Face]) -> float:
    return sum(area(whole.path(loop)) for face in faces for loop in face.loops)


def _middle(whole: Arrangement, faces: Iterable[Face]) -> Point:
    """The centroid of faces, their arcs drawn as two chords each."""
    moment, total = 0j, 0.0
    for face in faces:
        for loop in face.loops:
            points = [e.point(s) for e in whole.path(loop).edges for s in (0.0, 0.5)]
            for p, q in zip(points, points[1:] + points[:1], strict=True):
                cross = (p.conjugate() * q).imag
                moment += cross * (p + q) / 6.0
                total += 0.5 * cross
    return moment / total


def _one_slot(
    whole: Arrangement,
    lamination: Lamination,
    groups: Sequence[Sequence[Face]],
    radii: tuple[float, float],
    tolerance: float,
    hints: SlotHints,
) -> StatorDrawing:
    bore, outer = radii
    count = len(groups)
    middles = [_middle(whole, group) for group in groups]
    offset = cmath.phase(np.mean([(m / abs(m)) ** count for m in middles])) / count
    own = [
        _own_edges(whole, group, offset, count, m) for group, m in zip(groups, middles, strict=True)
    ]
    reference = _typical(own, middles, tolerance)
    unlikeness = 0.0
    turns = [round((cmath.phase(m) - offset) * count / (2.0 * math.pi)) % count for m in middles]
    for k, edges in enumerate(own):
        turn = cmath.exp(1j * (offset + 2.0 * math.pi * turns[k] / count))
        if turns[k] in turns[:k]:
            place = lamination.place(middles[k])
            raise OutlineError(f"the slots are not evenly spaced at {place_text(place)}", place)
        gap, point = max(
            difference(edges, own[reference]),
            difference(own[reference], edges),
            key=lambda pair: pair[0],
        )
        unlikeness = max(unlikeness, gap)
        if gap > tolerance:
            place = lamination.place(point * turn)
            raise OutlineError(
                f"the slot at {math.degrees(cmath.phase(middles[k])) % 360.0:.3f} degrees is not "
                f"the others turned: {gap / MM:.4g} mm off at {place_text(place)}; "
                f"accepted {tolerance / MM:g}",
                place,
            )
    edges = own[reference]
    mirrored = made_symmetric(edges, tolerance)
    edges = [_on_bore(e, bore, tolerance) for e in (mirrored or edges)]
    turn = cmath.exp(1j * (offset + 2.0 * math.pi * turns[reference] / count))
    try:
        slot = drawn_slot(edges, bore, hints)
    except OutlineError as error:
        raise _in_drawing(error, lamination, turn) from None
    if slot_reach(slot) > outer - tolerance:
        raise OutlineError("a slot reaches the outer circle", lamination.place(turn * outer))
    return StatorDrawing(
        slots=count,
        bore_radius=bore,
        outer_radius=outer,
        slot=slot,
        is_symmetric=mirrored is not None,
        sectors=lamination.sectors,
        axis=lamination.axis,
        turn=cmath.phase(turn),
        healed=whole.healed,
        doubles=sum(k < len(lamination.pieces) for k in whole.doubles),
        unlikeness=unlikeness,
    )


def _in_drawing(error: OutlineError, lamination: Lamination, turn: complex) -> OutlineError:
    if error.place is None:
        return error
    place = lamination.place(error.place * turn)
    return OutlineError(f"{error} at {place_text(place)}", place)


def _own_edges(
    whole: Arrangement, group: Sequence[Face], offset: float, count: int, middle: Point
) -> list[Edge]:
    """Edges of one slot in the frame of its centre line."""
    pitch = 2.0 * math.pi / count
    number = round((cmath.phase(middle) - offset) / pitch)
    numbers = sorted({n for face in group for n in face.numbers})
    edges = [whole.edges[n - 1] for n in numbers]
    return turned_edges(joined_parts(edges), -(offset + number * pitch))


def _typical(own: Sequence[Sequence[Edge]], middles: Sequence[Point], tolerance: float) -> int:
    """A slot that is like most of the others, drawn with the fewest edges."""
    trials = sorted(range(len(own)), key=lambda k: (len(own[k]), k))
    for k in trials[: min(3, len(trials))]:
        others = [j for j in range(len(own)) if j != k][:6]
        like = sum(difference(own[j], own[k])[0] <= tolerance for j in others)
        if 2 * like >= len(others):
            return k
    return trials[0]


def _on_bore(edge: Edge, radius: float, tolerance: float) -> Edge:
    """The edge with ends near the bore moved onto it, on the ray from the axis."""

    def moved(point: Point) -> Point:
        near = abs(abs(point) - radius) < 2.0 * tolerance
        return point * (radius / abs(point)) if near else point

    result = Edge(moved(edge.start), moved(edge.end), edge.bulge)
    middle = edge.point(0.5)
    along = all(abs(abs(p) - radius) < 2.0 * tolerance for p in (edge.start, middle, edge.end))
    if along:
        is_ccw = (result.start.conjugate() * result.end).imag > 0.0
        return arc(result.start, result.end, 0j, ccw=is_ccw)
    return result
