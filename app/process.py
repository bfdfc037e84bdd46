"""Processes that serve this one through a pipe each way: copies of it, or the interpreter anew.

A copy (fork) has all that this process has imported, which spares it more than a second. It is
safe only where this process has a single thread: a lock that another one holds at that moment
would stay locked in the copy for ever. Libraries' threads count too, so the system is asked for
their number (`/proc`, Linux). What is open here is open in the copy too, which never touches it
and is ended without clearing up.

Elsewhere, and where there are more threads, the interpreter is started anew: against
`multiprocessing` with spawn, which imports the caller's main module again, that needs no guard in a
user's script and works from a notebook; and its environment is its own, so BLAS is held to one
thread even where the caller has loaded numpy already.

Either is born deaf to the interrupt key: the process that asked for it decides.
"""

import contextlib
import gc
import os
import signal
import subprocess
import sys
import threading
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import IO, NoReturn, Protocol

from .threads import SINGLE_THREADED

_THREADS = Path("/proc/self/task")

Serve = Callable[[IO[bytes], IO[bytes]], NoReturn]  # from calls to answers, for ever


class Process(Protocol):
    """What serves; a `subprocess.Popen` is one."""

    @property
    def pid(self) -> int:
        """Its number."""

    @property
    def stdin(self) -> IO[bytes] | None:
        """Where calls go."""

    @property
    def stdout(self) -> IO[bytes] | None:
        """Where answers come from."""

    def kill(self) -> None:
        """End it, whatever it is doing."""

    def wait(self) -> int:
        """Its exit status, once it has ended."""


class Copy:
    """A copy of this process that serves."""

    def __init__(self, serve: Serve) -> None:
        """Fork; called where `may_fork`."""
        calls, self.stdin = _pipe()
        self.stdout, answers = _pipe()
        with _interrupt_ignored():
            self.pid = os.fork()
        if self.pid == 0:
            try:
                self.stdin.close()  # else its input would not end with the caller
                self.stdout.close()
                os.dup2(2, 1)  # libraries print to descriptor 1, the caller's output
                gc.freeze()  # what was imported stays: else its pages are copied to be looked at
                gc.enable()  # the caller may be at its imports
                serve(calls, answers)
            finally:
                os._exit(1)
        calls.close()
        answers.close()

    def kill(self) -> None:
        """End it, whatever it is doing."""
        os.kill(self.pid, signal.SIGKILL)

    def wait(self) -> int:
        """Its exit status, once it has ended."""
        return os.waitpid(self.pid, 0)[1]


def may_fork() -> bool:
    """Whether a copy of this process would be whole: it is known to have a single thread."""
    try:
        return len(list(_THREADS.iterdir())) == 1
    except OSError:
        return False


def anew(code: str) -> Process:
    """The interpreter started anew with Python code, which serves its input and output."""
    # -P: a file named numpy.py where the user works must not be imported.
    command = [sys.executable, "-P", "-c", code]
    with _interrupt_ignored():
        return subprocess.Popen(
            command,
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            env={**os.environ, **SINGLE_THREADED},
        )


def _pipe() -> tuple[IO[bytes], IO[bytes]]:
    receiving, sending = os.pipe()
    return os.fdopen(receiving, "rb"), os.fdopen(sending, "wb")


@contextlib.contextmanager
def _interrupt_ignored() -> Iterator[None]:
    """A process started in this block is born deaf to the interrupt key."""
    if threading.current_thread() is not threading.main_thread():
        yield  # only the main thread may touch handlers
        return
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)
