"""A study of the folder on the page: its sweep watched, a design of its front taken up."""

from collections.abc import Callable

import pytest
from page_windows import DEMO, Served, Watched

Opened = Callable[..., Watched]
pytestmark = pytest.mark.slow
STUDY = f"""\
name = "three depths"
base = "../{DEMO}"
effort = "quick"
[[vary]]
key = "rotor.barrier[3].depth_mm"
values = [16.5, 18.0, 19.5]
[[goal]]
figure = "torque_nm"
sense = "most"
[[goal]]
figure = "torque_ripple_percent"
sense = "least"
"""


def test_a_sweep_is_watched_and_picked_from(opened: Opened, served: Served):
    """Its rows come while it runs; the design of a row becomes a new file beside the base."""
    folder = served.folder / "studies"
    folder.mkdir(exist_ok=True)
    (folder / "depths.toml").write_text(STUDY, encoding="utf-8")
    window = opened()
    window.page.keyboard.press("w")
    window.until(lambda: window.by_id("ledger-line").inner_text() == "3 designs", 120)
    window.until(lambda: window.by_id("sweep-line").inner_text().startswith("done"), 60)
    assert window.page.locator(".point").count() == 3
    window.page.locator(".point.best").first.click()
    window.by_id("row-load").click()
    window.until(lambda: window.by_id("file-state").inner_text() == "new, not saved")
    window.page.wait_for_selector("#findings-head[data-passes=true]")
    window.page.keyboard.press("Control+s")
    window.page.wait_for_selector("dialog[open]")
    window.by_id("q-path").fill("taken.toml")
    window.page.keyboard.press("Enter")
    window.is_saved()
    assert served.text("taken.toml") == window.shown_text()
    depth = window.mark("rotor.barrier[3].depth_mm middle").get_attribute("aria-valuenow")
    assert depth in ("16.5", "18", "19.5")


def test_a_picked_design_outlives_its_window(opened: Opened, served: Served):
    """Never saved, it is a draft of the server: over a reload, in another browser, till dropped."""
    folder = served.folder / "studies"
    folder.mkdir(exist_ok=True)
    (folder / "depths.toml").write_text(STUDY, encoding="utf-8")
    window = opened()
    window.page.keyboard.press("s")
    window.until(lambda: window.by_id("ledger-line").inner_text() != "")
    assert window.faults == []  # a study that was not swept is no error
    window.page.keyboard.press("w")
    window.until(lambda: window.by_id("sweep-line").inner_text().startswith("done"), 120)
    window.until(lambda: window.page.locator(".point").count() == 3)
    window.page.keyboard.press("y")
    window.page.keyboard.press("ArrowRight")
    window.page.keyboard.press("u")
    window.until(lambda: window.by_id("file-state").inner_text() == "new, not saved")
    path, text = window.by_id("design").input_value(), window.shown_text()
    assert path.startswith("demo_24s4p_arc-row")
    window.page.reload()
    window.until(lambda: window.by_id("file-state").inner_text() == "new, not saved")
    assert (window.by_id("design").input_value(), window.shown_text()) == (path, text)
    other = opened("another")
    other.by_id("design").select_option(path)
    other.until(lambda: other.shown_text() == text)
    other.page.keyboard.press("b")
    other.page.wait_for_selector("dialog[open]")
    other.page.keyboard.press("Enter")
    other.is_saved()
    assert other.by_id("design").input_value() == DEMO
    assert not (served.folder / path).exists()
    assert window.faults == other.faults == []


def test_a_sweep_that_died_with_its_server_goes_on(opened: Opened, served: Served):
    """The window says that it ended and that its rows are kept; Sweep computes the rest."""
    folder = served.folder / "studies"
    folder.mkdir(exist_ok=True)
    values = ", ".join(f"{16.5 + 0.1 * k:.1f}" for k in range(12))
    study = STUDY.replace("16.5, 18.0, 19.5", values).replace("three", "twelve")
    (folder / "many.toml").write_text(study, encoding="utf-8")
    window = opened()
    window.page.keyboard.press("s")
    window.by_id("study").select_option("studies/many.toml")
    window.by_id("sweep-begin").click()
    window.until(lambda: window.page.locator("#ledger tbody tr").count() >= 2, 120)
    served.kill()
    window.page.wait_for_selector("#state-line[data-state=gone]")
    kept = window.page.locator("#ledger tbody tr").count()
    served.start()
    opened()  # its address frees the first window
    window.until(lambda: "finished designs are kept" in window.by_id("sweep-line").inner_text())
    assert window.page.locator("#ledger tbody tr").count() >= kept
    window.by_id("sweep-begin").click()
    window.until(lambda: window.by_id("ledger-line").inner_text() == "12 designs", 240)
    window.until(lambda: window.by_id("sweep-line").inner_text().startswith("done"), 60)
