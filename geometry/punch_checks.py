"""What a punch or a cutting machine cannot make of contours: each fault one line with its place.

Least sizes are common practice, no source: steel no narrower than the sheet is thick, inner radii
no smaller than half of it, edges no shorter than a tenth; no contour shorter than 0.05 mm.

A contour with one of the `FAULTS` cannot be cut as it is; the other findings are sizes at which a
shop will ask, and a laser or a wire may well make them.
"""

import cmath
import math
from collections.abc import Sequence
from itertools import groupby, pairwise

from .contours import Contour, compare_contours
from .curves import Edge, Path, Point, area, perimeter
from .distances import nearest
from .enclosure import encloses
from .errors import Finding
from .outline_places import place_text
from .punch_webs import TOUCH, Web, edge_pairs, steel_webs

MM = 1e-3  # m
UM = 1e-6  # m
SHORTEST = 0.05  # mm, of a contour
FAULTS = frozenset(
    {
        "contour_open",
        "contour_short",
        "contour_doubled",
        "contours_touch",
        "contour_direction",
        "contour_outside",
        "contour_nested",
    }
)
OPEN_TOL = 1e-9  # m between the end of an edge and the start of the next
SHARP = 1e-3  # rad, a turn between edges from which on there is a corner
SLACK = 1e-9  # m, by which a size may fall short by rounding


def punch_findings(
    contours: Sequence[Contour],
    sheet_thickness_mm: float,
    least_radius_mm: float | None = None,
) -> tuple[Finding, ...]:
    """All faults of closed contours that are to be punched from one sheet.

    Args:
        contours: of one lamination, in m, the steel to the left of each.
        sheet_thickness_mm: below which the steel must not be narrow.
        least_radius_mm: of corners cut out of the steel; half the sheet's thickness if not given.

    Returns:
        Findings with codes `contour_open`, `contour_short`, `edge_short`, `contour_doubled`,
        `contours_touch`, `contour_direction`, `contour_outside`, `contour_nested`, `web_thin` and
        `radius_small`; values in mm. Faults alike to a micrometre are one, with their count.
    """
    names = [_name(contours, k) for k in range(len(contours))]
    found = [
        f
        for c, name in zip(contours, names, strict=True)
        for f in _of_one(c, name, sheet_thickness_mm)
    ]
    touching = _touching(contours, names)
    found += touching
    if not touching and not any(f.code == "contour_open" for f in found):
        found += _misplaced(contours, names)
        found += _thin(contours, names, sheet_thickness_mm)
    radius = 0.5 * sheet_thickness_mm if least_radius_mm is None else least_radius_mm
    return (*found, *_tight(contours, names, radius))


def _name(contours: Sequence[Contour], k: int) -> str:
    layer = contours[k].layer
    alike = [n for n, contour in enumerate(contours) if contour.layer == layer]
    return layer if len(alike) == 1 else f"{layer} {alike.index(k) + 1}"


def _of_one(contour: Contour, name: str, sheet_mm: float) -> list[Finding]:
    """Faults of a contour by itself but its crossings."""
    found = []
    edges = contour.path.edges
    for before, after in pairwise((*edges, edges[0])):
        gap = abs(after.start - before.end)
        if gap > OPEN_TOL:
            key = f"gap_mm of {name} at {place_text(after.start)}"
            found.append(Finding("contour_open", key, gap / MM, "not closed", "close it"))
    length = perimeter(contour.path) / MM
    if length < SHORTEST:
        key = f"length_mm of {name} at {place_text(edges[0].start)}"
        remedy = f"accepted {SHORTEST:g} or more"
        return [*found, Finding("contour_short", key, length, "too short to cut", remedy)]
    least = 0.1 * sheet_mm
    short = [(name, e.length / MM, e.start) for e in edges if MM * least - e.length > SLACK]
    text, remedy = "an edge too short for a punch", f"accepted {least:g} or more"
    found += [_grouped("edge_short", "length_mm of", g, text, remedy) for g in _alike(short)]
    if (area(contour.path) > 0.0) != (contour.layer == "OUTER_CONTOUR"):
        key = f"area_mm2 of {name} at {place_text(edges[0].start)}"
        size = area(contour.path) / MM**2
        text = "runs the wrong way, so that the steel lies to its right"
        found.append(Finding("contour_direction", key, size, text, "turn it round"))
    return found


def _touching(contours: Sequence[Contour], names: Sequence[str]) -> list[Finding]:
    places: dict[tuple[int, int], Point] = {}
    for (a, first), (b, second) in edge_pairs(contours, TOUCH):
        p, q = nearest(first, second)
        if abs(q - p) <= TOUCH:
            places.setdefault((a, b), 0.5 * (p + q))
    found = []
    for (a, b), place in sorted(places.items()):
        at = place_text(place)
        if a == b:
            key, text = (
                f"distance_mm of {names[a]} from itself at {at}",
                "crosses or touches itself",
            )
            found.append(Finding("contours_touch", key, 0.0, text, "part its sides"))
        elif (
            compare_contours([contours[a]], [Contour(contours[a].layer, contours[b].path)]) < TOUCH
        ):
            key = f"distance_mm of {names[a]} and {names[b]} at {at}"
            found.append(Finding("contour_doubled", key, 0.0, "drawn twice", "take one out"))
        else:
            key = f"distance_mm of {names[a]} and {names[b]} at {at}"
            found.append(Finding("contours_touch", key, 0.0, "cross or touch", "part them"))
    return found


