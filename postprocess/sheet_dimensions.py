"""Dimensions as ink: texts with limits, leaders, straight and angular dimensions (ISO 129-1, m)."""

import cmath
import math
from collections.abc import Iterator, Sequence

from lamwright.geometry.curves import Point

from .sheet_fits import Limits
from .sheet_ink import (
    ARROW,
    TEXT,
    Ink,
    Stroke,
    Word,
    arrow,
    bow,
    polyline,
    rectangle,
    segment,
)

SMALL = 1.8  # mm, height of limit deviations
PAST = 1.5  # mm that an extension line goes past its dimension line
OFF = 0.8  # mm from an outline to an extension line
LIFT = 1.0  # mm from a line to the text above it
TAIL = 3.0  # mm of a dimension line outside its arrows
CELL = 5.0  # mm, height of a tolerance frame's cells
CELL_PAD = 1.2  # mm beside their text
BOX = 0.9  # mm round a boxed dimension
WAYS = 24  # directions that a leader is tried in
REACHES = (6.0, 9.0, 13.0, 18.0, 24.0, 32.0, 42.0)  # mm, lengths it is tried in


def number(value: float, digits: int = 3) -> str:
    """A value as it is printed: no more digits than it needs."""
    text = f"{value:.{digits}f}"
    text = text.rstrip("0").rstrip(".") if "." in text else text
    return "0" if text in ("-0", "") else text


def signed(value: float) -> str:
    """A limit deviation in mm."""
    return "0" if abs(value) < 5e-5 else f"{value:+.4f}".rstrip("0").replace("-", "\u2212")


def with_limit(value: float, limit: float | None, digits: int = 3) -> str:
    """A size with equal limits to both sides, as many digits as the limit has."""
    if not limit:
        return number(value, digits)
    places = len(number(limit).partition(".")[2])
    least = len(number(value, digits).partition(".")[2])
    return f"{value:.{max(places, least)}f} \u00b1{number(limit)}"


def size_text(text: str, limits: Limits | None, at: Point, angle: float = 0.0) -> list[Word]:
    """A dimension's text from `at` on, its limit deviations one above the other behind it."""
    words = [Word(text, at, angle=angle)]
    if limits is not None:
        turn = cmath.exp(1j * angle)
        behind = words[0].width + 1.0
        upper, lower = signed(limits.upper), signed(limits.lower)
        words.append(Word(upper, at + (behind + 1j * 1.75) * turn, SMALL, angle=angle))
        words.append(Word(lower, at + (behind - 1j * 0.85) * turn, SMALL, angle=angle))
    return words


def row_width(words: Sequence[Word]) -> float:
    """Width of words that stand upright, from the first one's start to the last end."""
    return max(w.start.real + w.width for w in words) - min(w.start.real for w in words)


def boxed(word: Word) -> list[Ink]:
    """A theoretically exact dimension: the word in its frame."""
    turn = cmath.exp(1j * word.angle)
    low, high = -BOX - 1j * BOX, complex(word.width + BOX, word.height + BOX)
    corners = (low, complex(high.real, low.imag), high, complex(low.real, high.imag))
    return [word, polyline([word.start + c * turn for c in corners], is_closed=True)]


def leaders(
    tip: Point, texts: Sequence[str], limits: Limits | None = None, ways: Sequence[float] = ()
) -> Iterator[list[Ink]]:
    """Candidates of a note on a leader: an arrow at `tip`, a shelf, text above the shelf.

    Args:
        tip: where the arrow points, mm.
        texts: lines, from above.
        limits: of the first line.
        ways: directions from the tip in rad, the best first; by default all around.
    """
    turns = ways or [2.0 * math.pi * (k + 0.5) / WAYS for k in range(WAYS)]
    for reach in REACHES:
        for way in turns:
            knee = tip + cmath.rect(reach, way)
            yield leader(tip, knee, texts, limits)


def leader(
    tip: Point, knee: Point, texts: Sequence[str], limits: Limits | None = None
) -> list[Ink]:
    """One note on a leader from `tip` over `knee`."""
    is_right = knee.real >= tip.real
    pitch = 1.7 * TEXT
    rows = [size_text(text, limits if k == 0 else None, 0j) for k, text in enumerate(texts)]
    width = max(row_width(row) for row in rows) + 1.0
    start = knee if is_right else knee - width
    lift = LIFT + (0.6 if limits is not None else 0.3)
    words: list[Ink] = []
    for k, text in enumerate(texts):
        at = start + 0.5 + 1j * (lift + (len(texts) - 1 - k) * pitch)
        words += size_text(text, limits if k == 0 else None, at)
    far = knee + width if is_right else knee - width
    return [polyline((tip, knee, far)), arrow(tip, tip - knee), *words]


