"""A study of the folder on the page: its sweep watched, a design of its front taken up."""

from collections.abc import Callable

import pytest
from page_windows import DEMO, Served, Watched

Opened = Callable[..., Watched]
pytestmark = [pytest.mark.xdist_group("page"), pytest.mark.slow]
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
    folder.mkdir()
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
