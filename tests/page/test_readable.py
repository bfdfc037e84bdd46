"""Everybody can use the page: the rules of WCAG that can be checked, and room at two sizes."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from page_windows import TABLET, WIDE, Served, Watched

Opened = Callable[..., Watched]


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
    """In each part of the page, dialogs and failures too.

    Verdict with a comparison, field, text, a broken outline, study, keys, saving, a refused name, a
    failing design, its full verdict, its release and how that was refused.
    """
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
    keys.press("Escape")
    keys.press("Control+z")
    window.page.wait_for_selector("#findings-head[data-passes=true]")
    keys.press("Control+Shift+S")
    window.page.wait_for_selector("dialog[open]")
    assert faults_of(window, axe) == []
    window.by_id("q-path").fill("../elsewhere")
    keys.press("Enter")
    window.until(lambda: "outside" in window.by_id("q-fault").inner_text())
    assert faults_of(window, axe) == []
    window.leave()
    keys.press("t")
    failing = window.shown_text().replace("least_torque_nm = ", "least_torque_nm = 9")
    window.by_id("text").fill(failing)
    keys.press("Escape")
    keys.press("v")
    window.page.wait_for_selector("#limits:not(.is-old) tr.missed", timeout=120_000)
    assert faults_of(window, axe) == []
    keys.press("Control+Enter")
    window.until(
        lambda: window.by_id("verdict-line").inner_text().startswith("Full verdict in"), 240
    )
    assert faults_of(window, axe) == []
    keys.press("Control+s")
    window.is_saved()
    keys.press("r")
    window.page.wait_for_selector("dialog[open]")
    assert faults_of(window, axe) == []
    keys.press("Enter")
    window.until(lambda: "was not released" in window.by_id("releases").inner_text(), 240)
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
def test_every_action_has_a_key(opened: Opened):
    """Whatever can be pressed or chosen names its key, each key is one action's and is listed.

    Left out: what a list holds many of (points, rows, files, findings), which a key leads to.
    """
    window = opened()
    keys = window.page.evaluate(
        "[...document.querySelectorAll('body > :not(dialog) :is(button, select, input, [role=tab])"
        ":not(.row, .file, .finding, #text, .readout-value)')]"
        ".map(one => [one.id || one.value, one.getAttribute('aria-keyshortcuts')])"
    )
    assert len(keys) > 25
    assert [name for name, key in keys if not key] == []
    # X stops what the shown tab tells of.
    named = [key for name, own in keys if name != "sweep-stop" for key in own.split(" ")]
    assert len(set(named)) == len(named)
    listed = window.page.locator("#help-keys dt").all_text_contents()
    for own in (key for _, key in keys if key):
        first = own.split(" ")[0].replace("Control", "Ctrl").replace("Plus", "+")
        assert "".join(first.split("+") if first != "+" else "+") in listed, own
    for part in ("#findings-list", "#files", "#scatter", "#stage", ".probe", "#readout"):
        assert window.page.locator(part).get_attribute("aria-keyshortcuts"), part


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
