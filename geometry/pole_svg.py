"""The section as a small picture: SVG with the outline's own lines and arcs, millimetres.

For places that show a design at once, such as a notebook, without a plotting library. Arcs stay
arcs: `A` commands with the radius of the edge. x to the right, y down as SVG has it, the middle of
the drawn sector upright.
"""

import cmath
import math
from html import escape

from .curves import Edge, Path, turned_edge
from .palette import ACCENT, DRAWN_AS, FILLS, INK, PAPER
from .section import CrossSection, Region, Rib

MM = 1e3  # mm per m
DIGITS = 4  # after the point, of mm: 0.1 um
BORDER = 0.015  # of the picture's greater side
OUTLINE, RIB_LINE = 0.0016, 0.008  # widths of lines, of the picture's greater side
WIDEST = 2.0  # rad, of one arc command
EDGE_STEP = math.pi / 90.0  # rad between the points by which an arc's extent is found


def pole_svg(section: CrossSection, label: str, width: int = 420) -> str:
    """The sector of a section as one SVG element, ribs marked where they are thinnest.

    Args:
        section: what is drawn; its sector, one pole where the winding allows it.
        label: what a screen reader says of it.
        width: on the screen, in pixels.

    Returns:
        Markup without ids, classes or links, so that several stand in one page; text is escaped.
    """
    turn = math.pi / 2.0 - 0.5 * section.sector_angle
    regions = (*section.stator, *section.rotor)
    left, top, across, down = _extent(regions, turn)
    size = max(across, down)
    border = BORDER * size
    box = (left - border, top - border, across + 2.0 * border, down + 2.0 * border)
    shapes = [_shape(region, turn) for region in regions]
    shapes += [_mark(rib, turn, RIB_LINE * size) for rib in section.ribs]
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" role="img" aria-label="{escape(label)}" '
        f'width="{width}" viewBox="{" ".join(map(_text, box))}" '
        f'style="background:{PAPER};max-width:100%;height:auto">'
    )
    line = f'<g stroke="{INK}" stroke-width="{_text(OUTLINE * size)}" stroke-linejoin="round">'
    return f"{head}<title>{escape(label)}</title>{line}{''.join(shapes)}</g></svg>"


def path_data(path: Path, turn: float = 0.0) -> str:
    """The `d` of a closed path turned by `turn` rad, mm, y down."""
    return f"M{_point(turned_edge(path.edges[0], turn).start)}" + "".join(
        _command(turned_edge(edge, turn)) for edge in path.edges
    )


def _command(edge: Edge) -> str:
    if edge.is_line:
        return f"L{_point(edge.end)}"
    # SVG finds the centre by radius and chord: near half a turn a rounded radius would move it.
    pieces = math.ceil(abs(edge.sweep) / WIDEST)
    ends = [edge.point((piece + 1) / pieces) for piece in range(pieces - 1)]
    # The picture's y points down, so a counter-clockwise arc is one of falling angle there.
    radius, sense = _text(MM * edge.radius), int(edge.bulge < 0.0)
    return "".join(f"A{radius} {radius} 0 0 {sense} {_point(end)}" for end in (*ends, edge.end))


def _point(point: complex) -> str:
    return f"{_text(MM * point.real)} {_text(-MM * point.imag)}"


def _text(value: float) -> str:
    text = f"{value:.{DIGITS}f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _shape(region: Region, turn: float) -> str:
    paths = (region.outer, *region.holes)
    data = "".join(f"{path_data(path, turn)}Z" for path in paths)
    fill = FILLS[DRAWN_AS.get(region.material, region.material)]
    # Air meets air along cuts that are none of the machine's: they are not inked.
    inked = ' stroke="none"' if region.material == "air" else ""
    return f'<path fill="{fill}" fill-rule="evenodd"{inked} d="{data}"/>'


def _mark(rib: Rib, turn: float, width: float) -> str:
    start, end = (point * cmath.exp(1j * turn) for point in (rib.start, rib.end))
    data = f"M{_point(start)}L{_point(end)}"
    return f'<path stroke="{ACCENT}" stroke-width="{_text(width)}" d="{data}"/>'


def _extent(regions: tuple[Region, ...], turn: float) -> tuple[float, float, float, float]:
    """Left, top, width and height in mm, arcs by points along them."""
    points = [
        MM * edge.point(share / pieces)
        for region in regions
        for edge in (turned_edge(e, turn) for e in region.outer.edges)
        for pieces in (1 if edge.is_line else math.ceil(abs(edge.sweep) / EDGE_STEP),)
        for share in range(pieces)
    ]
    x, y = [point.real for point in points], [-point.imag for point in points]
    return min(x), min(y), max(x) - min(x), max(y) - min(y)
