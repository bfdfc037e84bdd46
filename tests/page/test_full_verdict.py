"""The full verdict: the figures of `assess`, found again by every window and by a new server."""

import json
from collections.abc import Callable

import pytest
from page_windows import Served, Watched

from lamwright.app.study_figures import known_figures

Opened = Callable[..., Watched]
pytestmark = pytest.mark.slow


def is_rounded(shown: str, value: float) -> bool:
    """Whether a number is written to the places that it shows."""
    text = shown.replace("\u2212", "-")
    places = len(text.partition(".")[2])
    return abs(float(text) - value) <= 0.5001 * 10**-places


def shown_figures(window: Watched) -> dict[str, str]:
    """What the tables of figures say, by label."""
    rows = window.page.locator("#figures table.plain tbody tr").all()
    told = [(row.locator("th").inner_text(), row.locator("td").inner_text()) for row in rows]
    assert len({label for label, _ in told}) == len(told)
    return {label.removesuffix(" est."): text for label, text in told}


def is_full(window: Watched) -> bool:
    """Whether figures of a full verdict are shown."""
    return str(window.by_id("verdict-line").inner_text()).startswith("Full verdict in")


def test_figures_are_those_of_assess(opened: Opened, served: Served):
    """Each to the places that are shown, with its error; other windows find them, a new server too.

    That the file is the one `assess` would write, to the last digit, tests/app/test_page_live.py
    shows. Figures come before the pictures are drawn; its files come at the end.
    """
    window, second = opened(), opened()
    window.has_verdict()
    second.has_verdict()
    window.page.keyboard.press("Control+Enter")
    second.page.wait_for_selector("#full-progress:not([hidden])")  # told of what the first began
    window.until(lambda: is_full(window), 240)
    told = shown_figures(window)
    window.until(lambda: window.by_id("files").locator("button").count() > 8, 240)
    assert shown_figures(window) == told
    found = list((served.folder / ".lamwright-page" / "full").glob("*/verdict.json"))
    assert len(found) == 1
    verdict = json.loads(found[0].read_text(encoding="utf-8"))
    count = 0
    for key, figure in known_figures().items():
        value, error = verdict.get(key), verdict.get(f"{key}_error")
        if not isinstance(value, int | float):
            continue
        count += 1
        parts = told[figure.label].split(" ")
        assert is_rounded(parts[0], value), (key, value, parts)
        if error:
            assert parts[1] == "\u00b1"
            assert is_rounded(parts[2], error)
    assert count == len(told) > 20
    for row, outcome in zip(
        window.page.locator("#limits tbody tr").all(), verdict["outcomes"].values(), strict=True
    ):
        assert ("met" if outcome["holds"] else "missed") in row.locator(".outcome").inner_text()
        assert is_rounded(row.locator("td").nth(0).inner_text().split(" ")[0], outcome["value"])
    second.until(lambda: is_full(second))
    fresh = opened("another browser")
    fresh.until(lambda: is_full(fresh))
    assert shown_figures(fresh) == told
    assert window.faults == second.faults == fresh.faults == []
    served.kill()
    served.start()
    later = opened("after a new start")
    later.until(lambda: is_full(later))
    assert shown_figures(later) == told


def test_a_reload_takes_a_full_verdict_up(opened: Opened, served: Served):
    """Also where the server was killed meanwhile: it is begun again, unasked."""
    window = opened()
    window.page.keyboard.press("t")
    window.by_id("text").fill(served.text().replace("gap_mm = 0.4", "gap_mm = 0.42"))
    window.is_draft()
    window.page.keyboard.press("Escape")
    window.page.keyboard.press("v")
    window.page.keyboard.press("Control+Enter")
    window.page.wait_for_selector("#full-progress:not([hidden])")
    window.page.reload()
    window.page.wait_for_selector("#full-progress:not([hidden])")
    served.kill()
    served.start()
    window.page.goto(served.address)
    window.page.wait_for_selector("#full-progress:not([hidden])")
    assert not is_full(window)
    window.page.keyboard.press("x")
    window.page.wait_for_selector("#full-progress", state="hidden")
    assert "stopped" in window.by_id("full-phase").inner_text()
    window.page.reload()
    window.has_verdict()
    assert window.by_id("full-progress").is_hidden()
