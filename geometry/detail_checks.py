"""Checks of notches, holes and keyways: the iron that they leave beside them.

First what `detail_sizes` tells of each by itself; where nothing is amiss the pole is drawn and
every web of iron (to barriers, to other details, to rim, bore and d axis) measured on the exact
outline. A web is at least as wide as the sheet is thick (common practice, no source). Between a
notch and a barrier the stated width of its tangential rib is kept: no notch makes a rib thinner.
"""

import cmath
import re
from collections.abc import Iterator, Sequence
from functools import lru_cache
from itertools import chain, combinations, pairwise

from .corners import foot, is_within
from .curves import Edge, line
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
from .rotor import bare_pole, rotor_regions
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


def _webs(
    design: MachineDesign, pole: DetailPole, outline: RotorOutline
) -> Iterator[tuple[CutOut, str, str, float, float]]:
    """Each web beside a detail: detail, kind and name of the neighbour, width, least width."""
    sheet = pole.sheet
    turn = cmath.exp(2j * pole.half_pitch)
    sides = (line(0j, 2.0 * pole.rotor_radius), line(0j, 2.0 * pole.rotor_radius * turn))
    cavities = _cavities(design)
    for one in outline.cut_outs:
        kind = one.key.split(".")[1][:4]
        if one.region.name not in _on_sides(outline):
            yield one, "side", "the d axis", _clear(one, sides, sheet), sheet
        if kind != "notc":
            yield one, "rim", "the rim", _clear(one, outline.gap_side, sheet), sheet
        if kind != "keyw":
            yield one, "bore", "the bore", _clear(one, outline.shaft_side, sheet), sheet
        for number, region in cavities:
            rib = MM * design.rotor.barrier[number - 1].tangential_rib_mm
            least = max(sheet, rib) if kind == "notc" else sheet
            web = _apart(one, region, least)
            yield one, "barrier", f"barrier {number}", web, least
    for first, second in combinations(outline.cut_outs, 2):
        web = _apart(second, first.region, sheet)
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


def _apart(one: CutOut, other: Region, least: float) -> float:
    """Iron between a detail and another cut-out in m; 0 or less where one holds the other."""
    web = _clear(one, other.outer.edges, least)
    if web > 0.0 and (
        encloses(other.outer, one.wall[0].start)
        or encloses(one.region.outer, other.outer.edges[0].start)
    ):
        return -least
    return web


def _clear(one: CutOut, edges: Sequence[Edge], least: float) -> float:
    """Distance in m from a detail to a chain; not looked at closely where it is `least` or more.

    Edges that stay clear of the circle about the detail by that much need no exact distance: most.
    """
    points = [point for edge in one.wall for point in (edge.start, edge.point(0.5), edge.end)]
    centre = 0.5 * (
        complex(min(p.real for p in points), min(p.imag for p in points))
        + complex(max(p.real for p in points), max(p.imag for p in points))
    )
    # No point of an edge lies further than a quarter of its length from its ends and its middle.
    reach = max(abs(point - centre) for point in points)
    reach += 0.25 * max(edge.length for edge in one.wall) + least + SLACK
    near = [edge for edge in edges if _to_point(edge, centre) <= reach]
    return distance(one.wall, near) if near else least


def _to_point(edge: Edge, point: complex) -> float:
    """Distance in m from an edge to a point."""
    away = min(abs(edge.start - point), abs(edge.end - point))
    at = foot(edge, point)
    return min(away, abs(at - point)) if is_within(edge, at) else away


def _cavities(design: MachineDesign) -> tuple[tuple[int, Region], ...]:
    """Cavities with their barrier's number; none where the barriers cannot be drawn."""
    bare = {"notch": (), "hole": (), "keyway": None}
    rotor = design.rotor.model_copy(update=bare)
    return _bare_cavities(design.model_copy(update={"rotor": rotor}))


@lru_cache(maxsize=8)  # while a detail's key is tried, the barriers stay
def _bare_cavities(design: MachineDesign) -> tuple[tuple[int, Region], ...]:
    try:
        regions, _ = rotor_regions(design)
    except ValueError:
        return ()  # the barriers' own checks say why
    found = ((re.match(r"barrier_(\d+)", region.name), region) for region in regions)
    return tuple((int(match[1]), region) for match, region in found if match)
