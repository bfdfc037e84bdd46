"""Pictures of fields, by WebGL2 and by a plain canvas, and their values by pointer and by keys."""

import re
from collections.abc import Callable
from typing import Any

import pytest
from page_windows import Watched

Opened = Callable[..., Watched]
pytestmark = pytest.mark.slow


@pytest.fixture(params=["WebGL2", "plain canvas"])
def window(request: pytest.FixtureRequest, opened: Opened) -> Watched:
    """A window with a verdict, in a browser with WebGL2 and in one without."""
    if request.param == "WebGL2":
        window = opened()
    else:
        window = opened("plain", browser=request.getfixturevalue("without_webgl"))
    has: Any = window.page.evaluate("!!document.createElement('canvas').getContext('webgl2')")
    assert has is (request.param == "WebGL2")
    window.has_verdict()
    assert window.page.locator("#limits tbody tr").count() == 4
    assert window.page.locator("#torque .curve").count() == 1
    return window


def test_fields_are_drawn(window: Watched):
    """Pictures with many colours, a value under the pointer, nothing said to be wrong."""
    for picture in ("b", "a", "stress"):
        window.page.locator(f"input[name=picture][value={picture}]").check()
        window.page.wait_for_selector("#field:not([hidden])")
        colours: Any = window.page.evaluate(COLOURS)
        assert colours > 40, picture
    box = window.by_id("stage").bounding_box()
    window.page.mouse.move(box["x"] + box["width"] * 0.5, box["y"] + box["height"] * 0.7)
    window.until(lambda: "MPa" in window.by_id("field-hint").inner_text())
    assert window.faults == []


def test_values_are_read_by_keys(window: Watched):
    """A cross that arrow keys move: the value stands beside it, is said, and is its name.

    It is that which the pointer shows there; the highest one is that of the bar.
    """
    keys, hint, said = window.page.keyboard, window.by_id("field-hint"), window.by_id("say")
    keys.press("2")
    window.page.wait_for_selector("#field:not([hidden])")
    keys.press("p")
    keys.press("End")
    highest = re.search(r"highest ([\d.]+) at", window.by_id("field-bar").inner_text())
    assert highest is not None
    assert hint.inner_text().startswith(f"{highest[1]} T at ")
    for key in ("ArrowDown", "Shift+ArrowLeft", "ArrowDown", "ArrowDown", "ArrowDown"):
        keys.press(key)
    text = hint.inner_text()
    assert re.fullmatch(r"[\d.]+ T at \S+, \S+ mm", text)
    value = text.split(" at ")[0]
    window.until(lambda: f"flux density {value}" in said.inner_text())
    probe = window.page.locator(".probe")
    assert f"flux density {value}" in probe.get_attribute("aria-label")
    box = probe.bounding_box()
    window.page.mouse.move(0, 0)
    window.page.mouse.move(box["x"] + box["width"] / 2 + 0.5, box["y"] + box["height"] / 2 + 0.5)
    shown = float(hint.inner_text().split(" ")[0])
    assert shown == pytest.approx(float(value.split(" ")[0]), rel=0.05)  # half a pixel beside it
    keys.press("1")
    assert not probe.is_visible()
    assert window.faults == []


# How many colours a picture of the field has, read back in the frame that draws it.
COLOURS = """() => new Promise(done => {
  document.getElementById('zoom-in').click(); document.getElementById('zoom-fit').click();
  requestAnimationFrame(() => requestAnimationFrame(() => {
    const field = document.getElementById('field');
    document.getElementById('zoom-fit').click();
    requestAnimationFrame(() => {
      const copy = new OffscreenCanvas(200, 200).getContext('2d');
      copy.drawImage(field, 0, 0, 200, 200);
      const bytes = new Uint32Array(copy.getImageData(0, 0, 200, 200).data.buffer);
      done(new Set(bytes).size);
    });
  }));
})"""
