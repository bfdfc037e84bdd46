"""The page as its user starts it: attacks on the wire, kills, releases, sweeps, many drags."""

import contextlib
import json
import random
import shutil
import socket
import statistics
import time
from pathlib import Path

import pytest
from live_page import LivePage, gone, live_page
from page_client import DEMO, DESIGNS, demo_folder

from lamwright.app.page_server import listening
from lamwright.geometry.errors import LamwrightError


def test_a_busy_port_is_told_in_one_line():
    """A second start must not share the port, whatever the system allows."""
    with listening(0) as own:
        port = own.getsockname()[1]
        assert own.getsockname()[0] == "127.0.0.1"
        assert own.proto == socket.IPPROTO_TCP  # else asyncio leaves Nagle's algorithm on
        with pytest.raises(LamwrightError, match=f"--port {port}: in use, .*accepted another"):
            listening(port)
    listening(port).close()


@pytest.fixture(scope="module")
def live(tmp_path_factory: pytest.TempPathFactory):
    """A page of the demonstration design, and its folder."""
    folder = tmp_path_factory.mktemp("live")
    demo_folder(folder)
    study = (DESIGNS / "studies" / "barriers_by_end_angle.toml").read_text()
    (folder / "study.toml").write_text(study.replace("../demo_24s4p_arc.toml", DEMO))
    with live_page(folder / DEMO) as page:
        yield page, folder


def _raw(page: LivePage, head: str) -> socket.socket:
    line = socket.create_connection(("127.0.0.1", page.port), timeout=60.0)
    line.sendall(head.replace("\n", "\r\n").encode())
    return line


HEAD = "POST /api/outline HTTP/1.1\nHost: {host}\nOrigin: http://{host}\nX-Page-Token: {token}\n"


@pytest.mark.slow
@pytest.mark.parametrize("length", ["Content-Length: 1073741824", "Transfer-Encoding: chunked"])
def test_a_body_of_1_gb_is_refused_early(live, length: str):
    """At its head where it states its length, else after 1 MiB; the server stays as small.

    What gets onto the line is what the sockets' buffers take besides.
    """
    page, _ = live
    before = page.own_memory()
    line = _raw(page, HEAD.format(host=page.host, token=page.token) + length + "\n\n")
    block = b" " * 65536
    if length.startswith("Transfer"):
        block = b"10000\r\n" + block + b"\r\n"
    sent = 0
    try:
        while sent < 1 << 30:
            line.sendall(block)
            sent += len(block)
    except OSError:
        pass
    assert sent < 16 << 20
    assert page.own_memory() - before < 20_000
    line.close()
    assert page.ask("/api/page")["start"] == DEMO


@pytest.mark.slow
def test_attacks_on_the_wire(live):
    """What a client library would not send: two Hosts, a path beside the root, huge headers."""
    page, _ = live
    good = f"Host: {page.host}\nX-Page-Token: {page.token}\n"
    heads = {
        f"GET /api/page HTTP/1.1\n{good}\n": b"200",
        f"GET /api/page HTTP/1.1\n{good}Host: evil\n\n": b"40",
        f"GET /api/page HTTP/1.1\n{good}X-Page-Token: other\n\n": b"403",
        f"GET /static/../page_api.py HTTP/1.1\n{good}\n": b"404",
        f"GET /static/%2e%2e/page_api.py HTTP/1.1\n{good}\n": b"404",
        f"GET /static/..%2f..%2fapp/page_api.py HTTP/1.1\n{good}\n": b"404",
        f"GET //api/page HTTP/1.1\nHost: {page.host}\n\n": b"404",
        f"GET /api/design?path=..%2f..%2fetc%2fpasswd HTTP/1.1\n{good}\n": b"403",
        f"GET http://{page.host}/api/page HTTP/1.1\nHost: {page.host}\n\n": b"40",
        f"PUT /api/page HTTP/1.1\n{good}\n": b"405",
        f"GET /api/page HTTP/1.1\n{good}X: {'y' * 400000}\n\n": b"4",
        "\n\n\n": b"4",
    }
    for head, status in heads.items():
        line = _raw(page, head)
        line.settimeout(30.0)
        try:
            assert line.recv(4096).split(b" ", 1)[1].startswith(status), head[:200]
        finally:
            line.close()


