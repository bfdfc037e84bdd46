"""Rim, bore and sides of the rotor iron of one pole, with notches, holes and keyways cut in.

Written in the rotor's frame: the pole's sector runs from angle 0 to the pole pitch, a d axis on
each side. A detail on a d axis is cut in two by the sides; all others lie inside.
The rim and the bore are chains from side to side. A groove takes a piece of its chain, the mouth,
out of the iron's outline; the neighbour (gap or shaft) keeps the mouth, and what lies between
mouth and wall is a region of its own. So all regions share their edges exactly.
Source: derived.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from .curves import Edge, Path, Point, arc, closed, line, mirrored_edge, reversed_edge, turned_edge
from .cut_outs import (
    across,
    hole_rim,
    joined,
    keyway_wall,
    mirrored,
    notch_floor,
    split,
    turned_edges,
    whole_outline,
)
from .design import MachineDesign
from .design_details import HoleDesign, KeywayDesign, NotchDesign
from .detail_places import ON_AXIS_TOL, Places, places
from .section import Material, Region

MM = 1e-3  # m

Wall = Callable[[float, Point], tuple[Edge, ...]]  # middle of the mouth, its end -> upper half


@dataclass(frozen=True, slots=True)
class CutOut:
    """A notch, hole or keyway as it stands in the sector, or its half beside a side."""

    region: Region
    key: str  # table of the design file, as in a message
    wall: tuple[Edge, ...]  # what bounds the iron


@dataclass(frozen=True, slots=True)
class RotorOutline:
    """The rotor of one pole without its barriers."""

    iron: Path
    iron_holes: tuple[Path, ...]
    shaft: Path
    gap_side: tuple[Edge, ...]  # rim with closed mouths, from side to side
    shaft_side: tuple[Edge, ...]  # bore with closed mouths, from side to side
    rim: tuple[Edge, ...]  # the iron's, walls of notches included
    bore: tuple[Edge, ...]  # the iron's, walls of keyways included
    cut_outs: tuple[CutOut, ...]


def rotor_outline(
    design: MachineDesign,
    rim: Sequence[Edge],
    bore_radius: float,
    pitch: float,
    keys: Places,
) -> RotorOutline:
    """Outline of one pole's iron and shaft from a bare rim and the details of the design.

    Args:
        design: with notches, holes and keyway.
        rim: chain from angle 0 to `pitch`.
        bore_radius: in m.
        pitch: pole pitch in rad.
        keys: keyways of this pole.

    Raises:
        ValueError: where a detail does not fit; `detail_checks` says what would.
    """
    bore = (arc(complex(bore_radius), bore_radius * cmath.exp(1j * pitch), 0j, ccw=True),)
    outer = _Chain(rim, pitch)
    inner = _Chain(bore, pitch)
    notches = _notches(design, outer, pitch)
    key_cuts = _keyways(design, inner, keys)
    holes = _holes(design, pitch)
    whole = [one for one in holes if one.region.outer.edges == one.wall]
    halves = [one for one in holes if one.region.outer.edges != one.wall]
    first, last = inner.iron[0].start, inner.iron[-1].end
    right, left = _sides(halves, (first, outer.iron[0].start), (last, outer.iron[-1].end), pitch)
    reversed_bore = [reversed_edge(edge) for edge in reversed(inner.iron)]
    seen = inner.seen
    shaft = [line(0j, seen[0].start), *seen, line(seen[-1].end, 0j)]
    return RotorOutline(
        iron=closed([*right, *outer.iron, *left, *reversed_bore]),
        iron_holes=tuple(
            Path(tuple(reversed_edge(edge) for edge in reversed(one.wall))) for one in whole
        ),
        shaft=closed(shaft),
        gap_side=tuple(outer.seen),
        shaft_side=tuple(seen),
        rim=tuple(outer.iron),
        bore=tuple(inner.iron),
        cut_outs=(*notches, *holes, *key_cuts),
    )


class _Chain:
    """Rim or bore while grooves are cut into it, by growing angle."""

    def __init__(self, edges: Sequence[Edge], pitch: float) -> None:
        self._left = list(edges)
        self._pitch = pitch
        self._iron: list[Edge] = []
        self._seen: list[Edge] = []

    @property
    def iron(self) -> list[Edge]:
        """What bounds the iron."""
        return [*self._iron, *self._left]

    @property
    def seen(self) -> list[Edge]:
        """What bounds the neighbour."""
        return [*self._seen, *self._left]

    def cut(self, angle: float, half: float, wall: Wall) -> tuple[list[Edge], tuple[Edge, ...]]:
        """Cut a groove with its middle at `angle` rad; its mouth and its wall, by growing angle."""
        local = turned_edges(self._left, -angle)
        top = across(local, 0.0)
        has_lower, has_upper = angle > ON_AXIS_TOL, angle < self._pitch - ON_AXIS_TOL
        # The rim ends on the middle line of a groove that a side cuts in two.
        middle = self._left[0].start if not has_lower else self._left[-1].end
        height = abs(middle) if top is None else top[1].real
        lower: tuple[Edge, ...] = ()
        upper: tuple[Edge, ...] = ()
        if has_lower:
            number, point = _found(across(local, -half))
            before, self._left = split(self._left, number, point * cmath.exp(1j * angle))
            self._iron += before
            self._seen += before
            lower = mirrored(wall(height, point.conjugate()))
        mouth, self._left = self._left, []
        if has_upper:
            number, point = _found(across(turned_edges(mouth, -angle), half))
            mouth, self._left = split(mouth, number, point * cmath.exp(1j * angle))
            upper = wall(height, point)
        shape = joined(lower, upper) if lower and upper else lower or upper
        placed = turned_edges(shape, angle)
        self._iron += placed
        self._seen += mouth
        return mouth, placed


def _found(crossing: tuple[int, Point] | None) -> tuple[int, Point]:
    if crossing is None:
        raise ValueError("a groove reaches beyond its rim or runs into the one before")
    return crossing


def _notches(design: MachineDesign, rim: _Chain, pitch: float) -> list[CutOut]:
    todo = []
    for number, notch in enumerate(design.rotor.notch, start=1):
        for suffix, angle in places(math.radians(notch.angle_deg), 0.5 * pitch):
            todo.append((angle, number, suffix, notch))
    made = []
    for angle, number, suffix, notch in sorted(todo, key=lambda one: one[0]):
        mouth, floor = rim.cut(angle, 0.5 * MM * notch.width_mm, _notch_wall(notch))
        path = _between(mouth, floor)
        region = Region(f"notch_{number}{suffix}", "air", path)
        made.append(CutOut(region, f"rotor.notch[{number}]", floor))
    return made


def _notch_wall(notch: NotchDesign) -> Wall:
    return lambda top, end: notch_floor(notch, top, end)


def _keyways(design: MachineDesign, bore: _Chain, keys: Places) -> list[CutOut]:
    keyway = design.rotor.keyway
    if keyway is None:
        return []
    material: Material = "air" if keyway.key == "air" else "key"
    mu = _key_permeability(design, keyway)
    made = []
    for suffix, angle in keys:
        mouth, wall = bore.cut(angle, 0.5 * MM * keyway.width_mm, _key_wall(keyway))
        path = _between(wall, mouth)
        region = Region(f"key_1{suffix}", material, path, relative_permeability=mu)
        made.append(CutOut(region, "rotor.keyway", wall))
    return made


def _key_wall(keyway: KeywayDesign) -> Wall:
    return lambda top, end: keyway_wall(keyway, top)


def _key_permeability(design: MachineDesign, keyway: KeywayDesign) -> float:
    if keyway.key == "air":
        return 1.0
    stated = keyway.key_relative_permeability
    return design.rotor.shaft_relative_permeability if stated is None else stated


def _between(ahead: Sequence[Edge], back: Sequence[Edge]) -> Path:
    """The area to the left of `ahead` and to the right of `back`, both by growing angle.

    On a side of the sector, where the two do not meet, it is closed along the side.
    """
    returned = [reversed_edge(edge) for edge in reversed(back)]
    ends = []
    if abs(ahead[-1].end - back[-1].end) > ON_AXIS_TOL:
        ends = [line(ahead[-1].end, back[-1].end)]
    start = []
    if abs(ahead[0].start - back[0].start) > ON_AXIS_TOL:
        start = [line(back[0].start, ahead[0].start)]
    return closed([*start, *ahead, *ends, *returned])


def _holes(design: MachineDesign, pitch: float) -> list[CutOut]:
    made = []
    for number, hole in enumerate(design.rotor.hole, start=1):
        upper = hole_rim(hole)
        for suffix, angle in places(math.radians(hole.angle_deg), 0.5 * pitch):
            key, name = f"rotor.hole[{number}]", f"hole_{number}{suffix}"
            if angle == 0.0:
                wall, path = upper, closed([line(upper[-1].end, upper[0].start), *upper])
            elif suffix and abs(angle - pitch) < ON_AXIS_TOL:
                wall = turned_edges(mirrored(upper), angle)
                path = closed([*wall, line(wall[-1].end, wall[0].start)])
            else:
                path = closed(turned_edges(whole_outline(upper), angle))
                wall = path.edges
            made.append(CutOut(_hole_region(name, hole, path), key, wall))
    return made


def _hole_region(name: str, hole: HoleDesign, path: Path) -> Region:
    mu = hole.relative_permeability or 1.0 if hole.material == "rivet" else 1.0
    return Region(name, hole.material, path, relative_permeability=mu)


def _sides(
    halves: Sequence[CutOut],
    right_ends: tuple[Point, Point],
    left_ends: tuple[Point, Point],
    pitch: float,
) -> tuple[list[Edge], list[Edge]]:
    """The iron's sides: outward along angle 0, inward along the pitch, round the half holes."""
    right: list[Edge] = []
    at, end = right_ends
    on_right = [one for one in halves if one.region.name.endswith("_right")]
    for one in sorted(on_right, key=lambda one: abs(one.wall[0].start)):
        around = [reversed_edge(edge) for edge in reversed(one.wall)]  # from the near end
        right += [line(at, around[0].start), *around]
        at = around[-1].end
    right.append(line(at, end))
    mirror = [mirrored_edge(reversed_edge(edge)) for edge in reversed(right)]
    left = [turned_edge(edge, pitch) for edge in mirror]
    first, last = left[0], left[-1]
    if len(left) == 1:
        return right, [line(left_ends[1], left_ends[0])]
    return right, [
        Edge(left_ends[1], first.end, first.bulge),
        *left[1:-1],
        Edge(last.start, left_ends[0], last.bulge),
    ]
