"""The distribution's Chromium, a page's server, and windows of it.

Without Chromium or Playwright these tests are skipped, and say so: `apt-get install chromium`.
"""

import shutil
import socket
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from page_windows import DEMO, ROOT, WIDE, Served, Watched, browser_path

ARGUMENTS = (
    *("--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-sync"),
    *("--disable-background-networking", "--disable-component-update"),
)


@pytest.fixture(scope="session")
def chromium() -> Iterator[Any]:
    path = browser_path()
    if path is None:
        pytest.skip("no Chromium here: apt-get install chromium")
    sync_api = pytest.importorskip("playwright.sync_api", reason="no Playwright here")
    with sync_api.sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=path, args=list(ARGUMENTS))
        yield browser
        browser.close()


@pytest.fixture(scope="session")
def without_webgl(chromium: Any) -> Iterator[Any]:
    """The same browser on a machine that has no WebGL."""
    browser = chromium.browser_type.launch(
        executable_path=browser_path(),
        args=[*ARGUMENTS, "--disable-3d-apis"],
    )
    yield browser
    browser.close()


@pytest.fixture(scope="session")
def served_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("page") / "designs"
    folder.mkdir()
    shutil.copy(ROOT / "designs" / DEMO, folder)
    shutil.copytree(ROOT / "designs" / "steel", folder / "steel")
    return folder


@pytest.fixture(scope="session")
def running(chromium: Any, served_folder: Path) -> Iterator[Served]:
    """One server for all tests of a process; started only where there is a browser."""
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    server = Served(served_folder, port)
    server.start()
    yield server
    server.kill()


@pytest.fixture
def served(running: Served) -> Served:
    """The server with its design as it was shipped and no draft."""
    shutil.copy(ROOT / "designs" / DEMO, running.folder)
    shutil.rmtree(running.folder / ".lamwright-page" / "drafts", ignore_errors=True)
    return running


@pytest.fixture
def opened(chromium: Any, served: Served) -> Iterator[Any]:
    """Open windows of the server, watched; of one browser session each call with the same name."""
    contexts: dict[str, Any] = {}

    def opened(
        session: str = "one",
        size: tuple[int, int] = WIDE,
        scheme: str = "light",
        browser: Any = chromium,
        **options: Any,
    ) -> Watched:
        if session not in contexts:
            contexts[session] = browser.new_context(
                viewport={"width": size[0], "height": size[1]}, color_scheme=scheme, **options
            )
        page = contexts[session].new_page()
        window = Watched(page)
        page.on("request", lambda request: window.requests.append(request.url))
        page.on("websocket", lambda own: window.requests.append(own.url))
        page.on("pageerror", lambda error: window.faults.append(str(error)))
        page.on(
            "console",
            lambda said: said.type == "error" and window.faults.append(said.text),
        )
        page.goto(served.address)
        page.wait_for_selector(".handle")
        return window

    yield opened
    for context in contexts.values():
        context.close()
