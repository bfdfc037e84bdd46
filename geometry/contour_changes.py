"""What a set of contours has unlike another one: every change named and placed.

First a motion of the whole drawing is looked for (scaled, mirrored, turned, shifted): it is
reported once and taken back. Then contours are paired by where they lie and how long they are;
what has no partner is missing, doubled or new, and pairs are compared vertex by vertex. Contours of
unlike numbers of vertices are compared as curves, so that a further vertex on an edge is no change.

Axes: n contours, v vertices, p points.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from .contour_gaps import curve_gaps, vertex_gaps
from .contours import Contour
from .curves import Edge, Path, Point, area, mirrored_edge, perimeter, reversed_path, turned
from .outline_places import place_text

TOLERANCE = 1e-6  # m, to which a drawing must be the design's
PAIR_SHARE = 0.1  # of a contour's length: partners lie and measure nearer than this
SURE_SHARE = 0.5  # of the contours that differ: a motion must bring at least so many into place
UM, MM = 1e6, 1e3


@dataclass(frozen=True, slots=True)
class Change:
    """One difference, in words, and where it is (m) if it is in one place."""

    kind: str
    text: str
    place: Point | None = None


@dataclass(frozen=True, slots=True)
class Motion:
    """z -> shift + scale e^(j angle) z, of the mirror image in the x axis where it is mirrored."""

    scale: float = 1.0
    angle: float = 0.0
    is_mirrored: bool = False
    shift: complex = 0j

    def moved(self, contours: Sequence[Contour]) -> tuple[Contour, ...]:
        """The contours after the motion."""
        return tuple(replace(c, path=self._path(c.path)) for c in contours)

    def _path(self, path: Path) -> Path:
        edges = tuple(mirrored_edge(e) for e in path.edges) if self.is_mirrored else path.edges
        path = turned(Path(edges), self.angle) if self.angle else Path(edges)
        k, s = self.scale, self.shift
        return Path(tuple(Edge(s + k * e.start, s + k * e.end, e.bulge) for e in path.edges))

    @property
    def changes(self) -> tuple[Change, ...]:
        """What has been done to the whole drawing."""
        found = []
        if self.is_mirrored:
            found.append(Change("mirrored", "the whole drawing is mirrored"))
        if self.scale != 1.0:
            found.append(Change("scaled", f"the whole drawing is scaled by {self.scale:.7g}"))
        if self.angle:
            degrees = math.degrees(self.angle)
            found.append(Change("turned", f"the whole drawing is turned by {degrees:.6f} degrees"))
        if self.shift:
            by = place_text(self.shift)
            found.append(Change("shifted", f"the whole drawing is shifted by {by}", self.shift))
        return tuple(found)


@dataclass(frozen=True, slots=True)
class _Marked:
    """A contour with what it is known by."""

    contour: Contour
    centre: Point = field(init=False)  # of its curve
    length: float = field(init=False)

    def __post_init__(self) -> None:
        edges = self.contour.path.edges
        length = perimeter(self.contour.path)
        # Simpson's rule on each edge: the same for any number of vertices on a line, and to 1e-4
        # of its length on an arc.
        weighted = (e.length * (e.start + 4.0 * e.point(0.5) + e.end) / 6.0 for e in edges)
        object.__setattr__(self, "length", length)
        object.__setattr__(self, "centre", sum(weighted) / length)


def contour_changes(
    expected: Sequence[Contour], found: Sequence[Contour], tolerance: float = TOLERANCE
) -> tuple[Change, ...]:
    """All that `found` has unlike `expected`; nothing within the tolerance in m."""
    plain = _compared(expected, found, tolerance)
    if not plain:
        return ()
    if len(expected) > 1 and [c.kind for c in plain] == ["reversed"] * len(expected):
        # Poles that are symmetric lie where they lay, but run the other way round.
        return (Change("mirrored", "the whole drawing is mirrored: every contour runs backwards"),)
    best, motion = plain, Motion()
    for trial in _motions(expected, found):
        changes = _compared(trial.moved(expected), found, tolerance * max(1.0, trial.scale))
        if len(changes) < len(best) and len(changes) <= SURE_SHARE * len(plain):
            best, motion = changes, trial
        if not changes:
            break
    return (*motion.changes, *best)


def _motions(expected: Sequence[Contour], found: Sequence[Contour]) -> list[Motion]:
    """Motions that would bring the largest contours onto each other, the simplest first."""
    ours, theirs = ([_Marked(c) for c in cs] for cs in (expected, found))
    if not ours or not theirs:
        return []
    large, other = (max(marked, key=lambda m: m.length) for marked in (ours, theirs))
    scale = other.length / large.length
    if abs(scale - 1.0) < 1e-9:
        scale = 1.0
    shift = other.centre - scale * large.centre
    if abs(shift) < 1e-9:
        shift = 0j
    trials = [Motion(scale, 0.0, False, shift)]
    # One contour off the axis, brought onto each that is as long.
    pilot = max(ours, key=lambda m: abs(m.centre))
    if abs(pilot.centre) > PAIR_SHARE * pilot.length:
        angles: list[tuple[bool, float]] = []
        for rival in theirs:
            if abs(rival.length - scale * pilot.length) < 1e-4 * rival.length:
                for is_mirrored in (False, True):
                    start = pilot.centre.conjugate() if is_mirrored else pilot.centre
                    angles.append((is_mirrored, cmath.phase((rival.centre - shift) / start)))
        angles.sort(key=lambda one: (one[0], abs(one[1])))
        trials += [Motion(scale, a if abs(a) > 1e-9 else 0.0, m, shift) for m, a in angles]
    else:
        trials.append(Motion(scale, 0.0, True, shift))
    return trials


def _compared(
    expected: Sequence[Contour], found: Sequence[Contour], tolerance: float
) -> tuple[Change, ...]:
    ours, theirs = ([_Marked(c) for c in cs] for cs in (expected, found))
    pairs = _paired(ours, theirs)
    partner, taken = dict(pairs), {b for _, b in pairs}
    changes: list[Change] = []
    for k, mine in enumerate(ours):
        if k in partner:
            changes += _pair_changes(mine.contour, theirs[partner[k]].contour, tolerance)
        else:
            place = mine.contour.path.edges[0].start
            text = f"{_told(mine)} is missing, it starts at {place_text(place)}"
            changes.append(Change("missing", text, place))
    for k, other in enumerate(theirs):
        if k not in taken:
            place = other.contour.path.edges[0].start
            is_twice = any(_cost(mine, other) < 1e-3 * mine.length for mine in ours)
            kind, what = ("doubled", "stands twice") if is_twice else ("extra", "is no part of it")
            text = f"{_told(other)} {what}, it starts at {place_text(place)}"
            changes.append(Change(kind, text, place))
    return tuple(changes)


def _told(marked: _Marked) -> str:
    return f"a contour of {MM * marked.length:.3f} mm on layer {marked.contour.layer}"


def _cost(mine: _Marked, other: _Marked) -> float:
    return abs(mine.centre - other.centre) + abs(mine.length - other.length)


def _paired(ours: Sequence[_Marked], theirs: Sequence[_Marked]) -> list[tuple[int, int]]:
    costs = sorted(
        (cost, a, b)
        for a, mine in enumerate(ours)
        for b, other in enumerate(theirs)
        if (cost := _cost(mine, other)) < PAIR_SHARE * mine.length
    )
    pairs: dict[int, int] = {}
    taken: set[int] = set()
    for _, a, b in costs:
        if a not in pairs and b not in taken:
            pairs[a] = b
            taken.add(b)
    return sorted(pairs.items())


def _pair_changes(mine: Contour, other: Contour, tolerance: float) -> list[Change]:
    changes = []
    start = other.path.edges[0].start
    if other.layer != mine.layer:
        text = f"the contour at {place_text(start)} is on layer {other.layer}, not {mine.layer}"
        changes.append(Change("layer", text, start))
    path = other.path
    if (area(mine.path) > 0.0) != (area(path) > 0.0):
        text = f"the contour at {place_text(start)} on layer {other.layer} runs backwards"
        changes.append(Change("reversed", text, start))
        path = reversed_path(path)
    off = _off(mine.path, path, tolerance)
    if off:
        worst, place = max(off, key=lambda one: one[0])
        count = f"{len(off)} places" if len(off) > 1 else "one place"
        text = (
            f"a contour on layer {other.layer} is off by {UM * worst:.2f} um at "
            f"{place_text(place)}, in {count}"
        )
        changes.append(Change("moved", text, place))
    return changes


def _off(mine: Path, other: Path, tolerance: float) -> list[tuple[float, Point]]:
    """Distances above the tolerance, and where the other path has them."""
    gaps = vertex_gaps(mine, other) if len(mine.edges) == len(other.edges) else None
    if gaps is None or any(gap > tolerance for gap, _ in gaps):
        curves = curve_gaps(mine, other)
        # A circle may be cut anywhere; other vertices are where the design has them.
        if gaps is None or (_is_ring(mine) and max(gap for gap, _ in curves) <= tolerance):
            gaps = curves
    return [(gap, place) for gap, place in gaps if gap > tolerance]


def _is_ring(path: Path) -> bool:
    first = path.edges[0]
    return not any(e.is_line for e in path.edges) and all(
        abs(e.centre - first.centre) < TOLERANCE for e in path.edges
    )