def _misplaced(contours: Sequence[Contour], names: Sequence[str]) -> list[Finding]:
    """Holes that are not in the steel; only of contours that do not touch."""
    found = []
    outers = [c.path for c in contours if c.layer == "OUTER_CONTOUR"]
    spots = [_spot(contour.path) for contour in contours]
    for k, contour in enumerate(contours):
        if contour.layer == "OUTER_CONTOUR":
            continue
        point = contour.path.edges[0].start
        at, size = place_text(point), abs(area(contour.path)) / MM**2
        if not any(encloses(path, point) for path in outers):
            key, text = f"area_mm2 of {names[k]} at {at}", "outside the outer contour"
            found.append(Finding("contour_outside", key, size, text, "take it out"))
            continue
        for j, other in enumerate(contours):
            if j == k or other.layer == "OUTER_CONTOUR":
                continue
            middle, reach = spots[j]
            if abs(point - middle) <= reach and encloses(other.path, point):
                key, text = f"area_mm2 of {names[k]} at {at}", f"inside {names[j]}"
                found.append(Finding("contour_nested", key, size, text, "take one out"))
    return found


def _spot(path: Path) -> tuple[Point, float]:
    """The middle of a contour's corners, and a radius in m about it that holds the contour."""
    middle = sum(edge.start for edge in path.edges) / len(path.edges)
    # The rise of an arc over its chord is half the chord times the bulge.
    rise = max(0.5 * abs(edge.end - edge.start) * abs(edge.bulge) for edge in path.edges)
    return middle, max(abs(edge.start - middle) for edge in path.edges) + 2.0 * rise


def _thin(contours: Sequence[Contour], names: Sequence[str], sheet_mm: float) -> list[Finding]:
    thin = [w for w in steel_webs(contours, MM * sheet_mm) if MM * sheet_mm - w.width > SLACK]
    # Of two contours the thinnest place; of one with itself, as between slots, all.
    least: dict[tuple[int, int], Web] = {}
    for web in thin:
        least.setdefault((web.first, web.second), web)
    kept = [w for w in thin if w.first == w.second or least[w.first, w.second] is w]
    places = [(_pair(names, web), web.width / MM, web.place) for web in kept]
    text, remedy = f"thinner than the sheet ({sheet_mm:g})", f"accepted {sheet_mm:g} or more"
    return [_grouped("web_thin", "web_mm between", g, text, remedy) for g in _alike(places)]


def _pair(names: Sequence[str], web: Web) -> str:
    if web.first == web.second:
        return f"sides of {names[web.first]}"
    return f"{names[web.first]} and {names[web.second]}"


def _tight(contours: Sequence[Contour], names: Sequence[str], least_mm: float) -> list[Finding]:
    places = [
        (name, radius / MM, place)
        for contour, name in zip(contours, names, strict=True)
        for radius, place in _inner_radii(contour.path)
        if MM * least_mm - radius > SLACK
    ]
    text, remedy = "an inner corner too tight to punch", f"accepted {least_mm:g} or more"
    return [_grouped("radius_small", "radius_mm of", g, text, remedy) for g in _alike(places)]


def _inner_radii(path: Path) -> list[tuple[float, Point]]:
    """Radii of the corners cut out of the steel, 0 of sharp ones, with their places."""
    found = []
    edges = path.edges
    for before, after in pairwise((edges[-1], *edges)):
        if _turn(before, after) < -SHARP:
            found.append((0.0, after.start))
        if after.bulge < 0.0:
            found.append((after.radius, after.point(0.5)))
    return found


def _turn(before: Edge, after: Edge) -> float:
    return cmath.phase(after.direction(0.0) / before.direction(1.0))


Places = list[tuple[str, float, Point]]  # name, value in mm, place


def _alike(places: Places) -> list[Places]:
    """Places of one kind of contours with values alike to a micrometre, least values first."""

    def key(one: tuple[str, float, Point]) -> tuple[float, str]:
        return round(one[1] * MM / UM), "".join(ch for ch in one[0] if not ch.isdigit())

    return [list(group) for _, group in groupby(sorted(places, key=key), key)]


def _grouped(code: str, what: str, group: Places, fault: str, remedy: str) -> Finding:
    """One finding for all places of a group: the first counter-clockwise one is named."""
    name, value, place = min(group, key=lambda one: cmath.phase(one[2]) % (2.0 * math.pi))
    count = f" and {len(group) - 1} places alike" if len(group) > 1 else ""
    return Finding(code, f"{what} {name} at {place_text(place)}{count}", value, fault, remedy)
