"""Blanks in a strip: no two too near, and scrap shares in closed form."""

import math

import pytest

from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.nesting import Strip, least_widths, nests

STRIPS = [
    Strip(width, bridge, edge)
    for width in (0.1, 0.1501, 0.21, 0.3, 0.405, 0.66)
    for bridge, edge in ((0.0, 0.0), (0.002, 0.003))
]


def _centres(nest, strip, diameter):
    """Centres of three blanks of each row, counted from the strip's middle line."""
    middle = 0.5 * nest.row_distance * (nest.rows - 1)
    shift = 0.5 * nest.pitch if nest.kind == "staggered" else 0.0
    return [
        complex(k * nest.pitch + (row % 2) * shift, row * nest.row_distance - middle)
        for row in range(nest.rows)
        for k in range(3)
    ]


@pytest.mark.parametrize("strip", STRIPS)
def test_blanks_keep_their_bridges(strip):
    """No two blanks nearer than the bridge, none nearer to the edge than asked (by counting)."""
    diameter = 0.09
    for nest in nests(diameter, strip):
        centres = _centres(nest, strip, diameter)
        gaps = [abs(a - b) for k, a in enumerate(centres) for b in centres[:k]]
        assert min(gaps) >= diameter + strip.bridge - 1e-9
        reach = max(abs(z.imag) for z in centres) + 0.5 * diameter + strip.edge
        assert reach <= 0.5 * strip.width + 1e-9


def test_square_and_hexagonal_scrap_in_closed_form():
    """Discs without bridges fill pi/4 of a strip of straight rows.

    Of n hexagonal rows n pi / (4 (1 + (n - 1) sqrt(3)/2)), as the width of the strip is.
    """
    disc = 0.25 * math.pi
    straight = nests(1.0, Strip(3.0, 0.0, 0.0))
    by_kind = {nest.kind: nest for nest in straight}
    assert by_kind["straight"].rows == 3
    assert by_kind["straight"].scrap_share(Strip(3.0, 0.0, 0.0), disc) == pytest.approx(1 - disc)
    for rows in (2, 3, 7):
        width = least_widths(1.0, Strip(1.0, 0.0, 0.0), rows)[1]
        strip = Strip(width, 0.0, 0.0)
        best = nests(1.0, strip)[0]
        assert (best.kind, best.rows) == ("staggered", rows)
        filled = rows * disc / (1.0 + (rows - 1) * math.sqrt(0.75))
        assert best.scrap_share(strip, disc) == pytest.approx(1.0 - filled, rel=1e-9)


def test_two_rows_in_a_strip_too_narrow_for_hexagons():
    """Rows 0.5 p apart need a pitch of sqrt(3) p: as many blanks as 2/sqrt(3) straight rows."""
    strip = Strip(1.5, 0.0, 0.0)
    best = nests(1.0, strip)[0]
    assert (best.kind, best.rows) == ("staggered", 2)
    assert best.pitch == pytest.approx(math.sqrt(3.0))


def test_a_narrow_strip_is_refused_with_the_least_width():
    """One line that states what would fit."""
    with pytest.raises(LamwrightError, match=r"strip_width_mm = 95: .*accepted 96 or more$"):
        nests(0.09, Strip(0.095, 0.002, 0.003))
