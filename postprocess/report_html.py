"""A report as one HTML file: pictures inside it as vectors, nothing asked from anywhere.

All text goes through the template's escaping: a design's name may hold any characters. The file
forbids itself every request by a content policy, so that not even a picture made elsewhere could
fetch something. The same report and pictures give the same bytes.
"""

import base64
import re
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from .report import Grid, Lines, Listing, Paragraph, Picture, Report

if TYPE_CHECKING:
    from jinja2 import Template

TEMPLATE = Path(__file__).with_name("report.html.j2")
_PROLOGUE = re.compile(r"^.*?(?=<svg)", re.DOTALL)
_SIZE = re.compile(r' (?:width|height)="[\d.]+pt"')
_IDENTIFIER = re.compile(r'(\bid="|href="#|url\(#)')
_BLOCKS = {
    Paragraph: "paragraph",
    Lines: "lines",
    Listing: "listing",
    Grid: "grid",
    Picture: "picture",
}


def report_html(report: Report, folder: str | Path) -> str:
    """The report as HTML.

    Args:
        report: what it says.
        folder: with the pictures it names, as SVG or else PNG.
    """
    pictures = {
        block.name: _picture(Path(folder), block)
        for section in report.sections
        for block in section.blocks
        if isinstance(block, Picture)
    }
    kind = {block: name for block, name in _BLOCKS.items()}
    return _template().render(report=report, pictures=pictures, kind_of=lambda b: kind[type(b)])


@cache
def _template() -> "Template":
    from jinja2 import Environment, StrictUndefined

    environment = Environment(
        autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )
    return environment.from_string(TEMPLATE.read_text(encoding="utf-8"))


def _picture(folder: Path, picture: Picture) -> object:
    from markupsafe import Markup, escape

    drawn = folder / f"{picture.name}.svg"
    if drawn.exists():
        return Markup(_inline(drawn.read_text(encoding="utf-8"), picture.name))
    data = base64.b64encode((folder / f"{picture.name}.png").read_bytes()).decode("ascii")
    return Markup(f'<img alt="{escape(picture.caption)}" src="data:image/png;base64,{data}">')


def _inline(svg: str, name: str) -> str:
    """An SVG file as an element: its identifiers its own among others, its size the page's."""
    svg = _PROLOGUE.sub("", svg, count=1)
    svg = _SIZE.sub("", svg, count=2).replace("*{", "svg *{", 1)  # its style is the page's too
    return _IDENTIFIER.sub(rf"\g<1>{name}-", svg)
