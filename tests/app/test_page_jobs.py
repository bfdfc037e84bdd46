"""Verdicts behind the page: one job per content, truth after reloads and kills, fields as drawn."""

import json
import struct
import threading
import time
from pathlib import Path

import numpy as np
import pytest
from page_client import DEMO, SOCKET, client_of, demo_folder
from page_stand_ins import text_with, with_stand_in

from lamwright.app.evaluation import evaluate
from lamwright.app.page_api import Page
from lamwright.app.page_job import Job
from lamwright.app.page_jobs import Jobs, Refused
from lamwright.app.study_task import Task
from lamwright.geometry.errors import LamwrightError

PATIENCE_S = 120.0  # of a loaded machine; a job takes a second


def _finished(jobs: Jobs, job_id: str) -> Job:
    until = time.monotonic() + PATIENCE_S
    while (job := jobs.state(job_id)).state in ("waiting", "running"):
        assert time.monotonic() < until
        time.sleep(0.02)
    return job


@pytest.fixture
def page(tmp_path: Path) -> Page:
    return demo_folder(tmp_path)


def test_the_newest_coarse_one_drops_those_that_wait(page: Page):
    """Of one owner: the first is under way, the second is dropped, the third comes next."""
    jobs, worker = with_stand_in(page)
    told: list[tuple[str, str]] = []
    jobs.listen(lambda job: told.append((job.id, job.state)))
    ids = [jobs.want("coarse", DEMO, text_with(page, gap), "tab").id for gap in (0.41, 0.42, 0.43)]
    assert [jobs.state(one).state for one in ids] == ["running", "none", "waiting"]
    assert (ids[1], "superseded") in told
    worker.futures[0].set_result(None)  # type: ignore[attr-defined]
    assert [jobs.state(one).state for one in ids][2] == "running"
    assert [call[2] for call in worker.calls] == [text_with(page, gap) for gap in (0.41, 0.43)]
    jobs.stop()
    assert worker.is_stopped


def test_what_another_tab_waits_for_goes_on(page: Page):
    """Two owners of one job: the first one's next wish leaves it to the second."""
    jobs, _ = with_stand_in(page)
    jobs.want("coarse", DEMO, text_with(page, 0.41), "a")
    shared = jobs.want("coarse", DEMO, text_with(page, 0.42), "a")
    assert jobs.want("coarse", DEMO, text_with(page, 0.42), "b").id == shared.id
    jobs.want("coarse", DEMO, text_with(page, 0.43), "a")
    assert jobs.state(shared.id).state == "waiting"
    jobs.leave("b")
    assert jobs.state(shared.id).state == "none"
    jobs.stop()


def test_a_job_is_its_content(page: Page):
    """Another layout is the same job, another value is another one, a card's too."""
    jobs, _ = with_stand_in(page)
    text = text_with(page)
    first = jobs.want("coarse", DEMO, text, "a").id
    laid_out = text.replace("gap_mm = 0.4", "gap_mm   =  0.40  # a comment")
    assert jobs.want("coarse", DEMO, laid_out, "b").id == first
    assert jobs.want("coarse", DEMO, text_with(page, 0.41), "b").id != first
    card = page.folder.root / "steel" / "demo_050.toml"
    card.write_text(card.read_text().replace("value = 380.0", "value = 381.0"))
    assert jobs.want("coarse", DEMO, text, "b").id != first
    jobs.stop()


def test_a_fault_of_the_worker_fails_its_job_alone(page: Page):
    """The next one goes to a new process; the failed one can be asked for again."""
    from lamwright.app.pool import WorkerLost

    jobs, worker = with_stand_in(page)
    first = jobs.want("coarse", DEMO, text_with(page, 0.41), "a").id
    worker.futures[0].set_exception(LamwrightError("no torque"))  # type: ignore[attr-defined]
    assert (jobs.state(first).state, jobs.state(first).error) == ("failed", "no torque")
    assert jobs.want("coarse", DEMO, text_with(page, 0.41), "a").state == "running"
    worker.futures[1].set_exception(WorkerLost("gone"))  # type: ignore[attr-defined]
    assert jobs._worker is None
    assert jobs.state(first).error == "gone"
    with pytest.raises(Refused, match="run into each other"):
        jobs.want(
            "coarse", DEMO, text_with(page).replace("thickness_mm = 2.6", "thickness_mm = 9.6"), ""
        )
    jobs.stop()


@pytest.mark.parametrize("name", ["", "coarse-", "coarse-" + "g" * 40, "../" + "0" * 40, "full-x"])
def test_an_id_is_no_path(page: Page, name: str):
    """An id is looked at before a file of it is."""
    jobs = Jobs(page.folder)
    with pytest.raises(LamwrightError, match="no job's id"):
        jobs.place(name)
    assert client_of(page, jobs).get(f"/api/jobs/{name or 'x'}").status_code in (403, 404)


