"""A client of the page's server in this process, as the page itself would ask."""

import shutil
from pathlib import Path

from starlette.testclient import TestClient

from lamwright.app.page_api import Page, opened_page
from lamwright.app.page_guard import Door
from lamwright.app.page_jobs import Jobs
from lamwright.app.page_ranges import Ranges
from lamwright.app.page_server import page_app
from lamwright.app.page_tasks import Tasks

DESIGNS = Path(__file__).parent.parent / "designs"
DEMO = "demo_24s4p_arc.toml"
DOOR = Door(8765, "a token of this test")
ORIGIN = "http://127.0.0.1:8765"
SOCKET = "ws://127.0.0.1:8765/api/work"
HEADERS = {"x-page-token": DOOR.token, "origin": ORIGIN}


def demo_folder(folder: Path) -> Page:
    """The page of a copy of the demonstration design."""
    shutil.copy(DESIGNS / DEMO, folder)
    shutil.copytree(DESIGNS / "steel", folder / "steel")
    return opened_page(folder / DEMO, None)


def client_of(
    page: Page,
    jobs: Jobs | None = None,
    tasks: Tasks | None = None,
    ranges: Ranges | None = None,
) -> TestClient:
    """A client with token and origin; who asks for jobs, tasks or ranges gives and ends them."""
    own = Ranges(page.folder) if ranges is None else ranges
    app = page_app(page, DOOR, jobs or Jobs(page.folder), tasks or Tasks(), own)
    return TestClient(app, base_url=ORIGIN, headers=HEADERS)
