"""How round blanks lie in a strip of sheet, and what share of the strip is scrap.

A blank is the stator's outer circle; the rotor is punched out of its bore by the same tool, as is
usual (common practice, no source), so that one blank gives one sheet of each. Rows run along the
strip. Straight rows stand one behind another; staggered ones are shifted by half a pitch.

With p the blank's diameter plus the bridge to the next, the rows' distance h and the pitch x along
the strip (derived: no two centres nearer than p):
    straight   h = p, x = p
    staggered  h >= p sqrt(3)/2: x = p (hexagonal), else x = 2 sqrt(p^2 - h^2), the rows closer
               and the blanks of a row wider apart; of three rows or more 2 h >= p as well
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

from .errors import LamwrightError

MM = 1e3  # mm per m
HEXAGONAL = 0.5 * math.sqrt(3.0)  # rows' distance over the pitch
FIT_TOL = 1e-9  # m, of a strip that is just wide enough


@dataclass(frozen=True, slots=True)
class Strip:
    """The strip and the bridges that must be left in it, in m."""

    width: float
    bridge: float  # between blanks
    edge: float  # between a blank and the strip's edge


@dataclass(frozen=True, slots=True)
class Nest:
    """Blanks in a strip: rows along it, `pitch` (m) from one blank of a row to the next."""

    kind: Literal["straight", "staggered"]
    rows: int
    pitch: float
    row_distance: float  # m; 0 for a single row

    def strip_area(self, strip: Strip) -> float:
        """Strip used for one blank in m^2."""
        return self.pitch * strip.width / self.rows

    def scrap_share(self, strip: Strip, used: float) -> float:
        """Share of the strip that is not in the parts, of which a blank gives `used` m^2."""
        return 1.0 - used / self.strip_area(strip)


def nests(diameter: float, strip: Strip) -> tuple[Nest, ...]:
    """The layouts that fit, the one with the least strip for a blank first.

    Of each kind the best number of rows stands there; one row counts as straight.

    Args:
        diameter: of the blank in m.
        strip: with its bridges.

    Raises:
        LamwrightError: the strip is too narrow for one blank.
    """
    least = diameter + 2.0 * strip.edge
    if strip.width < least - FIT_TOL:
        raise LamwrightError(
            f"strip_width_mm = {MM * strip.width:g}: narrower than a blank of "
            f"{MM * diameter:g} mm and its edges; accepted {MM * least:.6g} or more"
        )
    found = [*_straight(diameter, strip), *_staggered(diameter, strip)]
    best = [
        min((n for n in found if n.kind == kind), key=lambda n: n.strip_area(strip))
        for kind in dict.fromkeys(n.kind for n in found)
    ]
    return tuple(sorted(best, key=lambda n: n.strip_area(strip)))


def least_widths(diameter: float, strip: Strip, rows: int) -> tuple[float, float]:
    """Widths in m for a number of rows, straight and hexagonal, with the same bridges."""
    pitch, margin = diameter + strip.bridge, diameter + 2.0 * strip.edge
    return margin + (rows - 1) * pitch, margin + (rows - 1) * HEXAGONAL * pitch


def _straight(diameter: float, strip: Strip) -> Iterator[Nest]:
    pitch = diameter + strip.bridge
    rows = 1 + math.floor((strip.width - 2.0 * strip.edge - diameter + FIT_TOL) / pitch)
    yield Nest("straight", rows, pitch, pitch if rows > 1 else 0.0)


def _staggered(diameter: float, strip: Strip) -> Iterator[Nest]:
    pitch = diameter + strip.bridge
    room = strip.width - 2.0 * strip.edge - diameter
    # Of three rows or more the first and the third stand above each other.
    most = 1 + max(1, math.floor((room + FIT_TOL) / (0.5 * pitch)))
    for rows in range(2, most + 1):
        distance = min(room / (rows - 1), HEXAGONAL * pitch)
        if distance > FIT_TOL:
            along = max(pitch, 2.0 * math.sqrt(pitch**2 - distance**2))
            yield Nest("staggered", rows, along, distance)