@pytest.mark.slow
def test_a_frame_beyond_the_bound_closes_the_socket(live):
    """By the server itself, before it is taken in: code 1009; memory stays."""
    from websockets.exceptions import ConnectionClosed
    from websockets.sync.client import connect

    page, _ = live
    before = page.own_memory()
    with connect(f"ws://{page.host}/api/work", origin=f"http://{page.host}") as line:  # type: ignore[arg-type]
        line.send(json.dumps({"token": page.token}))
        assert json.loads(line.recv())["kind"] == "ready"
        with contextlib.suppress(ConnectionClosed):
            line.send(" " * (64 << 20))
        with pytest.raises(ConnectionClosed) as closed:
            line.recv()
        assert closed.value.rcvd is None or closed.value.rcvd.code == 1009
    assert page.own_memory() - before < 20_000


FRAMES = {
    "not masked": b"\x81\x02hi",
    "reserved opcode": b"\x83\x80\0\0\0\0",
    "reserved bits": b"\xf1\x80\0\0\0\0",
    "2^63 bytes": b"\x81\xff\x80\0\0\0\0\0\0\0\0\0\0\0",
    "fragmented ping": b"\x09\x80\0\0\0\0",
    "long ping": b"\x89\xfe\x01\x00\0\0\0\0" + b"x" * 256,
    "no continuation": b"\x80\x80\0\0\0\0",
    "not UTF-8": b"\x81\x82\0\0\0\0\xff\xfe",
    "end code of one byte": b"\x88\x81\0\0\0\0\x03",
    "noise": bytes(range(128, 256)) * 40,
}


@pytest.mark.slow
@pytest.mark.parametrize("name", FRAMES)
def test_malformed_frames_end_the_line(live, name: str):
    """What RFC 6455 forbids on the wire: that socket ends, the server goes on."""
    page, _ = live
    key = "Connection: Upgrade\nUpgrade: websocket\nSec-WebSocket-Version: 13\n"
    key += "Sec-WebSocket-Key: dGhlIHNhbXBsZSBub25jZQ==\n"
    host = f"Host: {page.host}\nOrigin: http://{page.host}\n"
    with _raw(page, f"GET /api/work HTTP/1.1\n{host}{key}\n") as line:
        assert line.recv(4096).startswith(b"HTTP/1.1 101")
        line.sendall(FRAMES[name])
        line.settimeout(4.0)  # before the 5 s that a token may take
        with contextlib.suppress(ConnectionError):
            while line.recv(4096):
                pass
    assert page.ask("/api/page")["start"] == DEMO


@pytest.mark.slow
def test_windows_that_close_at_any_moment_are_no_fault(live):
    """With wishes under way: no traceback (the end of `live` looks), and the server goes on."""
    from websockets.sync.client import connect

    page, folder = live
    text, rng = (folder / DEMO).read_text(), random.Random(1)
    for k in range(24):
        at = f"ws://{page.host}/api/work"
        with (
            contextlib.suppress(Exception),  # the ends of sockets that were closed
            connect(at, origin=f"http://{page.host}", close_timeout=1) as line,  # type: ignore[arg-type]
        ):
            line.send(json.dumps({"token": page.token if k % 10 else "another"}))
            for ticket in range(rng.randrange(8)):
                want = text.replace("gap_mm = 0.4", f"gap_mm = 0.{400 + rng.randrange(9)}")
                asked = {"want": "coarse", "path": DEMO, "text": want, "ticket": ticket}
                line.send(json.dumps(asked))
            time.sleep(rng.random() * 0.1)
            line.socket.close()
    assert page.ask("/api/page")["start"] == DEMO


