"""Two windows, reloads, and a server that is killed: nothing is lost, and the page says what is."""

from collections.abc import Callable

import pytest
from page_windows import Served, Watched

Opened = Callable[..., Watched]
DEPTH = "rotor.barrier[1].depth_mm middle"


def step(window: Watched, presses: int = 1) -> None:
    """Step a mark's value and accept it."""
    window.mark(DEPTH).focus()
    for _ in range(presses):
        window.page.keyboard.press("ArrowUp")
    window.page.keyboard.press("Enter")


def test_two_windows_show_one_truth(opened: Opened, served: Served):
    """What one window changes or saves the other one shows, and either can undo."""
    first, second = opened(), opened()
    step(first)
    first.is_draft()
    second.until(lambda: second.shown_text() == first.shown_text() != served.text())
    second.is_draft()
    second.page.keyboard.press("Control+s")
    second.is_saved()
    first.is_saved()
    assert served.text() == first.shown_text()
    first.page.keyboard.press("Control+z")
    second.until(lambda: second.shown_text() == first.shown_text() != served.text())
    assert first.faults == second.faults == []


@pytest.mark.slow
def test_another_browser_takes_up_the_draft(opened: Opened, served: Served):
    """A draft is on the server: a window without any memory of its own shows it."""
    first = opened()
    step(first, 3)
    first.is_draft()
    other = opened("another")
    other.is_draft()
    assert other.shown_text() == first.shown_text() != served.text()
    other.by_id("discard").click()
    other.is_saved()
    assert other.shown_text() == served.text()


@pytest.mark.slow
def test_undo_outlives_a_reload(opened: Opened, served: Served):
    """The steps of a window are kept for it."""
    window = opened()
    step(window)
    window.is_draft()
    window.page.reload()
    window.page.wait_for_selector(".handle")
    window.is_draft()
    window.page.keyboard.press("Control+z")
    window.is_saved()
    assert window.shown_text() == served.text()


@pytest.mark.slow
def test_a_file_changed_on_disk_is_not_written_over(opened: Opened, served: Served):
    """Saving asks first; what an editor wrote meanwhile stays."""
    window = opened()
    step(window)
    window.is_draft()
    written = served.text() + "# written by an editor\n"
    (served.folder / "demo_24s4p_arc.toml").write_text(written, encoding="utf-8")
    window.page.keyboard.press("Control+s")
    window.page.wait_for_selector("dialog[open]")
    assert "another file now" in window.by_id("question").inner_text()
    window.page.keyboard.press("Escape")
    assert served.text() == written
    window.page.reload()
    window.page.wait_for_selector("#state-line[data-state=stale]")


@pytest.mark.slow
def test_a_killed_server_loses_nothing(opened: Opened, served: Served):
    """Killed during a full verdict, started again with another token.

    The window says that the server is gone and takes changes meanwhile; when the new address is
    opened in a second window the first one goes on with it, hands its change over, and the full
    verdict is begun again.
    """
    window = opened()
    window.has_verdict()
    window.by_id("full-begin").click()
    window.page.wait_for_selector("#full-progress:not([hidden])")
    before = served.text()
    served.kill()
    window.page.wait_for_selector("#state-line[data-state=gone]")
    window.by_id("tab-text").click()
    text = window.shown_text().replace("gap_mm = 0.4", "gap_mm = 0.41")
    window.by_id("text").fill(text)
    window.is_draft()
    served.start()
    window.page.wait_for_selector("#state-line[data-state=strange]")
    second = window.page.context.new_page()
    second.goto(served.address)
    window.page.wait_for_selector("body[data-link=on]")
    window.page.wait_for_selector("#state-line", state="hidden")
    other = opened("another")
    other.until(lambda: other.shown_text() == text)
    assert served.text() == before
    window.by_id("tab-verdict").click()
    window.page.wait_for_selector("#full-progress:not([hidden])")
    window.by_id("full-stop").click()
    window.page.wait_for_selector("#full-progress", state="hidden")
    window.has_verdict()
