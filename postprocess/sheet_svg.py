"""A sheet as SVG in mm: letters as text with the font in the file, arcs as arcs.

One user unit is one mm; y points down, so y and the sense of arcs are mirrored.
"""

from collections.abc import Iterator
from html import escape
from math import degrees
from pathlib import Path

from lamwright.geometry.curves import Edge, Point
from lamwright.geometry.whole_file import write_text

from .sheet_font import FAMILY, embedded_font, letters, size_of
from .sheet_ink import Fill, Picture, Stroke, Word

HALF_TURN = 1.0  # bulge beyond which an arc is the larger one


def write_svg(picture: Picture, size: Point, path: Path) -> None:
    """Write a sheet of `size` (x + iy, mm) as SVG; the same picture gives the same bytes."""
    width, height = _number(size.real), _number(size.imag)
    lines = [
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}mm" height="{height}mm"'
        f' viewBox="0 0 {width} {height}">',
        "<style>",
        *_faces(picture),
        f'text{{font-family:"{FAMILY}";font-kerning:none;white-space:pre}}',
        ".b{font-weight:bold}",
        "path{fill:none;stroke:#000;stroke-linejoin:round}",
        "path.f{fill:#000;stroke:none}",
        "</style>",
        f'<rect width="{width}" height="{height}" fill="#fff"/>',
        *_shapes(picture, size.imag),
        "</svg>",
    ]
    write_text(path, "\n".join(lines) + "\n")


def _faces(picture: Picture) -> Iterator[str]:
    for is_bold, weight in ((False, "normal"), (True, "bold")):
        used = letters(word.text for word in picture.words if word.is_bold is is_bold)
        if used:
            yield (
                f'@font-face{{font-family:"{FAMILY}";font-weight:{weight};'
                f"src:url(data:font/woff;base64,{embedded_font(used, is_bold)})"
                f' format("woff")}}'
            )


def _shapes(picture: Picture, height: float) -> Iterator[str]:
    for ink in picture.inks:
        if isinstance(ink, Stroke):
            dashes = " ".join(_number(dash) for dash in ink.pen.dashes)
            dashed = f' stroke-dasharray="{dashes}"' if dashes else ""
            width = _number(ink.pen.width)
            yield f'<path d="{_outline(ink.edges, height)}" stroke-width="{width}"{dashed}/>'
        elif isinstance(ink, Fill):
            corners = "L".join(_pair(point, height) for point in ink.points)
            yield f'<path class="f" d="M{corners}Z"/>'
        else:
            yield _text(ink, height)


def _text(word: Word, height: float) -> str:
    start = word.start
    x, y = _number(start.real), _number(height - start.imag)
    turn = f' transform="rotate({_number(-degrees(word.angle))} {x} {y})"' if word.angle else ""
    bold = ' class="b"' if word.is_bold else ""
    size = _number(size_of(word.height))
    return f'<text x="{x}" y="{y}" font-size="{size}"{bold}{turn}>{escape(word.text)}</text>'


def _outline(edges: tuple[Edge, ...], height: float) -> str:
    said = [f"M{_pair(edges[0].start, height)}"]
    at = edges[0].start
    for edge in edges:
        if edge.start != at:
            said.append(f"M{_pair(edge.start, height)}")
        said.append(_command(edge, height))
        at = edge.end
    if at == edges[0].start:
        said.append("Z")
    return "".join(said)


def _command(edge: Edge, height: float) -> str:
    if edge.is_line:
        return f"L{_pair(edge.end, height)}"
    radius = _number(edge.radius)
    large, sweep = int(abs(edge.bulge) > HALF_TURN), int(edge.bulge < 0.0)
    return f"A{radius} {radius} 0 {large} {sweep} {_pair(edge.end, height)}"


def _pair(point: Point, height: float) -> str:
    return f"{_number(point.real)} {_number(height - point.imag)}"


def _number(value: float) -> str:
    """A tenth of a micrometre of paper; no exponent, no minus zero."""
    text = f"{value:.4f}".rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text