@pytest.mark.slow
def test_who_is_slow_holds_no_place(live):
    """A body that trickles is answered by 408; a head that does not end, and silence, are cut."""
    page, _ = live
    slow = _raw(page, HEAD.format(host=page.host, token=page.token) + "Content-Length: 999\n\n{")
    half = _raw(page, f"GET /api/page HTTP/1.1\nHost: {page.host}\n")
    silent = socket.create_connection(("127.0.0.1", page.port))
    lines = (slow, half, silent)
    until = time.monotonic() + 60.0
    while time.monotonic() < until:
        with contextlib.suppress(OSError):
            slow.sendall(b" ")
            half.sendall(b"X-More: 1\r\n")
        for line in lines:
            line.setblocking(False)
        ends = []
        for line in lines:
            try:
                ends.append(line.recv(4096, socket.MSG_PEEK) is not None)
            except BlockingIOError:
                ends.append(False)
            except OSError:
                ends.append(True)
        if all(ends):
            break
        time.sleep(0.5)
    assert ends == [True, True, True]
    slow.setblocking(True)
    with contextlib.suppress(ConnectionError):
        assert b"408" in slow.recv(4096).split(b"\r\n")[0]
    for line in lines:
        line.close()
    assert page.ask("/api/page")["start"] == DEMO


@pytest.mark.slow
def test_a_killed_server_loses_nothing(tmp_path: Path):
    """Killed during a full verdict: nothing of it runs on, the draft is there, the job is not.

    Asked for again it comes to its end, with the figures of `assess`, to the last digit.
    """
    from lamwright.app.run import assess

    demo_folder(tmp_path)
    design = tmp_path / DEMO
    first = LivePage(design)
    opened = first.ask(f"/api/design?path={DEMO}")
    text = opened["text"].replace("gap_mm = 0.4", "gap_mm = 0.41  # dragged")
    body = {"path": DEMO, "text": text, "sha256": opened["sha256"]}
    assert first.ask("/api/outline", {**body, "keep": True})["ok"]
    job = first.ask("/api/jobs", {**body, "want": "full"})["job"]
    while first.ask(f"/api/jobs/{job}")["phase"] != "torque waveform":
        time.sleep(0.05)
    family = first.family()
    assert len(family) > 3
    first.kill()
    assert gone(family) == []
    assert design.read_text() == opened["text"]
    with live_page(design) as second:
        assert second.token != first.token
        again = second.ask(f"/api/design?path={DEMO}")
        assert again["draft"]["text"] == text
        assert second.ask(f"/api/jobs/{job}")["state"] == "none"
        assert second.ask("/api/jobs", {**body, "want": "full"})["job"] == job
        done = second.finished(job)
        assert done["state"] == "done", done
        second.ask("/api/save", body)
        assert design.read_text() == text
    assess(design, tmp_path / "out")
    verdict = json.loads((tmp_path / "out" / "verdict.json").read_text())
    for figure in done["result"]["figures"]:
        assert figure["value"] == verdict[figure["key"]]
        assert figure["error"] == verdict.get(f"{figure['key']}_error")
    assert done["result"]["passes"] is verdict["passes"]
    assert {"flux.svg", "stress.png", "report.html", "lamination.dxf"} <= {*done["result"]["files"]}


def _ended(page: LivePage, task: str) -> dict:
    until = time.monotonic() + 240.0
    while (found := page.ask(f"/api/tasks/{task}"))["state"] == "running":
        assert time.monotonic() < until
        time.sleep(0.2)
    return found


@pytest.mark.slow
def test_a_sweep_fills_its_ledger_and_a_row_is_picked(live):
    """Rows come one by one; a row's design gives its margin, and its torque within error bars."""
    page, folder = live
    task = page.ask("/api/sweep", {"path": "study.toml", "out": "swept"})["task"]
    assert (
        "at work there"
        in page.ask("/api/sweep", {"path": "study.toml", "out": "swept"}, status=422)["error"]
    )
    seen: list[dict] = []
    until = time.monotonic() + 240.0
    while len(seen) < 4:
        assert time.monotonic() < until
        time.sleep(0.2)
        if not (folder / "swept" / "ledger.sqlite").is_file():
            continue
        since = seen[-1]["number"] if seen else 0
        seen += page.ask(f"/api/ledger?folder=swept&since={since}")["rows"]
    page.ask(f"/api/tasks/{task}/stop", {})
    assert _ended(page, task)["state"] == "stopped"
    assert [row["number"] for row in seen] == list(range(1, len(seen) + 1))
    row = next(row for row in seen if row["outcome"] == "done")
    picked = page.ask("/api/pick", {"folder": "swept", "row": row["number"]})
    assert picked["values"] == row["values"]
    body = {"path": "picked.toml", "text": picked["text"], "want": "coarse"}
    done = page.finished(page.ask("/api/jobs", body)["job"])
    figures = {one["key"]: one for one in done["result"]["figures"]}
    margin = figures["yield_margin"]["value"]
    assert margin == pytest.approx(row["figures"]["yield_margin"], rel=1e-8)
    for key in ("torque_nm", "saliency_ratio"):  # of fewer positions on the page
        off = abs(figures[key]["value"] - row["figures"][key])
        assert off <= figures[key]["error"]
    page.ask("/api/ledger?folder=../x&since=0", status=403)
    page.ask("/api/pick", {"folder": "swept", "row": 10**6}, status=422)


