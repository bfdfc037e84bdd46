"""The README's picture of the page: `python -m tests.page_pictures` from the checkout.

A designer's moment: the demo under tighter limits, one of them missed, its full verdict done, a
mark chosen with how far it may go.
"""

import shutil
import sys
import tempfile
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))

from page_windows import DEMO, ROOT, WIDE, Served, browser_path

TARGET = ROOT / "designs" / "pictures" / "page.png"
LIMITS = (("least_torque_nm = 9.0", "least_torque_nm = 11.52"), ("ratio = 3.0", "ratio = 6.5"))


def main() -> None:
    """Make it anew."""
    from PIL import Image
    from playwright.sync_api import sync_playwright

    with tempfile.TemporaryDirectory() as place, sync_playwright() as playwright:
        folder = Path(place) / "designs"
        shutil.copytree(ROOT / "designs" / "steel", folder / "steel")
        text = (ROOT / "designs" / DEMO).read_text(encoding="utf-8")
        for stated, tighter in LIMITS:
            assert stated in text
            text = text.replace(stated, tighter)
        (folder / DEMO).write_text(text, encoding="utf-8")
        served = Served(folder, 8799)
        served.start()
        try:
            browser = playwright.chromium.launch(
                executable_path=browser_path(), args=["--no-sandbox"]
            )
            page = browser.new_page(
                viewport={"width": WIDE[0], "height": WIDE[1]}, color_scheme="light"
            )
            page.goto(served.address)
            page.wait_for_selector("#limits:not(.is-old) table", timeout=120_000)
            page.keyboard.press("Control+Enter")
            page.wait_for_selector("#files button", timeout=240_000, state="attached")
            mark = '[data-id="rotor.barrier[2].end_angle_deg right"]'
            page.locator(mark).focus()
            page.wait_for_selector(f"{mark}[aria-valuemax]", timeout=60_000)
            page.wait_for_timeout(500)
            page.screenshot(path=str(TARGET))
            browser.close()
        finally:
            served.kill()
    small = Image.open(TARGET).convert("RGB").quantize(256, dither=Image.Dither.NONE)
    small.save(TARGET, optimize=True)


if __name__ == "__main__":
    main()
