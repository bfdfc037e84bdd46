"""Checks of notches, holes and keyways: the iron that they leave beside them.

First what `detail_sizes` tells of each by itself; where nothing is amiss the pole is drawn and
every web of iron (to barriers, to other details, to rim, bore and d axis) measured on the exact
outline. A web is at least as wide as the sheet is thick (common practice, no source). Between a
notch and a barrier the stated width of its tangential rib is kept: no notch makes a rib thinner.
"""

import cmath
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import chain, combinations, pairwise

from .corners import foot, is_within
from .curves import Edge, Point, line
from .design import MachineDesign
from .detail_places import places, poles_apart
from .detail_sizes import (
    MM,
    SLACK,
    DetailPole,
    detail_pole,
    hole_faults,
    keyway_faults,
    left,
    notch_faults,
)
from .distances import distance
from .enclosure import encloses
from .remedies import Fault
from .rotor import bare_pole, cavities, following
from .rotor_outline import CutOut, RotorOutline
from .section import Region
from .unlike_poles import of_all_poles

# Keys that move a detail's webs, the most natural first.
WEB_KEYS = {
    "notch": ("depth_mm", "angle_deg", "width_mm"),
    "hole": ("place_radius_mm", "angle_deg", "diameter_mm", "span_deg"),
    "keyway": ("depth_mm", "width_mm", "head_width_mm"),
}


def has_details(design: MachineDesign) -> bool:
    """Whether there is anything to check."""
    rotor = design.rotor
    return bool(rotor.notch or rotor.hole or rotor.keyway)


def detail_faults(design: MachineDesign) -> list[Fault]:
    """All faults of notches, holes and keyway; none without a walk where there are none."""
    if not has_details(design):
        return []
    return of_all_poles(
        design,
        lambda pole: _faults_of(pole, poles_apart(design, is_alternate=pole is not design)),
    )


def _faults_of(design: MachineDesign, numbers: Sequence[int]) -> list[Fault]:
    """Faults of the poles `numbers`, all with the barriers of the design, unlike in keyways."""
    pole, rotor = detail_pole(design), design.rotor
    faults = []
    for number, notch in enumerate(rotor.notch, start=1):
        faults += notch_faults(pole, number, notch)
    for number, hole in enumerate(rotor.hole, start=1):
        faults += hole_faults(pole, number, hole)
    if rotor.keyway is not None:
        faults += keyway_faults(pole, rotor.keyway)
    return faults or _notch_order(design, pole) or _web_faults(design, pole, numbers)


def _notch_order(design: MachineDesign, pole: DetailPole) -> list[Fault]:
    """Notches whose mouths run into each other, which no rim could be drawn with."""
    spans = []
    for number, notch in enumerate(design.rotor.notch, start=1):
        reach = cmath.phase(complex(pole.rotor_radius, 0.5 * MM * notch.width_mm))
        for _, angle in places(notch.angle_deg * cmath.pi / 180.0, pole.half_pitch):
            spans.append((angle - reach, angle + reach, number))
    spans.sort()
    worst: dict[int, Fault] = {}
    for (_, end, first), (start, _, second) in pairwise(spans):
        web = (start - end) * pole.rotor_radius
        if pole.sheet - web > SLACK:
            keys = tuple(f"rotor.notch[{second}].{key}" for key in ("angle_deg", "width_mm"))
            text = f"{left(web)} at the rim to notch {first}"
            worst[second] = Fault("notch_close", keys, text, pole.sheet - web)
    return list(worst.values())


def _web_faults(design: MachineDesign, pole: DetailPole, numbers: Sequence[int]) -> list[Fault]:
    """The thinnest web of each detail towards each kind of neighbour, where it is too thin."""
    worst: dict[tuple[str, str], Fault] = {}
    webs = (_webs(design, pole, bare_pole(design, number)) for number in numbers)
    for cut_out, kind, name, web, least in chain.from_iterable(webs):
        if least - web <= SLACK:
            continue
        names = _names(design, cut_out.key)
        keys = tuple(f"{cut_out.key}.{key}" for key in names)
        text = f"{left(web)} to {name}"
        if least > pole.sheet + SLACK:
            text += f", whose tangential rib is {least / MM:g} mm"
        fault = Fault(f"web_{kind}", keys, text, least - web)
        known = worst.get((cut_out.key, kind))
        if known is None or known.lack < fault.lack:
            worst[cut_out.key, kind] = fault
    return list(worst.values())


def _names(design: MachineDesign, table: str) -> tuple[str, ...]:
    kind = table.split(".")[1].split("[")[0]
    names = WEB_KEYS[kind]
    part = design.rotor.keyway if kind == "keyway" else None
    if part is not None and part.kind == "keyway":
        return names[:-1]
    return names if table.startswith("rotor.keyway") or _has_span(design, table) else names[:3]


def _has_span(design: MachineDesign, table: str) -> bool:
    match = re.fullmatch(r"rotor\.hole\[(\d+)\]", table)
    return match is not None and design.rotor.hole[int(match[1]) - 1].span_deg is not None


