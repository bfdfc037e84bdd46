"""A page in a process of its own, as a user starts it, and requests to it over the loopback."""

import contextlib
import http.client
import json
import re
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

PATIENCE_S = 240.0  # of a loaded machine


class LivePage:
    """A running page."""

    def __init__(self, design: Path, port: int = 0) -> None:
        """Start it and wait for its address."""
        command = [sys.executable, "-m", "lamwright.app", "page", str(design), "--port", str(port)]
        self.process = subprocess.Popen(
            command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
        )
        assert self.process.stdout is not None
        line = self.process.stdout.readline()
        found = re.fullmatch(r"page: http://127\.0\.0\.1:(\d+)/#token=([\w-]+)\n", line)
        assert found is not None, (line, self.process.communicate())
        self.port, self.token = int(found[1]), found[2]
        self.host = f"127.0.0.1:{self.port}"
        self.headers = {"X-Page-Token": self.token, "Origin": f"http://{self.host}"}
        self._line = self._connection()

    def _connection(self) -> http.client.HTTPConnection:
        return http.client.HTTPConnection("127.0.0.1", self.port, timeout=PATIENCE_S)

    def ask(self, path: str, body: object = None, status: int = 200) -> Any:
        """A request over one kept connection; the answer's JSON."""
        data = None if body is None else json.dumps(body)
        method = "GET" if body is None else "POST"
        with contextlib.suppress(http.client.RemoteDisconnected, ConnectionError):
            return self._asked(method, path, data, status)
        self._line.close()
        self._line = self._connection()  # the server closes idle ones
        return self._asked(method, path, data, status)

    def _asked(self, method: str, path: str, data: str | None, status: int) -> Any:
        self._line.request(method, path, data, self.headers)
        answer = self._line.getresponse()
        content = answer.read()
        assert answer.status == status, (path, answer.status, content[:500])
        return json.loads(content)

    def finished(self, job_id: str) -> Any:
        """A job once it has ended."""
        until = time.monotonic() + PATIENCE_S
        while (job := self.ask(f"/api/jobs/{job_id}"))["state"] in ("waiting", "running"):
            assert time.monotonic() < until, job
            time.sleep(0.05)
        return job

    def family(self) -> list[int]:
        """The process and all below it (Linux)."""
        found, seen = [self.process.pid], 0
        while seen < len(found):
            tasks = Path(f"/proc/{found[seen]}/task")
            seen += 1
            with contextlib.suppress(OSError):
                for task in tasks.iterdir():
                    found += [int(one) for one in (task / "children").read_text().split()]
        return found

    def memory(self) -> int:
        """Resident memory of the process and all below it in kB, shared pages once in each."""
        return sum(_resident(pid) for pid in self.family())

    def own_memory(self) -> int:
        """Resident memory of the server itself in kB."""
        return _resident(self.process.pid)

    def kill(self) -> None:
        """End it at once, as a power cut would."""
        self._line.close()
        self.process.kill()
        self.process.communicate()


def _resident(pid: int) -> int:
    with contextlib.suppress(OSError):
        found = re.search(r"VmRSS:\s+(\d+)", Path(f"/proc/{pid}/status").read_text())
        return int(found[1]) if found else 0
    return 0


def is_alive(pid: int) -> bool:
    """Whether a process runs (Linux); one that has ended and is not yet reaped does not."""
    with contextlib.suppress(OSError):
        return not re.search(r"State:\s+Z", Path(f"/proc/{pid}/status").read_text())
    return False


def gone(pids: list[int]) -> list[int]:
    """Those still alive after a patient wait."""
    until = time.monotonic() + 30.0
    while (left := [pid for pid in pids if is_alive(pid)]) and time.monotonic() < until:
        time.sleep(0.1)
    return left


@contextlib.contextmanager
def live_page(design: Path, port: int = 0) -> Iterator[LivePage]:
    """A page that is ended by the interrupt key, as its user does, and ends all below it."""
    page = LivePage(design, port)
    try:
        yield page
    finally:
        page._line.close()
        family = page.family()
        if page.process.poll() is None:
            page.process.send_signal(2)
            _, said = page.process.communicate(timeout=60.0)
            assert said == "ended; drafts and finished results are kept\n", said
            assert page.process.returncode == 130
        assert gone(family) == []