@pytest.mark.slow
def test_a_release_takes_the_verdict_that_is_known(live):
    """Of the saved design, into the folder; another name outside is refused."""
    page, folder = live
    page.ask("/api/release", {"path": DEMO, "out": "../x"}, status=403)
    text = page.ask(f"/api/design?path={DEMO}")["text"]
    body = {"want": "full", "path": DEMO, "text": text}
    done = page.finished(page.ask("/api/jobs", body)["job"])
    task = page.ask("/api/release", {"path": DEMO})
    ended = _ended(page, task["task"])
    assert (ended["state"], ended["error"]) == ("done", None)
    package = folder / "demo_24s4p_arc-release"
    assert ended["folder"] == package.name
    verdict = json.loads((package / "verdict.json").read_text())
    torque = next(o for o in done["result"]["figures"] if o["key"] == "torque_nm")
    assert verdict["torque_nm"] == torque["value"]
    shutil.rmtree(package)


KEYS = {
    "rotor.barrier[1].end_angle_deg": (14.0, 18.0),
    "rotor.barrier[2].end_angle_deg": (25.5, 29.0),
    "rotor.barrier[1].depth_mm": (3.0, 4.2),
    "rotor.barrier[2].thickness_mm": (2.6, 3.9),
    "rotor.barrier[3].tangential_rib_mm": (0.4, 1.2),  # below 0.5 it cannot be punched
    "rotor.gap_mm": (0.35, 0.5),
}
DRAGS, EVERY = 3000, 50


@pytest.mark.slow
def test_3000_drags_leave_no_trace(tmp_path: Path, capsys: pytest.CaptureFixture[str]):
    """Outline at each, a coarse verdict at each fiftieth: memory grows by less than 10 %.

    Counted from the 500th drag, when all that is made once has been made, over the server and its
    worker. No job may be left waiting, and each wanted verdict that was not superseded is there.
    """
    demo_folder(tmp_path)
    rng, values = random.Random(1), {}
    with live_page(tmp_path / DEMO) as page:
        text = page.ask(f"/api/design?path={DEMO}")["text"]
        jobs, times, faulty, early = [], [], 0, 0
        for drag in range(DRAGS):
            key = rng.choice(list(KEYS))
            values[key] = round(rng.uniform(*KEYS[key]), 3)
            began = time.perf_counter()
            body = {"path": DEMO, "text": text, "changes": {key: values[key]}, "keep": True}
            answer = page.ask("/api/outline", body)
            times.append(time.perf_counter() - began)
            faulty += not answer["ok"]
            text = answer["text"] if answer["ok"] else text
            if drag % EVERY == 0:
                job = page.ask("/api/jobs", {"path": DEMO, "text": text, "want": "coarse"})["job"]
                jobs.append(job)
                if drag % 100 == 0:
                    assert page.finished(job)["state"] == "done"
            if drag == 500:
                early = page.memory()
        ends = [page.finished(job)["state"] for job in jobs]
        late = page.memory()
    assert set(ends) <= {"done", "none"}  # none: superseded by a newer one
    assert ends.count("done") >= DRAGS // 100
    assert 0 < faulty < DRAGS // 2
    assert late < 1.1 * early, (early, late)
    share = sorted(times)[int(0.95 * len(times))]
    with capsys.disabled():
        print(
            f"\n{DRAGS} drags: median {1e3 * statistics.median(times):.1f} ms, 95 % below "
            f"{1e3 * share:.1f} ms, memory {early} to {late} kB, {faulty} refused, "
            f"{ends.count('done')} verdicts"
        )
