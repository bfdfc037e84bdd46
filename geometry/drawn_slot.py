"""One slot of a drawn stator in its own frame: its parts named, its copper in layers.

Frame: shaft axis at 0, the slot's centre line along +x. The parts are the faces between the drawn
lines; where the drawing leaves the slot in one piece, mouth and copper are parted by straight
lines across: the mouth ends where the slot grows wider than at the bore, the copper begins where
it no longer widens faster than its own flanks (rules of our own).
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

from .arrangement import Arrangement, arrangement, winds_about
from .corners import intersections
from .curves import Edge, Path, Point, arc, area, reversed_edge, reversed_path
from .errors import OutlineError
from .outline_edges import chained_loop

WELD_TOL = 1e-7  # m, of the slot's own frame: far below a drawing's digits, far above rounding
COPPER_SHARE = 0.25  # of the largest part: parts at least as large are copper
WIDER = 1.05  # times the width at the bore: there the mouth ends
OPEN_SHARE = 0.8  # of the greatest width: a mouth at least as wide makes an open slot
FLARE = 0.5  # change of width per height beyond the flanks' own: still the tooth tip
HEIGHTS = 400  # at which the width is measured
HALVINGS = 60


@dataclass(frozen=True, slots=True)
class SlotPart:
    """One area of a slot: an outer path, counter-clockwise, and clockwise holes, in m."""

    kind: str  # opening, wedge, copper
    outer: Path
    holes: tuple[Path, ...] = ()

    @property
    def area(self) -> float:
        """Area in m^2."""
        return area(self.outer) + sum(area(hole) for hole in self.holes)


@dataclass(frozen=True, slots=True)
class DrawnSlot:
    """A slot in its own frame (m): parts, and the edges that it shares with the iron.

    `mouth` is the arc across the slot on the bore, counter-clockwise, None for a closed slot;
    `wall` runs with the iron on its left from the mouth's upper end to its lower one, or all
    round a closed slot.
    """

    parts: tuple[SlotPart, ...]
    mouth: Edge | None
    wall: tuple[Edge, ...]
    bore_radius: float
    is_parted: bool  # whether the drawing itself shows where copper begins

    @property
    def copper(self) -> tuple[SlotPart, ...]:
        """The copper parts, the first at the slot's bottom (or on its clockwise side)."""
        return tuple(part for part in self.parts if part.kind == "copper")


@dataclass(frozen=True, slots=True)
class SlotHints:
    """What a design states of a slot that its drawing does not show (m)."""

    opening_depth: float | None = None
    wedge_depth: float = 0.0


def drawn_slot(edges: Sequence[Edge], bore_radius: float, hints: SlotHints) -> DrawnSlot:
    """The slot that the edges enclose.

    Args:
        edges: of one slot in its own frame, m, the arc across its mouth among them.
        bore_radius: in m.
        hints: used where the drawing leaves the slot in one piece.

    Raises:
        OutlineError: where copper cannot be told from mouth; its place is in the slot's frame.
    """
    whole = arrangement(edges, WELD_TOL)
    mouth, wall = _border(whole, bore_radius)
    faces = _faces(whole)
    bodies = [face for face in faces if not _touches(face, mouth)]
    is_parted = bool(bodies)
    if not is_parted:
        bounds = _bounds(wall, bore_radius, mouth, hints)
        cuts = [_across(wall, height) for height in bounds]
        whole = arrangement([*edges, *cuts], WELD_TOL)
        mouth, wall = _border(whole, bore_radius)
        faces = _faces(whole)
        bodies = [face for face in faces if not _touches(face, mouth)]
        bodies = [face for face in bodies if _mean(face).real > bounds[-1]]
    parts = tuple(_named(_with_mouth(face, mouth), bodies, mouth) for face in faces)
    return DrawnSlot(_ordered(parts), mouth, wall, bore_radius, is_parted)


def layered(slot: DrawnSlot, layers: int) -> DrawnSlot:
    """The slot with as many copper parts as the winding has layers, of equal area where split.

    Raises:
        OutlineError: where the drawing has another number of coil sides.
    """
    copper = slot.copper
    if len(copper) == layers:
        return slot
    others = tuple(part for part in slot.parts if part.kind != "copper")
    if layers == 1 and len(copper) == 2:
        return _with(slot, (_merged(copper[0], copper[1]), *others))
    if layers == 2 and len(copper) == 1:
        return _with(slot, (*_halved(copper[0]), *others))
    text = f"{len(copper)} coil sides are drawn in each slot, the winding has {layers}"
    raise OutlineError(text, _mean(copper[-1]))


def width_at(wall: Sequence[Edge], height: float) -> tuple[float, float]:
    """Lower and upper end of the slot across its centre line at a height, m."""
    ray = Edge(complex(height, -height), complex(height, height))
    hits = sorted(p.imag for edge in wall for p in intersections(edge, ray))
    if len(hits) < 2:
        return 0.0, 0.0
    below, above = [y for y in hits if y <= 0.0], [y for y in hits if y > 0.0]
    if not below or not above:
        return hits[0], hits[-1]
    return below[-1], above[0]


