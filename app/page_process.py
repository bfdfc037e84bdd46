"""One piece of work in a process of its own, told of by lines: full verdicts, releases, sweeps.

The process is started anew and works as the command of the same name does, with helpers of its
own; so it is as fast, its memory is gone with it, and ending it ends its helpers. It gets its order
as JSON on its input and tells of its progress as JSON lines on its output; once nobody reads them,
as after the server was killed, it ends at the next line.
"""

import contextlib
import json
import os
import signal
import sys
import threading
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import IO, Any

from lamwright.geometry.errors import LamwrightError

from .process import Process, anew

_RUN = "from lamwright.app.page_process import work; work()"

# {"phase", "share"}, {"result"} once figures are known, {"done"} or {"error"} at the end
Tell = Callable[[Mapping[str, Any]], None]
PATIENCE_S = 5.0  # from asking a process to end to ending it
LOST = "its process ended without an answer; out of memory?"


class Hired:
    """A process with one order."""

    def __init__(self, order: Mapping[str, Any], tell: Tell, *, is_asked: bool = False) -> None:
        """Start it; `tell` is called in a thread of its own, last of all with "done" or "error".

        Args:
            order: what to do.
            tell: gets what it says.
            is_asked: to end it, ask it first: one that has a pool then clears up.
        """
        self._is_asked = is_asked
        self._process: Process = anew(_RUN)
        self._is_ended = False
        self._tell = tell
        self._thread = threading.Thread(target=self._follow, args=(dict(order),), daemon=True)
        self._thread.start()

    def end(self) -> None:
        """End it, whatever it is doing; nothing more is told."""
        self._is_ended = True
        with contextlib.suppress(OSError):
            if not self._is_asked:
                self._process.kill()
                return
            os.kill(self._process.pid, signal.SIGTERM)
            timer = threading.Timer(PATIENCE_S, self._kill)
            timer.daemon = True
            timer.start()

    def join(self) -> None:
        """Wait until it has gone."""
        self._thread.join()

    def _kill(self) -> None:
        if self._thread.is_alive():
            with contextlib.suppress(OSError):
                self._process.kill()

    def _follow(self, order: dict[str, Any]) -> None:
        answers, calls = self._process.stdout, self._process.stdin
        assert answers is not None
        assert calls is not None
        with contextlib.suppress(OSError), calls:
            calls.write(json.dumps(order).encode())
        last: dict[str, Any] = {"error": LOST}
        with answers:
            for line in answers:
                with contextlib.suppress(ValueError):
                    said = json.loads(line)
                    if "done" in said or "error" in said:
                        last = said
                    elif not self._is_ended:
                        self._tell(said)
        self._process.wait()
        if not self._is_ended:
            self._tell(last)


def work() -> None:
    """What the process does."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # who started it decides
    order = json.load(sys.stdin)
    sys.stdin.close()
    answers = os.fdopen(os.dup(1), "w", encoding="utf-8")
    os.dup2(2, 1)  # libraries print to descriptor 1
    teller = _Teller(answers)
    try:
        done = ORDERS[order["kind"]](order, teller)
    except LamwrightError as error:
        teller.say({"error": as_the_page_says(str(error), order["root"])})
    except KeyboardInterrupt:
        os._exit(1)  # asked to end, and cleared up
    except BrokenPipeError:
        os._exit(1)
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        teller.say({"error": f"{Path(str(error.filename)).name}: {reason}"})
    except Exception as error:  # told to the page; the traceback goes where the server's errors go
        import traceback

        traceback.print_exc()
        teller.say({"error": f"a fault of the program: {type(error).__name__}: {error}"})
    else:
        teller.say({"done": done})


def as_the_page_says(said: str, root: str) -> str:
    """A command's message for a window: files by their names there, options by their words."""
    said = said.replace("--despite-limits", '"even if limits are missed"').replace("--out ", "")
    return said.replace(f"{root}/", "")


class _Teller:
    def __init__(self, answers: IO[str]) -> None:
        self._answers = answers

    def progress(self, phase: str, share: float) -> None:
        self.say({"phase": phase, "share": round(share, 4)})

    def say(self, record: Mapping[str, Any]) -> None:
        self._answers.write(json.dumps(record) + "\n")
        self._answers.flush()


def _full(order: Mapping[str, Any], teller: _Teller) -> dict[str, Any]:
    from .run import assess

    def known(folder: Path) -> None:
        from .page_result import full_record

        teller.say({"result": {**full_record(folder), "files": []}})

    design, out = order["design"], order["out"]
    verdict = assess(design, out, teller.progress, order["tolerance"], on_verdict=known)
    return {"passes": verdict.passes}


def _release(order: Mapping[str, Any], teller: _Teller) -> dict[str, Any]:
    from .release import ReleaseWishes, release

    verdict = Path(order["verdict"]) if order["verdict"] else None
    wishes = ReleaseWishes(verdict=verdict, despite_limits=order["despite_limits"])
    report = release(Path(order["design"]), Path(order["out"]), wishes, teller.progress)
    listed = report.manifest["files"]
    assert isinstance(listed, dict)
    files = sorted(listed)
    number, passes = report.number, report.passes
    return {"passes": passes, "number": number, "place": str(report.folder), "files": files}


def _sweep(order: Mapping[str, Any], teller: _Teller) -> dict[str, Any]:
    from collections.abc import Iterator
    from contextlib import contextmanager

    from .ledger_rows import Row
    from .study import Study
    from .study_run import OnRow
    from .sweep import sweep

    @contextmanager
    def watch(study: Study, total: int | None) -> Iterator[OnRow]:
        seen = 0

        def show(row: Row, is_known: bool) -> None:
            nonlocal seen
            seen += 1
            teller.progress(f"{seen} of {total} designs", seen / total if total else 0.0)

        yield show

    signal.signal(signal.SIGTERM, _interrupted)
    report = sweep(order["study"], order["out"], watch=watch)
    return {"rows": len(report.rows), "computed": report.computed}


def _interrupted(*_: object) -> None:
    signal.signal(signal.SIGTERM, signal.SIG_IGN)
    raise KeyboardInterrupt


ORDERS = {"full": _full, "release": _release, "sweep": _sweep}
