"""How long the drawing takes to follow a hand, told and not judged: machines differ."""

import statistics
from collections.abc import Callable
from typing import Any

import pytest
from page_windows import Watched

Opened = Callable[..., Watched]
pytestmark = pytest.mark.slow
DEPTH = "rotor.barrier[3].depth_mm middle"
MOVES = 60


def test_the_drawing_follows_the_hand(opened: Opened, record_property: Callable[[str, Any], None]):
    """Most moves show in a frame of their own, and the last one always does.

    From the pointer's event to the frame after the changed outline; on two idle cores the median
    was 26 to 41 ms and 95 % were below 32 to 74 ms (app/README.md).
    """
    window = opened()
    window.has_verdict()
    x, y = window.middle(window.mark(DEPTH))
    mouse = window.page.mouse
    mouse.move(x, y)
    window.page.wait_for_selector(f'[data-id="{DEPTH}"][aria-valuemax]', timeout=60_000)
    mouse.down()
    for k in range(MOVES):
        mouse.move(x, y + 6 * (k % 3 - 1))
        window.page.wait_for_timeout(60)
    mouse.move(x, y + 8)
    window.page.wait_for_timeout(500)
    shown = float(window.mark(DEPTH).get_attribute("aria-valuenow"))
    lines = window.page.evaluate("performance.getEntriesByName('redraw').map(one => one.duration)")
    mouse.up()
    window.is_draft()
    window.has_text(f"depth_mm = {shown:g}")
    assert len(lines) > MOVES / 6
    lines.sort()
    record_property("redraw_median_ms", statistics.median(lines))
    record_property("redraw_95_percent_ms", lines[int(0.95 * len(lines))])
