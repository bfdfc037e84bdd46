"""A cross-section as SVG path data: exact arcs, mm, the sector's middle pointing up.

SVG counts y downward, so a point x + iy in the drawing's frame is written x, -y, and an arc that
runs counter-clockwise there has the sweep flag 0.
"""

import cmath
import math
from collections.abc import Iterator

from lamwright.geometry.curves import Edge, Path, Point
from lamwright.geometry.section import CrossSection, Region, Rib

MM = 1e3  # mm per m
DIGITS = 4  # decimals of mm: a tenth of a micrometre, far below a pixel
SHAFT_SHOWN = 0.85  # of the shaft's radius may be cut off, where the picture is larger for it
MARGIN = 0.03  # of the picture's greater side, round it

Record = dict[str, object]


def upright(section: CrossSection) -> complex:
    """The turn (unit complex number) that makes the middle of the sector point up."""
    return cmath.exp(1j * (0.5 * math.pi - 0.5 * section.sector_angle))


def drawing_record(section: CrossSection) -> Record:
    """The section as the page draws it, without handles."""
    turn = upright(section)
    parts = [("rotor", region) for region in section.rotor]
    parts += [("stator", region) for region in section.stator]
    return {
        "poles": section.poles,
        "sector_poles": section.sector_poles,
        "pole_angle_deg": math.degrees(section.pole_angle),
        "view": view_box(section),
        "near": view_box(section, SHAFT_SHOWN * section.shaft_radius),
        "regions": [region_record(part, region, turn) for part, region in parts],
        "ribs": [_rib_record(rib, turn) for rib in section.ribs],
    }


def region_record(part: str, region: Region, turn: complex) -> Record:
    """One region; to be filled by the rule evenodd."""
    return {
        "name": region.name,
        "part": part,
        "material": region.material,
        "d": " ".join(path_data(path, turn) for path in (region.outer, *region.holes)),
    }


def path_data(path: Path, turn: complex) -> str:
    """A closed path as the attribute `d` of an SVG path."""
    return " ".join(
        [f"M{_point(path.edges[0].start * turn)}", *(_command(e, turn) for e in path.edges), "Z"]
    )


def placed(point: Point, turn: complex) -> tuple[float, float]:
    """X and y in the picture of a point in m."""
    at = MM * point * turn
    return round(at.real, DIGITS), round(-at.imag, DIGITS)


def directed(direction: complex, turn: complex) -> tuple[float, float]:
    """A direction's x and y in the picture."""
    unit = direction * turn / abs(direction)
    return round(unit.real, 6), round(-unit.imag, 6)


def view_box(section: CrossSection, inner_radius: float = 0.0) -> list[float]:
    """x, y, width and height in mm of the sector, or of what lies outside a radius in m."""
    points = list(_extremes(section, inner_radius))
    xs, ys = [point.real for point in points], [-point.imag for point in points]
    margin = MARGIN * max(max(xs) - min(xs), max(ys) - min(ys))
    width, height = max(xs) - min(xs) + 2.0 * margin, max(ys) - min(ys) + 2.0 * margin
    return [round(v, 2) for v in (min(xs) - margin, min(ys) - margin, width, height)]


def _extremes(section: CrossSection, inner_radius: float) -> Iterator[complex]:
    """Points of the ring's sector in mm between which all others lie."""
    turn, outer = upright(section), MM * section.stator_outer_radius
    angles = [0.0, section.sector_angle]
    # Where the outer circle reaches farthest along an axis, if the sector holds that place.
    start = cmath.phase(turn)
    angles += [k * 0.5 * math.pi - start for k in range(-4, 9)]
    for angle in angles:
        if -1e-12 <= angle <= section.sector_angle + 1e-12:
            yield outer * turn * cmath.exp(1j * angle)
            yield MM * inner_radius * turn * cmath.exp(1j * angle)


def _rib_record(rib: Rib, turn: complex) -> Record:
    (x1, y1), (x2, y2) = placed(rib.start, turn), placed(rib.end, turn)
    return {
        "name": rib.name,
        "kind": rib.kind,
        "barrier": rib.barrier,
        "width_mm": round(MM * rib.width, DIGITS),
        **{"x1": x1, "y1": y1, "x2": x2, "y2": y2},
    }


def _command(edge: Edge, turn: complex) -> str:
    end = _point(edge.end * turn)
    if edge.is_line:
        return f"L{end}"
    radius = f"{MM * edge.radius:.{DIGITS}f}"
    return f"A{radius} {radius} 0 {int(abs(edge.sweep) > math.pi)} {int(edge.sweep < 0.0)} {end}"


def _point(point: Point) -> str:
    return f"{MM * point.real:.{DIGITS}f} {-MM * point.imag:.{DIGITS}f}"