@pytest.fixture(scope="module")
def coarse(tmp_path_factory: pytest.TempPathFactory):
    """A coarse verdict of the demonstration design: page, job, record, field file."""
    page = demo_folder(tmp_path_factory.mktemp("page"))
    with Jobs(page.folder) as jobs:
        client = client_of(page, jobs)
        body = {"want": "coarse", "path": DEMO, "text": text_with(page)}
        job = _finished(jobs, client.post("/api/jobs", json=body).json()["job"])
        assert job.state == "done", job.error
        answer = client.get(f"/api/jobs/{job.id}").json()
        data = client.get(f"/api/jobs/{job.id}/field").content
    return page, job, answer["result"], data


def test_coarse_figures_hold_their_error_bars_against_a_quick_evaluation(coarse):
    """Its angle is searched by other elements at other positions, its waveform has as many.

    Quick figures are known to 1.2 % of the torque and less of others (designs/studies/README.md),
    the bars are wider; what both compute alike has none and is the same to nine digits. Outcomes go
    by the limits.
    """
    page, _, result, _ = coarse
    cards = {"steel/demo_050.toml": (page.folder.root / "steel/demo_050.toml").read_text()}
    quick = evaluate(Task("", {}, DEMO, text_with(page), cards))
    figures = {one["key"]: one["value"] for one in result["figures"]}
    bars = {one["key"]: one["error"] for one in result["figures"]}
    assert len(figures) > 20
    for key, value in figures.items():
        if bars[key] is None:
            assert value == pytest.approx(quick.figures[key], rel=1e-8), key
        else:
            assert abs(value - quick.figures[key]) < bars[key], key
    assert bars["torque_nm"] < 0.02 * figures["torque_nm"]
    for one in result["outcomes"]:
        least = one["sense"] == "least"
        holds = one["value"] >= one["limit"] if least else one["value"] <= one["limit"]
        assert one["passes"] is holds
        assert figures[one["figure"]] == one["value"]
        assert one["error"] == bars[one["figure"]]
    mean = np.mean(result["torque"]["torque_nm"])
    assert mean == pytest.approx(figures["torque_nm"], rel=1e-12)


def _arrays(data: bytes) -> tuple[dict, dict[str, np.ndarray]]:
    (length,) = struct.unpack("<I", data[:4])
    head = json.loads(data[4 : 4 + length])
    found = {
        one["name"]: np.frombuffer(
            data, "<" + one["type"], int(np.prod(one["shape"])), 4 + length + one["offset"]
        ).reshape(one["shape"])
        for one in head["arrays"]
    }
    return head, found


def test_the_field_lies_on_the_outline(coarse):
    """Triangles fill the sector; A_z is one value on both sides of the gap's middle.

    The areas miss by what flat quarters of curved elements miss, 0.1 %. A wrong turn or sign of the
    rotor would tear A_z at the turning circle by the flux that passes it.
    """
    _, _, _, data = coarse
    head, arrays = _arrays(data)
    places, triangles = arrays["field_positions"].astype(float), arrays["field_triangles"]
    a, b, c = (places[triangles[:, k]] for k in range(3))
    cross = (b - a)[:, 0] * (c - a)[:, 1] - (b - a)[:, 1] * (c - a)[:, 0]
    assert np.abs(cross).sum() / 2 == pytest.approx(np.pi * 70.0**2 / 4, rel=1e-3)
    assert (cross < 0).all()  # counter-clockwise as seen, y downward
    x, y, width, height = head["view"]
    assert (places >= [x, y]).all()
    assert (places <= [x + width, y + height]).all()
    radius = np.hypot(*places.T)
    on_circle = np.abs(radius - 40.8) < 1e-3  # the middle of the gap
    angle = np.arctan2(*places[on_circle].T)
    potential = arrays["field_a_z"][on_circle]
    order = np.argsort(angle)
    same = np.diff(angle[order]) < 1e-5
    assert same.sum() > 100
    jump = np.abs(np.diff(potential[order]))[same].max()
    assert jump < 1e-5 * np.ptp(arrays["field_a_z"])
    assert head["ranges"]["b"][1] == pytest.approx(arrays["field_b"].max(), rel=1e-6)


def test_stress_is_that_of_the_verdict(coarse):
    """Its largest value is the figure's, at a rib."""
    _, _, result, data = coarse
    _, arrays = _arrays(data)
    figures = {one["key"]: one["value"] for one in result["figures"]}
    peak = arrays["stress_von_mises"].max()
    assert peak == pytest.approx(figures["lamination_stress_peak_mpa"], rel=1e-6)
    assert peak == pytest.approx(max(rib["peak_mpa"] for rib in result["ribs"]), rel=1e-6)


def test_a_restarted_server_finds_what_is_finished(coarse):
    """New jobs on the same folder: done at once, nothing is started."""
    page, job, result, _ = coarse
    jobs = Jobs(page.folder)
    again = jobs.want("coarse", DEMO, text_with(page), "new")
    assert (again.id, again.state, jobs._worker) == (job.id, "done", None)
    assert jobs.result(job.id) == result


