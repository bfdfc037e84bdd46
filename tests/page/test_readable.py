"""Everybody can use the page: the rules of WCAG that can be checked, and room at two sizes."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from page_windows import TABLET, WIDE, Served, Watched

Opened = Callable[..., Watched]
pytestmark = pytest.mark.xdist_group("page")


@pytest.fixture(scope="session")
def axe() -> str:
    """axe-core's script, from the Python package that brings it."""
    package = pytest.importorskip("axe_playwright_python", reason="no axe-core here")
    return (Path(package.__file__).parent / "axe.min.js").read_text(encoding="utf-8")


def faults_of(window: Watched, axe: str) -> list[str]:
    """What axe-core finds that is serious or worse."""
    window.page.evaluate(axe)
    found: Any = window.page.evaluate("axe.run(document, {resultTypes: ['violations']})")
    return [
        f"{one['id']}: {one['nodes'][0]['html'][:120]}: {one['nodes'][0]['failureSummary'][:300]}"
        for one in found["violations"]
        if one["impact"] in ("serious", "critical")
    ]


@pytest.mark.slow
@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_axe_finds_nothing_serious(opened: Opened, served: Served, axe: str, scheme: str):
    """In each part of the page: verdict with a comparison, text, a broken outline, study, keys."""
    window = opened(scheme, scheme=scheme)
    keys = window.page.keyboard
    window.has_verdict()
    keys.press("k")
    keys.press("d")
    keys.press("ArrowUp")
    keys.press("Enter")
    window.is_draft()
    window.has_verdict()
    assert faults_of(window, axe) == []
    keys.press("4")
    window.page.wait_for_selector("#field:not([hidden])")
    keys.press("t")
    window.by_id("text").fill(window.shown_text().replace("gap_mm = 0.4", "gap_mm = -0.4"))
    window.page.wait_for_selector("#findings-head[data-passes=false]")
    assert faults_of(window, axe) == []
    keys.press("Escape")
    keys.press("s")
    assert faults_of(window, axe) == []
    keys.press("?")
    assert faults_of(window, axe) == []


@pytest.mark.slow
@pytest.mark.parametrize("size", [WIDE, TABLET])
def test_nothing_is_cut_off(opened: Opened, size: tuple[int, int]):
    """No part is wider than the window, and every button lies within it."""
    window = opened(f"{size}", size=size)
    width = window.page.evaluate("document.documentElement.scrollWidth")
    assert width <= size[0]
    for button in window.page.locator("button:visible").all():
        box = button.bounding_box()
        assert box["x"] >= 0
        assert box["x"] + box["width"] <= size[0]


@pytest.mark.slow
def test_every_button_has_a_key(opened: Opened):
    """Each action on the page stands in the list of keys too, or is reached from one that does."""
    window = opened()
    listed = window.by_id("help-keys").locator("dd").all_text_contents()
    for part in (
        "undo",
        "redo",
        "save the",
        "save under",
        "back to",
        "release",
        "keep this",
        "end the comparison",
        "the rotor alone",
        "whole drawing",
        "larger",
        "smaller",
        "full verdict",
        "stop the full",
        "these keys",
        "light, dark",
        "sweep",
        "marks",
    ):
        assert any(part in line for line in listed), part


@pytest.mark.slow
def test_single_letters_can_be_switched_off(opened: Opened):
    """Who speaks to the page must not set off actions by words (WCAG 2.1.4)."""
    window = opened()
    window.page.keyboard.press("?")
    window.by_id("single-keys").uncheck()
    window.page.keyboard.press("Escape")
    window.page.keyboard.press("2")
    assert window.page.locator("input[name=picture]:checked").get_attribute("value") == "outline"


@pytest.mark.slow
def test_a_finger_drags_a_mark(opened: Opened):
    """A touch takes the nearest mark; the page neither scrolls nor zooms by it."""
    window = opened("touch", size=TABLET, has_touch=True)
    before = window.shown_text()
    x, y = window.middle(window.mark("rotor.barrier[3].depth_mm middle"))
    session = window.page.context.new_cdp_session(window.page)

    def touch(kind: str, points: list[dict[str, float]]) -> None:
        session.send("Input.dispatchTouchEvent", {"type": kind, "touchPoints": points})

    touch("touchStart", [{"x": x + 4, "y": y - 3}])
    for k in range(1, 5):
        touch("touchMove", [{"x": x + 4, "y": y - 3 + 2 * k}])
    touch("touchEnd", [])
    window.is_draft()
    assert window.shown_text() != before
    assert window.page.evaluate("scrollY") == 0
