"""Letters of a drawing sheet: how wide they are, and the few that an SVG carries with it.

The font is the one that matplotlib brings, so widths are known before anything is written and the
same on every machine. Kerning is switched off in all writers: a width is a sum of advances.
"""

import base64
import functools
import io
from collections.abc import Iterable
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from matplotlib.ft2font import FT2Font

FAMILY = "DejaVu Sans"
CAP_SHARE = 0.729  # of the font's size, height of its capitals; measured on the font's H
UNITS = 2048.0  # of the font to its size
FILES = {False: "DejaVuSans.ttf", True: "DejaVuSans-Bold.ttf"}


def size_of(height: float) -> float:
    """Font size in mm whose capitals are `height` mm high."""
    return height / CAP_SHARE


@functools.cache
def width_of(text: str, height: float, is_bold: bool = False) -> float:
    """Advance width of a line of text in mm."""
    return size_of(height) * sum(_glyph(char, is_bold)[0] for char in text)


@functools.cache
def ink_box(text: str, height: float, is_bold: bool = False) -> tuple[complex, complex]:
    """Corners in mm of the box round a text's ink, from the start of its base line."""
    size = size_of(height)
    low = min((_glyph(char, is_bold)[1] for char in text), default=0.0)
    high = max((_glyph(char, is_bold)[2] for char in text), default=0.0)
    return complex(0.0, size * low), complex(width_of(text, height, is_bold), size * high)


def font_path(is_bold: bool = False) -> str:
    """The font's file."""
    from matplotlib import get_data_path

    return f"{get_data_path()}/fonts/ttf/{FILES[is_bold]}"


def embedded_font(text: str, is_bold: bool = False) -> str:
    """The font with the letters of `text` alone, as base64 of WOFF: the same for the same text."""
    from fontTools import subset
    from fontTools.ttLib import TTFont

    # The stamp of the last change stays the font's own, or no two files would be alike.
    font = TTFont(font_path(is_bold), recalcTimestamp=False)
    options = subset.Options(hinting=False, desubroutinize=True, notdef_outline=True)
    options.layout_features = []
    options.drop_tables += ["FFTM"]  # a font editor's time stamp
    options.name_IDs = [1, 2]
    trimmed = subset.Subsetter(options)
    trimmed.populate(unicodes=sorted(set(map(ord, text)) | {32}))
    trimmed.subset(font)
    font.flavor = "woff"
    stream = io.BytesIO()
    font.save(stream, reorderTables=True)
    return base64.b64encode(stream.getvalue()).decode("ascii")


def letters(texts: Iterable[str]) -> str:
    """All letters used, each once, in order."""
    return "".join(sorted(set("".join(texts))))


@functools.cache
def _glyph(char: str, is_bold: bool) -> tuple[float, float, float]:
    """Advance, lowest and highest ink of a letter, over the font's size."""
    from matplotlib import ft2font

    font, known = _font(is_bold)
    if ord(char) not in known:
        raise ValueError(f"the drawing's font has no {char!r}")
    glyph = font.load_char(ord(char), flags=ft2font.LoadFlags.NO_SCALE)
    low, high = glyph.bbox[1], glyph.bbox[3]
    return glyph.horiAdvance / UNITS, low / UNITS, high / UNITS


@functools.cache
def _font(is_bold: bool) -> "tuple[FT2Font, frozenset[int]]":
    from matplotlib import ft2font

    font = ft2font.FT2Font(font_path(is_bold))
    return font, frozenset(font.get_charmap())
