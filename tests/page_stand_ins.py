"""Stand-ins for the processes behind the page's verdicts."""

from page_client import DEMO

from lamwright.app.page_api import Page
from lamwright.app.page_jobs import Jobs


def text_with(page: Page, gap: float = 0.4) -> str:
    """The design with another air gap in mm."""
    return page.folder.text(DEMO)[0].replace("gap_mm = 0.4", f"gap_mm = {gap}")


class StandIn:
    """A worker whose calls end when the test says so."""

    def __init__(self) -> None:
        """No call yet."""
        self.calls: list[tuple[object, ...]] = []
        self.futures: list[object] = []
        self.is_stopped = self.is_lost = False

    def submit(self, method: object, *args: object) -> object:
        """Note a call."""
        from concurrent.futures import Future

        self.calls.append(args)
        self.futures.append(Future())
        return self.futures[-1]

    def stop(self) -> None:
        """Note the end."""
        self.is_stopped = True


def with_stand_in(page: Page) -> tuple[Jobs, StandIn]:
    """Jobs whose coarse worker is a stand-in."""
    jobs, worker = Jobs(page.folder), StandIn()
    jobs._worker = worker  # type: ignore[assignment]
    return jobs, worker


class StandInHired:
    """A process that does nothing."""

    def end(self) -> None:
        """Nothing to end."""

    def join(self) -> None:
        """Nothing to wait for."""
