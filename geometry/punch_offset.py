"""The contours that are punched: the analysed outline with the allowances of the order.

Every contour is moved to its right, where there is no steel: by the tool's offset, less the
clearance where it is the pocket of a magnet. Before that the rim grows by half the grinding
allowance, the sides of its notches running on. Nothing is redrawn: lines stay lines, arcs arcs
(`offset_loops`). What would close or split a cut-out, or cut a rib through, is refused.
"""

import cmath
import math
from collections.abc import Sequence

from .contours import Contour
from .corners import crossings
from .curves import Edge, Path, Point, arc, chained, closed, perimeter, turned
from .distances import distance, nearest
from .errors import DesignError, OffsetError
from .offset_loops import MITRE, WELD, offset_loops
from .outline_places import place_text
from .punch_options import MOST_CLEARANCE, MOST_OFFSET, Corners, PunchOptions
from .punch_webs import TOUCH, air_throats, edge_pairs

MM = 1e-3  # m
POCKETS = "MAGNET_POCKETS"
RIM = "OUTER_CONTOUR"
SAME = 1e-11  # m and of a bulge: poles alike differ by the rounding of a turn
FARTHEST = 2.0 * MM * (MOST_OFFSET + MOST_CLEARANCE)  # m, that two contours may close in by
STEPS = 14  # halvings of the offset refused: 1 mm to 0.1 um


def punched(contours: Sequence[Contour], options: PunchOptions) -> tuple[Contour, ...]:
    """The contours as they are punched or cut, in the same order, each on its layer.

    Args:
        contours: closed, in m, the sheet to the left of each.
        options: the order's allowances.

    Raises:
        OffsetError: where an allowance would close or split a contour, or cut through the steel
            between two, with the place and the most that is possible.
        DesignError: for an allowance with nothing to apply to, or a rim that cannot be ground.
    """
    found = list(contours)
    if options.grinding_allowance_mm:
        found = [_ground(contour, options.grinding_allowance_mm) for contour in found]
    clearance, tool = -MM * options.magnet_clearance_mm, MM * options.tool_offset_mm
    fixed = [clearance if contour.layer == POCKETS else 0.0 for contour in found]
    if clearance and not any(fixed):
        text = "no magnet lies in this lamination; leave it out"
        raise DesignError(f"magnet_clearance_mm = {-clearance / MM:g}: {text}")
    none = [0.0 for _ in found]
    result = _moved(found, none, fixed, "magnet_clearance_mm", options) if clearance else found
    if tool:
        result = _moved(found, fixed, [tool for _ in found], "tool_offset_mm", options)
    return tuple(result)


def _moved(
    contours: Sequence[Contour],
    fixed: Sequence[float],
    added: Sequence[float],
    key: str,
    options: PunchOptions,
) -> list[Contour]:
    """Each contour at its fixed distance and the added one, which `key` states, in m."""
    stated: float = getattr(options, key)
    result: list[Contour] = []
    for k, (contour, base, step) in enumerate(zip(contours, fixed, added, strict=True)):
        known = _known(contours[:k], contour)
        if known is not None:
            result.append(Contour(contour.layer, turned(result[known[0]].path, known[1])))
            continue

        loops = offset_loops(contour.path, base + step, options.corners)
        if len(loops) != 1:
            raise _closing(contour, (base, step), options.corners, key, stated)
        result.append(Contour(contour.layer, loops[0]))
    _refuse_cuts(contours, result, fixed, added, key, stated)
    return result


def _known(contours: Sequence[Contour], contour: Contour) -> tuple[int, float] | None:
    """The contour before that this one is when turned about the axis, and the angle in rad."""
    edges = contour.path.edges
    for k, other in enumerate(contours):
        others = other.path.edges
        if other.layer != contour.layer or len(others) != len(edges) or not others[0].start:
            continue
        turn = edges[0].start / others[0].start
        if all(
            abs(one.start - turn * twin.start) < SAME and abs(one.bulge - twin.bulge) < SAME
            for one, twin in zip(edges, others, strict=True)
        ):
            return k, cmath.phase(turn)
    return None


def _closing(
    contour: Contour, moves: tuple[float, float], corners: Corners, key: str, stated: float
) -> OffsetError:
    """Where a contour would close or fall apart, and the most that keeps it whole.

    Its distance in m is the first of `moves` and a share of the second, which is what is stated.
    Sharp corners may meet where rolled ones have room: only these tell closing from splitting.
    """
    base, step = moves
    low, high = 0.0, 1.0
    for _ in range(STEPS):
        middle = 0.5 * (low + high)
        is_whole = len(offset_loops(contour.path, base + middle * step, corners)) == 1
        low, high = (middle, high) if is_whole else (low, middle)
    last = offset_loops(contour.path, base + low * step, corners)
    gone = offset_loops(contour.path, base + high * step, "round")
    most = low * stated
    at = _throat(last[0] if len(last) == 1 else contour.path)
    if len(gone) > 1:
        p, q = _nearest(gone[0].edges, gone[1].edges)
        at = 0.5 * (p + q)
    verb = {0: "close", 1: "let sharp corners meet in"}.get(len(gone), "split")
    fault = f"would {verb} a contour of layer {contour.layer} near {place_text(at)}"
    return _refusal(key, stated, most, fault, at)