def line_profile(tip: Point, over: str, cells: Sequence[str]) -> Iterator[list[Ink]]:
    """Candidates of a line profile tolerance on a leader (ISO 1101, m), its symbol a half circle.

    Args:
        tip: on the outline, mm.
        over: which features it is of.
        cells: texts behind the symbol: width of the zone, datum.
    """
    widths = [CELL, *(Word(text, 0j).width + 2.0 * CELL_PAD for text in cells)]
    for reach in REACHES:
        for k in range(WAYS):
            knee = tip + cmath.rect(reach, 2.0 * math.pi * (k + 0.5) / WAYS)
            side = 1.0 if knee.real >= tip.real else -1.0
            low = knee + side * 3.0 - 0.5j * CELL
            low -= sum(widths) if side < 0.0 else 0.0
            inks: list[Ink] = [polyline((tip, knee, knee + side * 3.0)), arrow(tip, tip - knee)]
            inks.append(bow(low + complex(0.5, 0.3) * CELL, 0.34 * CELL, 0.0, math.pi))
            for text, width in zip(("", *cells), widths, strict=True):
                inks.append(rectangle(low, low + complex(width, CELL)))
                if text:
                    inks.append(Word(text, low + CELL_PAD + 0.5j * (CELL - TEXT)))
                low += width
            inks.append(Word(over, low - sum(widths) + 1j * (CELL + LIFT)))
            yield inks


def across(
    start: Point,
    end: Point,
    text: str,
    *,
    limits: Limits | None = None,
    is_boxed: bool = False,
    side: float = 1.0,
    tail: float = TAIL,
) -> list[Ink]:
    """A straight dimension line between two points, arrows inside where there is room.

    A text that does not fit between stands on a shelf past the end (`side` 1) or the start (-1).
    """
    span, way = abs(end - start), (end - start) / abs(end - start)
    angle = _legible(cmath.phase(way))
    width = row_width(size_text(text, limits, 0j))
    if span >= width + 2.0 * ARROW + 2.0:
        middle = 0.5 * (start + end) + 1j * cmath.exp(1j * angle) * LIFT
        at = middle - 0.5 * width * cmath.exp(1j * angle)
        return [
            segment(start, end),
            arrow(end, way),
            arrow(start, -way),
            *size_text(text, limits, at, angle),
        ]
    inks: list[Ink] = list(_arrows(start, end))
    out = (end if side > 0 else start) + side * way * (0.0 if span >= 2.5 * ARROW else ARROW)
    knee = out + side * way * tail
    is_right = knee.real > out.real - 1e-9 if abs(way.real) > 0.05 else True
    far = knee + (width + 1.0) * (1.0 if is_right else -1.0)
    at = (knee if is_right else far) + 0.5 + 1j * (LIFT + (0.6 if limits else 0.0))
    words = size_text(text, limits, at)
    if is_boxed:
        words = [Word(text, at + 1j * BOX)]
        inks += boxed(words[0])[1:]
    return [*inks, polyline((out, knee, far)), *words]


def _arrows(start: Point, end: Point) -> list[Ink]:
    """Dimension line with arrows inside, or from outside where they do not fit."""
    span, way = abs(end - start), (end - start) / abs(end - start)
    if span >= 2.5 * ARROW:
        return [segment(start, end), arrow(end, way), arrow(start, -way)]
    return [
        segment(start - way * (ARROW + 1.0), end + way * (ARROW + 1.0)),
        arrow(end, -way),
        arrow(start, way),
    ]


def narrow_span(start: Point, end: Point) -> list[Ink]:
    """The dimension line of a short length without its text."""
    return _arrows(start, end)