def _with(slot: DrawnSlot, parts: Sequence[SlotPart]) -> DrawnSlot:
    return replace(slot, parts=_ordered(tuple(parts)))


def _border(whole: Arrangement, bore_radius: float) -> tuple[Edge | None, tuple[Edge, ...]]:
    """The mouth's arc and the wall: edges with a face on one side only."""
    sides: dict[int, list[int]] = {}
    for face in whole.faces:
        for loop in face.loops:
            for signed in loop:
                sides.setdefault(abs(signed), []).append(signed)
    outside = [whole.edge(-s[0]) for s in sides.values() if len(s) == 1]
    if not outside:
        raise OutlineError("a slot that encloses nothing")
    try:
        around = chained_loop(outside).edges
    except ValueError:
        raise OutlineError("a slot in two pieces", outside[0].start) from None
    on_bore = [_is_on(edge, bore_radius) for edge in around]
    if not any(on_bore):
        return None, around
    first = next(k for k in range(len(around)) if on_bore[k - 1] and not on_bore[k])
    turned = around[first:] + around[:first]
    wall = tuple(e for e in turned if not _is_on(e, bore_radius))
    if any(_is_on(e, bore_radius) for e in turned[: len(wall)]):
        raise OutlineError("a slot with two mouths", turned[0].start)
    return arc(wall[-1].end, wall[0].start, 0j, ccw=True), wall


def _is_on(edge: Edge, radius: float) -> bool:
    return all(
        abs(abs(p) - radius) < 10.0 * WELD_TOL for p in (edge.start, edge.point(0.5), edge.end)
    )


def _faces(whole: Arrangement) -> list[SlotPart]:
    return [
        SlotPart("", whole.path(face.loops[0]), tuple(whole.path(h) for h in face.loops[1:]))
        for face in whole.faces
    ]


def _touches(face: SlotPart, mouth: Edge | None) -> bool:
    return mouth is not None and any(
        edge.start == mouth.start or edge.end == mouth.end for edge in face.outer.edges
    )


def _with_mouth(face: SlotPart, mouth: Edge | None) -> SlotPart:
    """The part with the arc across the mouth to the last bit, where it has it."""
    if mouth is None:
        return face
    back = reversed_edge(mouth)
    edges = [back if (e.start, e.end) == (back.start, back.end) else e for e in face.outer.edges]
    return SlotPart(face.kind, Path(tuple(edges)), face.holes)


def _mean(face: SlotPart) -> Point:
    """About the middle of a part: of its outer path's points, weighted by length."""
    edges = face.outer.edges
    total = sum(edge.length for edge in edges)
    return sum(edge.length * edge.point(0.5) for edge in edges) / total


def _is_among(face: SlotPart, bodies: Sequence[SlotPart]) -> bool:
    return any(face.outer.edges[0] in body.outer.edges for body in bodies)


def _named(face: SlotPart, bodies: Sequence[SlotPart], mouth: Edge | None) -> SlotPart:
    largest = max(body.area for body in bodies if not body.holes)
    if _touches(face, mouth):
        kind = "opening"
    elif face.holes or not _is_among(face, bodies) or face.area < COPPER_SHARE * largest:
        kind = "wedge"
    else:
        kind = "copper"
    return SlotPart(kind, face.outer, face.holes)


def _ordered(parts: tuple[SlotPart, ...]) -> tuple[SlotPart, ...]:
    """From the bore outward; copper from the bottom inward, or counter-clockwise side by side."""
    copper = [part for part in parts if part.kind == "copper"]
    others = [part for part in parts if part.kind != "copper"]
    radii = [abs(_mean(part)) for part in copper]
    heights = [e.start.real for part in copper for e in part.outer.edges]
    is_stacked = bool(copper) and max(radii) - min(radii) > 0.1 * (max(heights) - min(heights))
    if is_stacked:
        copper.sort(key=lambda part: -abs(_mean(part)))
    else:
        copper.sort(key=lambda part: _mean(part).imag)
    others.sort(key=lambda part: abs(_mean(part)))
    return (*others, *copper)