def _refusal(key: str, stated: float, most: float, fault: str, place: Point) -> OffsetError:
    # Towards zero to the printed digit, so that what is printed is possible.
    most = math.trunc(1e4 * most) / 1e4
    return OffsetError(f"{key} = {stated:g}: {fault}; at most {most:g} is possible", place)


def _throat(path: Path) -> Point:
    """Where what is left of a contour is narrowest; its middle if it has no two sides."""
    within = TOUCH
    while within < perimeter(path):
        throats = air_throats(Contour("", path), within)
        if throats:
            return throats[0].place
        within *= 10.0
    return sum(edge.point(0.5) for edge in path.edges) / len(path.edges)


def _nearest(first: Sequence[Edge], second: Sequence[Edge]) -> tuple[Point, Point]:
    pairs = [nearest(a, b) for a in first for b in second]
    return min(pairs, key=lambda pair: abs(pair[0] - pair[1]))


def _refuse_cuts(
    before: Sequence[Contour],
    after: Sequence[Contour],
    fixed: Sequence[float],
    added: Sequence[float],
    key: str,
    stated: float,
) -> None:
    """Refuse contours that would meet, so that the steel between them is cut through."""
    for i, j in _neighbours(before, FARTHEST):
        closer = -(fixed[i] + fixed[j] + added[i] + added[j])
        if closer <= 0.0:
            continue
        one, other = before[i].path.edges, before[j].path.edges
        web = distance(one, other, closer + WELD)
        if web - closer > 0.0 and distance(after[i].path.edges, after[j].path.edges, WELD) > 0.0:
            continue
        share = (web + fixed[i] + fixed[j]) / -(added[i] + added[j])
        p, q = _nearest(one, other)
        place = 0.5 * (p + q)
        fault = f"would cut through the {web / MM:.3f} mm of steel at {place_text(place)}"
        # The web itself must not go to nothing either: short of it by the last printed digit.
        raise _refusal(key, stated, max(0.0, share - 1e-4 * MM / closer) * stated, fault, place)


def _neighbours(contours: Sequence[Contour], margin: float) -> list[tuple[int, int]]:
    """Numbers of contours with edges nearer than about `margin` m."""
    return sorted({(a, b) for (a, _), (b, _) in edge_pairs(contours, margin) if a != b})


def _ground(contour: Contour, allowance_mm: float) -> Contour:
    """The rim with the allowance on its diameter; other contours as they are."""
    if contour.layer != RIM:
        return contour
    edges = contour.path.edges
    radius = max(abs(edge.start) for edge in edges)
    is_rim = [_is_rim(edge, radius) for edge in edges]
    grown = radius + 0.5 * MM * allowance_mm
    first = next((k for k, rim in enumerate(is_rim) if rim), None)
    if first is None:
        raise _not_round(allowance_mm, edges[0].start)
    order = [(first + k) % len(edges) for k in range(len(edges))]
    result: list[Edge] = []
    for k in order:
        edge, before, behind = edges[k], is_rim[k - 1], is_rim[(k + 1) % len(edges)]
        if is_rim[k]:
            # Its ends are set by what it meets.
            scale = grown / radius
            result.append(Edge(edge.start * scale, edge.end * scale, edge.bulge))
            continue
        start = _run_on(edge, edge.start, -1.0, grown, allowance_mm) if before else edge.start
        end = _run_on(edge, edge.end, 1.0, grown, allowance_mm) if behind else edge.end
        result.append(
            Edge(start, end) if edge.is_line else arc(start, end, edge.centre, ccw=edge.bulge > 0.0)
        )
    return Contour(contour.layer, closed(_fitted(result, [is_rim[k] for k in order])))


def _fitted(edges: Sequence[Edge], is_rim: Sequence[bool]) -> tuple[Edge, ...]:
    """The arcs of the rim between the ends that notches leave them."""
    result = []
    for k, edge in enumerate(edges):
        before, behind = edges[k - 1], edges[(k + 1) % len(edges)]
        start = edge.start if is_rim[k - 1] else before.end
        end = edge.end if is_rim[(k + 1) % len(edges)] else behind.start
        if is_rim[k] and (start, end) != (edge.start, edge.end):
            edge = arc(start, end, 0j, ccw=True)
        result.append(edge)
    return chained(result)


def _is_rim(edge: Edge, radius: float) -> bool:
    return (
        not edge.is_line
        and edge.bulge > 0.0
        and abs(edge.centre) < WELD
        and abs(edge.radius - radius) < WELD
    )


def _run_on(edge: Edge, end: Point, way: float, radius: float, allowance_mm: float) -> Point:
    """Where a notch's side, run on past its end, meets the grown rim."""
    rim = Edge(complex(radius), complex(-radius), 1.0)
    along = way * edge.direction(0.0 if way < 0.0 else 1.0)
    reach = MITRE * 0.5 * MM * allowance_mm
    ahead = [
        point
        for point in crossings(edge, rim)
        if abs(point - end) <= reach and ((point - end) / along).real > 0.0
    ]
    if not ahead:
        raise _not_round(allowance_mm, end)
    return min(ahead, key=lambda point: abs(point - end))


def _not_round(allowance_mm: float, place: Point) -> DesignError:
    text = f"the rim is no circle with notches at {place_text(place)}; leave it out"
    return DesignError(f"grinding_allowance_mm = {allowance_mm:g}: {text}")