def angular(
    centre: Point, radius: float, first: float, last: float, text: str, *, is_past: bool = False
) -> Iterator[list[Ink]]:
    """Candidates of an angular dimension on an arc of `radius` mm; directions in rad, boxed text.

    The text stands along the arc between its ends, past the second one, or before the first;
    with `is_past` past the second one alone.
    """
    way = math.copysign(1.0, last - first)
    head = way * ARROW / radius
    width = Word(text, 0j).width + 2.0 * BOX
    length = abs(last - first) * radius
    tips = [centre + cmath.rect(radius, angle) for angle in (first, last)]
    inside: list[Ink] = [
        bow(centre, radius, first, last),
        arrow(tips[0], -1j * way * cmath.rect(1.0, first + 0.5 * head)),
        arrow(tips[1], 1j * way * cmath.rect(1.0, last - 0.5 * head)),
    ]
    outside: list[Ink] = [
        bow(centre, radius, first - 2.0 * head, last + 2.0 * head),
        arrow(tips[0], 1j * way * cmath.rect(1.0, first - 0.5 * head)),
        arrow(tips[1], -1j * way * cmath.rect(1.0, last + 0.5 * head)),
    ]
    lines = inside if length > 3.0 * ARROW else outside
    if length > width + 2.0 * ARROW + 1.0 and not is_past:
        for share in (0.5, 0.4, 0.6, 0.3, 0.7):
            yield [*lines, *_on_arc(centre, radius, first + share * (last - first), text)]
    # Past the end, on the arc's own prolongation.
    for gap in (1.5, 4.0, 8.0):
        start = last + way * ((2.0 * ARROW if lines is outside else 0.0) + gap) / radius
        middle = start + way * 0.5 * width / radius
        tail = bow(centre, radius, last, start)
        yield [*lines, tail, *_beside_arc(centre, radius, middle, text)]
    if is_past:
        return
    # Before the first end, likewise.
    for gap in (1.5, 4.0, 8.0):
        start = first - way * ((2.0 * ARROW if lines is outside else 0.0) + gap) / radius
        middle = start - way * 0.5 * width / radius
        tail = bow(centre, radius, first, start)
        yield [*lines, tail, *_beside_arc(centre, radius, middle, text)]


def _on_arc(centre: Point, radius: float, angle: float, text: str) -> list[Ink]:
    """Boxed text above an arc, along it."""
    along = _legible(angle - math.pi / 2.0)
    up = 1j * cmath.exp(1j * along)
    at = centre + cmath.rect(radius, angle)
    outward = (up / cmath.rect(1.0, angle)).real > 0.0
    word = Word(text, 0j, angle=along)
    lift = LIFT + BOX if outward else -(LIFT + BOX + TEXT)
    start = at + up * lift - 0.5 * word.width * cmath.exp(1j * along)
    return boxed(Word(text, start, angle=along))


def _beside_arc(centre: Point, radius: float, angle: float, text: str) -> list[Ink]:
    """Boxed text centred on an arc, along it."""
    along = _legible(angle - math.pi / 2.0)
    unit = cmath.exp(1j * along)
    at = centre + cmath.rect(radius, angle)
    word = Word(text, 0j, angle=along)
    return boxed(Word(text, at - 0.5 * word.width * unit - 0.5j * TEXT * unit, angle=along))


def _legible(angle: float) -> float:
    """The direction of text along a line, read from below or from the right."""
    angle = (angle + math.pi) % (2.0 * math.pi) - math.pi
    if angle > math.pi / 2.0 + 1e-9:
        return angle - math.pi
    return angle + math.pi if angle <= -math.pi / 2.0 + 1e-9 else angle


def spread(wanted: Sequence[float], gap: float) -> list[float]:
    """Heights at least `gap` apart in falling order, near the wanted ones (pooled means)."""
    pools: list[tuple[list[float], int]] = []
    for k, height in enumerate(wanted):
        pools.append(([height + k * gap], 1))
        while len(pools) > 1 and _mean(pools[-2]) < _mean(pools[-1]):
            last = pools.pop()
            pools[-1] = (pools[-1][0] + last[0], pools[-1][1] + last[1])
    flat = [_mean(pool) for pool in pools for _ in range(pool[1])]
    return [height - k * gap for k, height in enumerate(flat)]


def _mean(pool: tuple[list[float], int]) -> float:
    return sum(pool[0]) / pool[1]


def extension(start: Point, end: Point) -> Stroke:
    """An extension line: a little off the outline, a little past the dimension line."""
    way = (end - start) / abs(end - start)
    return segment(start + OFF * way, end + PAST * way)
