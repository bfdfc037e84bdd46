"""What a run tells on its way, and where its time goes."""

import time
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager

from lamwright.postprocess.verdict import PhaseTime

# Name of the phase and share of the whole run that is done (0 to 1); called from the run's thread.
Progress = Callable[[str, float], None]

# Share of the wall time by phase, in order, on two cores (measured on the demonstration designs).
SHARES = {
    "start": 0.1,
    "mesh": 0.03,
    "magnetic model": 0.02,
    "current angle": 0.2,
    "torque waveform": 0.36,
    "stress": 0.0,
    "error bars": 0.2,
    "magnets": 0.0,  # only where there are any
    "files": 0.01,
    "pictures": 0.03,
}


def silent(phase: str, share: float) -> None:
    """Progress that tells nobody."""


class Stopwatch:
    """Wall time by phase; each phase of the shares at most once."""

    def __init__(self, progress: Progress, shares: Mapping[str, float] = SHARES) -> None:
        """Tell `progress` what begins and how far it is; `shares` of the wall time in order."""
        self._shares = shares
        self._progress = progress
        self._began = time.perf_counter()
        self._times: list[PhaseTime] = []
        self._phase = ""

    @contextmanager
    def phase(self, name: str) -> Iterator[None]:
        """Time the block as one phase."""
        began = time.perf_counter()
        self._phase = name
        self.within(0.0)
        yield
        self._times.append(PhaseTime(name, time.perf_counter() - began))

    def within(self, share: float) -> None:
        """Tell how much of the present phase is done (0 to 1)."""
        names = list(self._shares)
        before = sum(self._shares[name] for name in names[: names.index(self._phase)])
        self._progress(self._phase, before + share * self._shares[self._phase])

    def meanwhile(self, name: str, seconds: float) -> None:
        """Note what another process took at the same time."""
        self._times.append(PhaseTime(f"meanwhile {name}", seconds))

    @property
    def times(self) -> tuple[PhaseTime, ...]:
        """All phases so far and the total."""
        return (*self._times, PhaseTime("total", time.perf_counter() - self._began))
