"""A page's server as a user starts it, and its windows, for the tests of the page."""

import re
import shutil
import subprocess
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

ROOT = Path(__file__).parents[1]
DEMO = "demo_24s4p_arc.toml"
BROWSERS = ("chromium", "chromium-browser", "google-chrome")
WIDE, TABLET = (1280, 800), (820, 1180)


def browser_path() -> str | None:
    """The distribution's Chromium."""
    return next((found for name in BROWSERS if (found := shutil.which(name))), None)


@dataclass
class Served:
    """A server of a folder of its own, that can be killed and started again."""

    folder: Path
    port: int
    address: str = ""
    process: subprocess.Popen[str] | None = None

    @property
    def said(self) -> Path:
        """What its last start has said of errors."""
        return self.folder.parent / "said.txt"

    def start(self) -> None:
        """Start it, on the same port each time; its address has a new token each time."""
        command = [sys.executable, "-m", "lamwright.app", "page", str(self.folder / DEMO)]
        with self.said.open("w", encoding="utf-8") as said:
            self.process = subprocess.Popen(
                [*command, "--port", str(self.port)], stdout=subprocess.PIPE, stderr=said, text=True
            )
        assert self.process.stdout is not None
        line = self.process.stdout.readline()
        found = re.search(r"http://\S+", line)
        assert found, line
        self.address = found[0]

    def kill(self) -> None:
        """As a crash would: nothing can be tidied up."""
        if self.process is not None:
            self.process.kill()
            self.process.wait()
            assert self.process.stdout is not None
            self.process.stdout.close()
            self.process = None

    def text(self, name: str = DEMO) -> str:
        """A file of the folder."""
        return (self.folder / name).read_text(encoding="utf-8")


@dataclass
class Watched:
    """A window, and what it said and asked for."""

    page: Any
    requests: list[str] = field(default_factory=list)
    faults: list[str] = field(default_factory=list)

    def by_id(self, name: str) -> Any:
        """The element of an id."""
        return self.page.locator(f"#{name}")

    def mark(self, name: str) -> Any:
        """The mark of a key and side."""
        return self.page.locator(f'[data-id="{name}"]')

    def middle(self, mark: Any) -> tuple[float, float]:
        """Where a mark is to be pressed."""
        box = mark.locator(".mark").bounding_box()
        return box["x"] + box["width"] / 2, box["y"] + box["height"] / 2

    def until(self, what: Callable[[], object], seconds: float = 30.0) -> None:
        """Wait; in Python, since the page's policy lets no test put code into it that waits."""
        end = time.monotonic() + seconds
        while not what():
            assert time.monotonic() < end, "did not come"
            self.page.wait_for_timeout(25)

    def leave(self) -> None:
        """Leave a dialog by Escape and wait until it has gone: the browser closes it later."""
        self.page.keyboard.press("Escape")
        self.until(lambda: self.page.locator("dialog[open]").count() == 0)
        self.page.wait_for_timeout(100)

    def is_saved(self) -> None:
        """Wait until the page says that the file holds what it shows."""
        self.until(lambda: self.by_id("file-state").inner_text() == "saved")

    def is_draft(self) -> None:
        """Wait until the page says that it does not."""
        self.until(lambda: self.by_id("file-state").inner_text().startswith("draft"))

    def shown_text(self) -> str:
        """The design file's text beside the drawing."""
        text: str = self.by_id("text").input_value()
        return text

    def has_text(self, part: str) -> None:
        """Wait until it holds a part."""
        self.until(lambda: part in self.shown_text())

    def has_verdict(self) -> None:
        """Wait for figures of the outline that is shown."""
        self.page.wait_for_selector("#limits:not(.is-old) table", timeout=120_000)

    def drag(self, name: str, right: float, down: float, steps: int = 6) -> None:
        """Press on a mark, move by so many pixels and let go."""
        x, y = self.middle(self.mark(name))
        mouse = self.page.mouse
        mouse.move(x, y)
        mouse.down()
        for k in range(1, steps + 1):
            mouse.move(x + right * k / steps, y + down * k / steps)
        mouse.up()
