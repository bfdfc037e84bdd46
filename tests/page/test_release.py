"""A release from the page, as its user makes it: where it goes, and why one is refused."""

import json
import shutil
from collections.abc import Callable

import pytest
from page_windows import DEMO, Served, Watched

Opened = Callable[..., Watched]
pytestmark = pytest.mark.slow
PACKAGE = DEMO.replace(".toml", "-release")


def release(window: Watched, out: str | None = None, *, despite: bool = False) -> str:
    """Release by the dialog and wait for its end; what the page says of it."""
    before = window.page.locator("#releases > li").count()
    window.page.keyboard.press("r")
    window.page.wait_for_selector("dialog[open]")
    if out is not None:
        window.by_id("q-out").fill(out)
    if despite:
        window.by_id("q-despite").check()
    window.page.locator("#question button.main").click()
    window.page.wait_for_selector("#panel-release:not([hidden])")
    told = window.page.locator("#releases > li")
    window.until(lambda: told.count() > before and "released" in told.first.inner_text(), 240)
    said: str = told.first.inner_text()
    return said


def test_a_release_says_where_it_went(opened: Opened, served: Served):
    """Its folder and number; the same design again replaces it by the same package.

    A folder's name that is a file's, or leads outside, is refused in the dialog, and what stands
    there stays.
    """
    shutil.rmtree(served.folder / PACKAGE, ignore_errors=True)
    window = opened()
    said = release(window)
    package = served.folder / PACKAGE
    manifest = json.loads((package / "manifest.json").read_text(encoding="utf-8"))
    assert str(package) in said
    assert f"{len(manifest['files']) + 1} files" in said
    number = said.split("as package ")[1].split("\n")[0].strip()
    assert len(number.replace(" ", "")) == 16
    again = release(window)
    assert f"as package {number}" in again
    assert window.page.locator("#releases > li").count() == 2
    (served.folder / "taken").write_text("mine", encoding="utf-8")
    window.page.keyboard.press("r")
    for name, why in (
        ("taken", "taken: is a file; accepted a folder"),
        ("../x", "outside the page"),
    ):
        window.by_id("q-out").fill(name)
        window.page.keyboard.press("Enter")
        window.until(lambda why=why: why in window.by_id("q-fault").inner_text())
    window.leave()
    assert (served.folder / "taken").read_text(encoding="utf-8") == "mine"
    assert not (served.folder.parent / "x").exists()
    assert window.faults == []
    window.page.reload()
    window.page.wait_for_selector(".handle")
    window.page.keyboard.press("e")
    assert window.page.locator("#releases > li").count() == 2


def test_a_design_that_misses_limits_is_released_by_wish_only(opened: Opened, served: Served):
    """The changed design is saved first; what was refused says how it could be had all the same."""
    window = opened()
    window.page.keyboard.press("t")
    window.by_id("text").fill(served.text().replace("least_torque_nm = ", "least_torque_nm = 9"))
    window.is_draft()
    window.page.keyboard.press("Escape")
    window.page.keyboard.press("r")
    window.page.wait_for_selector("dialog[open]")
    assert "not saved" in window.by_id("question").inner_text()
    window.page.keyboard.press("Enter")
    window.until(lambda: window.by_id("q-out").count() == 1)
    window.is_saved()
    window.leave()
    said = release(window, "failing")
    assert "limits.least_torque_nm" in said
    assert '"even if limits are missed"' in said
    assert "--" not in said
    assert list((served.folder / "failing").iterdir()) == []
    said = release(window, "failing", despite=True)
    assert "as package" in said
    assert "NOT PASSED" in said
    manifest = json.loads((served.folder / "failing" / "manifest.json").read_text(encoding="utf-8"))
    assert "NOT PASSED" in json.dumps(manifest) or manifest["passes"] is False
