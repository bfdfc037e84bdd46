"""The page's main job by mouse and by keyboard, as its users do it."""

import time
import tomllib
from collections.abc import Callable

import pytest
from page_windows import DEMO, Served, Watched

Opened = Callable[..., Watched]
END = "rotor.barrier[3].end_angle_deg right"


def value_of(text: str, key: str, barrier: int) -> float:
    value: float = tomllib.loads(text)["rotor"]["barrier"][barrier - 1][key]
    return value


def test_the_main_job_by_mouse(opened: Opened, served: Served):
    """Load, drag a barrier's end, see the check, undo, redo, save, reload: one truth all along.

    No request leaves the loopback, nothing is written to the console as an error, and the comments
    of the design file are kept.
    """
    window = opened()
    before = served.text()
    region = window.page.locator(".regions path").nth(3)
    path = region.get_attribute("d")
    stage = window.by_id("stage").bounding_box()
    window.drag(END, -12, -4)
    window.is_draft()
    window.until(lambda: region.get_attribute("d") != path)
    window.page.wait_for_selector("#findings-head[data-passes=true]")
    assert window.by_id("stage").bounding_box() == stage  # what is told of a mark moves nothing
    moved = window.shown_text()
    assert value_of(moved, "end_angle_deg", 3) < value_of(before, "end_angle_deg", 3)
    assert served.text() == before  # a draft is no file yet

    window.by_id("undo").click()
    window.is_saved()
    assert window.shown_text() == before
    window.by_id("redo").click()
    window.is_draft()
    window.by_id("save").click()
    window.is_saved()
    assert served.text() == window.shown_text() == moved
    assert "# Invented demonstration machine" in moved

    window.page.reload()
    window.page.wait_for_selector(".handle")
    window.is_saved()
    assert window.shown_text() == moved
    assert (
        window.mark(END).get_attribute("aria-valuenow")
        == f"{value_of(moved, 'end_angle_deg', 3):g}"
    )
    local = (f"http://127.0.0.1:{served.port}/", f"ws://127.0.0.1:{served.port}/", "blob:", "data:")
    assert [url for url in window.requests if not url.startswith(local)] == []
    assert window.faults == []


def test_the_main_job_by_keyboard(opened: Opened, served: Served):
    """The same without a mouse: D, arrows, Escape, Enter, Ctrl-Z, Ctrl-Shift-Z, Ctrl-S."""
    window = opened()
    keys = window.page.keyboard
    before = value_of(served.text(), "depth_mm", 1)
    keys.press("d")
    assert "depth" in window.page.evaluate("document.activeElement.getAttribute('aria-label')")
    keys.press("ArrowUp")
    keys.press("Escape")
    keys.press("ArrowUp")
    keys.press("ArrowUp")
    keys.press("Shift+ArrowDown")
    keys.press("Enter")
    window.is_draft()
    stepped = round(before + 2 * 0.05 - 0.005, 6)
    window.has_text(f"depth_mm = {stepped}")
    keys.press("Control+z")
    window.is_saved()
    keys.press("Control+Shift+Z")
    window.is_draft()
    keys.press("Control+s")
    window.is_saved()
    assert value_of(served.text(), "depth_mm", 1) == stepped
    assert window.faults == []


@pytest.mark.slow
def test_steps_add_up_while_earlier_ones_are_on_their_way(opened: Opened, served: Served):
    """Each Enter ends a change; the next begins from its value, whatever the text says by then."""
    window = opened()
    keys = window.page.keyboard
    before = value_of(served.text(), "depth_mm", 1)
    window.page.route("**/api/outline", lambda route: (time.sleep(0.4), route.continue_()))
    keys.press("d")
    for _ in range(3):
        keys.press("ArrowUp")
        keys.press("Enter")
    window.has_text(f"depth_mm = {round(before + 3 * 0.05, 6)}")
    assert window.faults == []


@pytest.mark.slow
def test_a_drag_stops_at_its_limit(opened: Opened):
    """Limits come when the pointer rests on a mark; the outline at the limit can be built."""
    window = opened()
    x, y = window.middle(window.mark("rotor.barrier[3].depth_mm middle"))
    window.page.mouse.move(x, y)
    window.page.wait_for_selector(
        '[data-id="rotor.barrier[3].depth_mm middle"][aria-valuemax]', timeout=60_000
    )
    mark = window.mark("rotor.barrier[3].depth_mm middle")
    most = float(mark.get_attribute("aria-valuemax"))
    window.drag("rotor.barrier[3].depth_mm middle", 0, 250)
    window.is_draft()
    window.page.wait_for_selector("#findings-head[data-passes=true]")
    assert most - 0.01 < float(mark.get_attribute("aria-valuenow")) <= most


@pytest.mark.slow
def test_a_broken_text_says_where(opened: Opened, served: Served):
    """A finding leads to its line; the text is a draft all the same; undo leads out of it."""
    window = opened()
    window.page.keyboard.press("t")
    text = window.by_id("text")
    text.fill(served.text().replace("gap_mm = 0.4", "gap_mm = -0.4"))
    window.page.wait_for_selector("#findings-head[data-passes=false]")
    finding = window.page.locator(".finding").first
    assert "gap_mm" in finding.inner_text()
    assert "picture is-old" in (window.by_id("picture").get_attribute("class") or "")
    finding.click()
    assert "gap_mm" in window.page.evaluate(
        "(area => area.value.slice(area.selectionStart, area.selectionEnd))"
        "(document.getElementById('text'))"
    )
    window.page.keyboard.press("Control+z")
    window.page.wait_for_selector("#findings-head[data-passes=true]")
    assert window.shown_text() == served.text()


@pytest.mark.slow
def test_names_are_text(opened: Opened, served: Served):
    """A design's name that looks like markup is shown, not run."""
    file = served.folder / DEMO
    name = "<img src=x onerror=document.title=1>"
    file.write_text(served.text().replace("demo 24/4 arc", name), encoding="utf-8")
    window = opened()
    window.page.wait_for_selector("#title-block dd")
    assert name in window.by_id("title-block").inner_text()
    assert window.page.locator("img").count() == 0
    assert window.faults == []
