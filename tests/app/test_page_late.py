"""Verdicts of the page whose worker or process was ended or lost: no later run pays for it."""

from pathlib import Path

import pytest
from page_client import DEMO, demo_folder
from page_stand_ins import StandIn, StandInHired, text_with, with_stand_in

from lamwright.app.page_api import Page


@pytest.fixture
def page(tmp_path: Path) -> Page:
    return demo_folder(tmp_path)


def test_what_was_given_up_ends_no_later_run(page: Page, monkeypatch: pytest.MonkeyPatch):
    """An answer that comes late, of a worker or process that was ended, is not of the new one.

    Coarse: over its time, asked for again, then the first worker's end. Full: stopped, asked for
    again, then a last word of the first process.
    """
    from lamwright.app import page_jobs
    from lamwright.app.pool import WorkerLost

    jobs, first = with_stand_in(page)
    text = text_with(page, 0.41)
    job = jobs.want("coarse", DEMO, text, "a").id
    second = StandIn()
    monkeypatch.setattr(first, "stop", lambda: (jobs.want("coarse", DEMO, text, "a"), late()))
    monkeypatch.setattr(page_jobs, "Worker", lambda make: second)

    def late() -> None:
        first.futures[0].set_exception(WorkerLost("gone"))  # type: ignore[attr-defined]

    jobs._over_time(job)
    assert jobs.state(job).state == "running"
    assert jobs._worker is second  # type: ignore[comparison-overlap]
    told: list[object] = []
    monkeypatch.setattr(page_jobs, "Hired", lambda order, tell: told.append(tell) or StandInHired())
    full = jobs.want("full", DEMO, text, "a").id
    jobs.cancel(full)
    assert jobs.want("full", DEMO, text, "a").id == full
    told[0]({"error": "of the first"})  # type: ignore[operator]
    assert jobs.state(full).state == "running"
    told[1]({"error": "of the second"})  # type: ignore[operator]
    assert jobs.state(full).error == "of the second"
    jobs.stop()


def test_an_idle_worker_that_was_lost_costs_no_verdict(page: Page, monkeypatch: pytest.MonkeyPatch):
    """The next one goes to a new process at once."""
    from lamwright.app import page_jobs

    jobs, worker = with_stand_in(page)
    second = StandIn()
    monkeypatch.setattr(page_jobs, "Worker", lambda make: second)
    worker.is_lost = True
    assert jobs.want("coarse", DEMO, text_with(page, 0.41), "a").state == "running"
    assert (len(worker.calls), len(second.calls)) == (0, 1)
    jobs.stop()