def test_the_socket_tells_a_verdict(coarse):
    """Token, ready, job, done with its result; then what a faulty design has."""
    page, job, result, _ = coarse
    client = client_of(page, Jobs(page.folder))
    with client.websocket_connect(SOCKET) as socket:
        socket.send_json({"token": client.headers["x-page-token"]})
        assert socket.receive_json()["kind"] == "ready"
        socket.send_json({"want": "coarse", "path": DEMO, "text": text_with(page), "ticket": 7})
        first, second = socket.receive_json(), socket.receive_json()
        assert (first["kind"], first["ticket"], first["job"]) == ("job", 7, job.id)
        assert (second["kind"], second["ticket"], second["result"]) == ("done", 7, result)
        socket.send_json({"want": "coarse", "path": DEMO, "text": "x = ", "ticket": 8})
        refused = socket.receive_json()
        assert (refused["kind"], refused["ticket"]) == ("refused", 8)
        assert refused["findings"][0]["line"] == 1
        socket.send_json({"watch": job.id})
        assert socket.receive_json()["state"] == "done"
        assert socket.receive_json()["result"] == result


def test_a_look_begins_nothing(coarse):
    """The state of a full verdict that nobody has asked for is none; of no design at all too."""
    page, _, result, _ = coarse
    jobs = Jobs(page.folder)
    client = client_of(page, jobs)
    with client.websocket_connect(SOCKET) as socket:
        socket.send_json({"token": client.headers["x-page-token"]})
        socket.receive_json()
        for due in (result["design_hash"], "../../x"):
            socket.send_json({"look": due, "ticket": 3})
            told = socket.receive_json()
            assert (told["kind"], told["ticket"], told["effort"]) == ("job", 3, "full")
            assert told["state"] == "none"
    assert jobs._hired is None


def test_an_unswept_study_has_an_empty_ledger(page: Page):
    """No error: the page asks before it is swept. A picked row's name is free, beside the base."""
    from lamwright.app.page_tasks import _free_name

    client = client_of(page)
    answer = client.get("/api/ledger", params={"folder": "study-sweep"})
    assert answer.status_code == 200
    assert answer.json()["study"] is None
    assert (answer.json()["rows"], answer.json()["total"]) == ([], 0)
    (page.folder.root / "studies").mkdir()
    (page.folder.root / "studies" / "one.toml").write_text(f'base = "../{DEMO}"')
    assert _free_name(page.folder, "studies/one.toml", 7) == "demo_24s4p_arc-row7.toml"
    (page.folder.root / "demo_24s4p_arc-row7.toml").write_text("")
    assert _free_name(page.folder, "studies/one.toml", 7) == "demo_24s4p_arc-row7-2.toml"


FRAMES = [
    "",
    "{",
    "[]",
    "null",
    '"want"',
    "[" * 50000,
    '{"want": "coarse"}',
    '{"want": "all", "ticket": 1, "path": "a.toml", "text": ""}',
    '{"want": "coarse", "ticket": -1, "path": "a.toml", "text": ""}',
    '{"want": "coarse", "ticket": true, "path": "a.toml", "text": ""}',
    '{"want": "coarse", "ticket": 1, "path": 5, "text": ""}',
    '{"watch": "../../x"}',
    '{"look": 5, "ticket": 1}',
    '{"look": "x"}',
    '{"nothing": 1}',
    " " * ((1 << 20) + 1),
    b"\x00\x01",
]


@pytest.mark.parametrize("frame", FRAMES, ids=range(len(FRAMES)))
def test_malformed_frames_close_the_socket(page: Page, frame: str | bytes):
    """With the code of malformed data; the next socket opens as ever."""
    from starlette.websockets import WebSocketDisconnect

    client = client_of(page)
    for _ in range(2):
        with client.websocket_connect(SOCKET) as socket:
            socket.send_json({"token": client.headers["x-page-token"]})
            assert socket.receive_json()["kind"] == "ready"
            send = socket.send_bytes if isinstance(frame, bytes) else socket.send_text
            send(frame)  # type: ignore[arg-type]
            with pytest.raises(WebSocketDisconnect) as closed:
                socket.receive_json()
            assert closed.value.code == 1007


def test_a_socket_needs_token_and_origin(page: Page):
    """A wrong token, none, a foreign Origin, none at all, a foreign Host."""
    from starlette.websockets import WebSocketDisconnect

    client = client_of(page)
    for first, code in (({"token": "wrong"}, 4403), ({"token": None}, 4403), ({}, 4403)):
        with client.websocket_connect(SOCKET) as socket:
            socket.send_json(first)
            with pytest.raises(WebSocketDisconnect) as closed:
                socket.receive_json()
            assert closed.value.code == code
    for name, value in (
        ("origin", "http://evil.example"),
        ("origin", "null"),
        ("host", "evil:8765"),
    ):
        with (
            pytest.raises(WebSocketDisconnect) as closed,
            client.websocket_connect(SOCKET, headers={name: value}),
        ):
            pass
        assert closed.value.code == 1008
    del client.headers["origin"]
    with pytest.raises(WebSocketDisconnect), client.websocket_connect(SOCKET):
        pass


def test_listeners_end(page: Page):
    """Sockets come and go for days: none of them stays."""
    jobs = Jobs(page.folder)
    ends = [jobs.listen(lambda job: None) for _ in range(10)]
    threads = [threading.Thread(target=end) for end in ends]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert jobs._listeners == []