@dataclass(frozen=True, slots=True)
class _Part:
    """A chain of edges with a circle about it, and one about each edge, for a quick look."""

    edges: tuple[Edge, ...]
    centre: Point
    reach: float  # m
    spots: tuple[tuple[Point, float], ...]  # middle of each edge, half its length


def _part(edges: Sequence[Edge]) -> _Part:
    points = [point for edge in edges for point in (edge.start, edge.point(0.5))]
    points.append(edges[-1].end)
    xs, ys = [point.real for point in points], [point.imag for point in points]
    centre = 0.5 * complex(min(xs) + max(xs), min(ys) + max(ys))
    spots = tuple((edge.point(0.5), 0.5 * edge.length) for edge in edges)
    # No point of an edge lies further than a quarter of its length from its ends and its middle.
    reach = max(abs(point - centre) for point in points) + 0.5 * max(half for _, half in spots)
    return _Part(tuple(edges), centre, reach, spots)


def _webs(
    design: MachineDesign, pole: DetailPole, outline: RotorOutline
) -> Iterator[tuple[CutOut, str, str, float, float]]:
    """Each web beside a detail: detail, kind and name of the neighbour, width, least width."""
    sheet, on_sides = pole.sheet, _on_sides(outline)
    turn = cmath.exp(2j * pole.half_pitch)
    sides = _part((line(2.0 * pole.rotor_radius * turn, 0j), line(0j, 2.0 * pole.rotor_radius)))
    rim, bore = _part(outline.gap_side), _part(outline.shaft_side)
    cavities, parts = _cavities(design), [_part(one.wall) for one in outline.cut_outs]
    for one, part in zip(outline.cut_outs, parts, strict=True):
        kind = one.key.split(".")[1][:4]
        if one.region.name not in on_sides:
            yield one, "side", "the d axis", _clear(part, sides, sheet), sheet
        if kind != "notc":
            yield one, "rim", "the rim", _clear(part, rim, sheet), sheet
        if kind != "keyw":
            yield one, "bore", "the bore", _clear(part, bore, sheet), sheet
        for number, region, cavity in cavities:
            rib = MM * design.rotor.barrier[number - 1].tangential_rib_mm
            least = max(sheet, rib) if kind == "notc" else sheet
            web = _apart((part, one.region), (cavity, region), least)
            yield one, "barrier", f"barrier {number}", web, least
    for (first, part), (second, other) in combinations(
        zip(outline.cut_outs, parts, strict=True), 2
    ):
        web = _apart((other, second.region), (part, first.region), sheet)
        name = "its mirror image" if first.key == second.key else first.key
        yield second, "detail", name, web, sheet


def _on_sides(outline: RotorOutline) -> set[str]:
    """Names of the details that the sides cut in two."""
    return {
        one.region.name
        for one in outline.cut_outs
        if one.region.name.endswith(("_right", "_left"))
        and any(edge.is_line and edge not in one.wall for edge in one.region.outer.edges)
    }


def _apart(one: tuple[_Part, Region], other: tuple[_Part, Region], least: float) -> float:
    """Iron between two cut-outs in m; 0 or less where one holds the other."""
    if _far(one[0], other[0], least):
        return least
    web = _clear(one[0], other[0], least)
    if web > 0.0 and (_holds(one, other[0]) or _holds(other, one[0])):
        return -least
    return web


def _holds(outer: tuple[_Part, Region], inner: _Part) -> bool:
    point = inner.edges[0].start
    is_near = abs(point - outer[0].centre) <= outer[0].reach
    return is_near and encloses(outer[1].outer, point)


def _far(one: _Part, other: _Part, least: float) -> bool:
    return abs(one.centre - other.centre) >= one.reach + other.reach + least + SLACK


def _clear(one: _Part, other: _Part, least: float) -> float:
    """Distance in m between two parts; not looked at closely where it is `least` or more.

    Edges that stay clear of the circle about the first need no exact distance: most.
    """
    if _far(one, other, least):
        return least
    room = one.reach + least + SLACK
    near = [
        edge
        for edge, (middle, half) in zip(other.edges, other.spots, strict=True)
        if abs(middle - one.centre) - half <= room and _to_point(edge, one.centre) <= room
    ]
    return distance(one.edges, near, least + SLACK) if near else least


def _to_point(edge: Edge, point: Point) -> float:
    """Distance in m from an edge to a point."""
    away = min(abs(edge.start - point), abs(edge.end - point))
    at = foot(edge, point)
    return min(away, abs(at - point)) if is_within(edge, at) else away


def _cavities(design: MachineDesign) -> tuple[tuple[int, Region, _Part], ...]:
    """Cavities with their barrier's number; none where the barriers cannot be drawn."""
    bare = {"notch": (), "hole": (), "keyway": None}
    rotor = design.rotor.model_copy(update=bare)
    return _bare_cavities(design.model_copy(update={"rotor": rotor}))


@lru_cache(maxsize=8)  # while a detail's key is tried, the barriers stay
def _bare_cavities(design: MachineDesign) -> tuple[tuple[int, Region, _Part], ...]:
    try:
        found = cavities(following(design))
    except ValueError:
        return ()  # the barriers' own checks say why
    return tuple((number, region, _part(region.outer.edges)) for number, region in found)