def _bounds(
    wall: Sequence[Edge], bore_radius: float, mouth: Edge | None, hints: SlotHints
) -> list[float]:
    """Heights at which mouth and copper are parted, the last where copper begins."""
    top = max(e.point(s).real for e in wall for s in (0.0, 0.5))
    if mouth is None:  # closed: all of it is copper
        return []
    low = mouth.start.real
    step = (top - low) / HEIGHTS
    heights = [low + (k + 0.5) * step for k in range(HEIGHTS)]
    widths = [upper - lower for lower, upper in (width_at(wall, h) for h in heights)]
    at_bore = abs(mouth.end - mouth.start)
    corners = sorted(e.start.real for e in wall[1:])
    if at_bore >= OPEN_SHARE * max(widths):
        if hints.opening_depth is None:
            text = (
                "an open slot drawn in one piece; draw a line across it where the copper begins "
                "or state opening_depth_mm"
            )
            raise OutlineError(text, mouth.point(0.5))
        # On the centre line from the bore, as depths are stated.
        return [bore_radius + hints.opening_depth + hints.wedge_depth]
    mouth_end = _settled(
        heights[next(k for k, w in enumerate(widths) if w > WIDER * at_bore)], corners, step
    )
    slopes = [(b - a) / step for a, b in pairwise(widths)]
    own = sorted(slopes[int(0.4 * HEIGHTS) : int(0.7 * HEIGHTS)])[int(0.15 * HEIGHTS)]
    flaring = [k for k, slope in enumerate(slopes[: HEIGHTS // 2]) if slope > own + FLARE]
    copper = _settled(heights[flaring[-1] + 1] if flaring else mouth_end, corners, step)
    copper = max(copper, mouth_end) + hints.wedge_depth
    return [mouth_end] if copper - mouth_end < step else [mouth_end, copper]


def _settled(height: float, corners: Sequence[float], step: float) -> float:
    """The height, moved to a corner of the wall that lies within two steps."""
    near = min(corners, key=lambda corner: abs(corner - height), default=height)
    return near if abs(near - height) <= 2.0 * step else height


def _across(wall: Sequence[Edge], height: float) -> Edge:
    lower, upper = width_at(wall, height)
    if upper - lower <= WELD_TOL:
        raise OutlineError("a slot that cannot be parted across", complex(height, 0.0))
    return Edge(complex(height, lower), complex(height, upper))


def _merged(first: SlotPart, second: SlotPart) -> SlotPart:
    inner = {(e.end, e.start) for e in second.outer.edges}
    back = {(e.end, e.start) for e in first.outer.edges}
    edges = [e for e in first.outer.edges if (e.start, e.end) not in inner]
    edges += [e for e in second.outer.edges if (e.start, e.end) not in back]
    try:
        outer = chained_loop(edges)
    except ValueError:
        text = "two coil sides that do not touch are drawn in a slot, the winding has one layer"
        raise OutlineError(text, _mean(first)) from None
    return SlotPart("copper", outer, (*first.holes, *second.holes))


def _halved(part: SlotPart) -> tuple[SlotPart, SlotPart]:
    """Two parts of equal area, parted across the slot's centre line."""
    edges = [e for path in (part.outer, *part.holes) for e in path.edges]
    half = 0.5 * part.area

    def beyond(height: float) -> float:
        return sum(p.area for p in _split(edges, part, height) if _mean(p).real > height)

    low, high = _range(edges)
    height = _bisected(lambda h: beyond(h) - half, low, high)
    pieces = _split(edges, part, height)
    if len(pieces) != 2:
        raise OutlineError("copper that cannot be halved by one straight line", _mean(part))
    return (pieces[0], pieces[1])


def _range(edges: Sequence[Edge]) -> tuple[float, float]:
    heights = [e.point(s).real for e in edges for s in (0.0, 0.5)]
    margin = 0.02 * (max(heights) - min(heights))
    return min(heights) + margin, max(heights) - margin


def _split(edges: Sequence[Edge], part: SlotPart, height: float) -> list[SlotPart]:
    reach = 2.0 * max(abs(e.start.imag) for e in edges) + WELD_TOL
    ray = Edge(complex(height, -reach), complex(height, reach))
    hits = sorted(p.imag for edge in edges for p in intersections(edge, ray))
    cut = Edge(complex(height, hits[0]), complex(height, hits[-1]))
    made = arrangement([*edges, cut], WELD_TOL)
    faces = _faces(made)
    inside = [f for f in faces if not any(winds_about(h, _mean(f)) for h in part.holes)]
    return [SlotPart("copper", f.outer, f.holes) for f in inside]


def _bisected(function: Callable[[float], float], low: float, high: float) -> float:
    """Where a falling function is 0: secant steps kept inside the bracket."""
    f_low, f_high = function(low), function(high)
    for k in range(HALVINGS):
        middle = 0.5 * (low + high) if k % 3 == 2 else low + (high - low) * f_low / (f_low - f_high)
        value = function(middle)
        if abs(value) < 1e-16 or high - low < 1e-12:
            return middle
        if value > 0.0:
            low, f_low = middle, value
        else:
            high, f_high = middle, value
    return 0.5 * (low + high)


def wall_path(slot: DrawnSlot) -> Path:
    """The closed slot's wall as a hole of the iron, clockwise."""
    path = Path(slot.wall)
    return path if area(path) < 0.0 else reversed_path(path)


def slot_reach(slot: DrawnSlot) -> float:
    """Largest distance of the slot from the shaft axis, m."""
    return max(abs(e.point(s)) for e in slot.wall for s in (0.0, 0.25, 0.5, 0.75))
