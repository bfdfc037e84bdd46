"""What a worker process may do to its pool, without a word of physics: it starts at once."""

import os
import signal
import sys
import time
from pathlib import Path


def slept(seconds: float) -> int:
    """Sleep; gives the process it happened in."""
    time.sleep(seconds)
    return os.getpid()


def noted() -> None:
    """Leave the number of this process in a folder, and fail."""
    (Path(os.environ["NOTED"]) / str(os.getpid())).touch()
    raise ValueError("fails")


def misbehaving(wish: str) -> str:
    """Do what is asked, such as die or hang."""
    what, _, more = wish.partition(" ")
    if what == "die":
        os.kill(os.getpid(), signal.SIGKILL)
    if what == "exit":
        os._exit(int(more))
    if what == "die-once" and not Path(more).exists():  # at the first call with this file
        Path(more).touch()
        os.kill(os.getpid(), signal.SIGKILL)
    if what == "hang":
        time.sleep(1000.0)
    if what == "sleep":
        time.sleep(float(more))
    if what == "raise":
        raise ValueError(more)
    if what == "leave":
        sys.exit(3)
    return f"{wish} done"
