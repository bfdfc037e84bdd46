"""A sweep of quick designs beside bare processes that do the same without pool and ledger.

Two cores share their memory, so that two processes are not twice as quick as one even where they
have nothing to do with each other. One process alone, two of them, and the sweep take turns.
"""

import os
import subprocess
import sys
import tempfile
from collections.abc import Callable
from pathlib import Path

import numpy as np

from .ours import DESIGN
from .timing import WALL, Notes, seconds
from .workload import Workload

CORES = 2
_MACHINE = Path("/proc/stat")  # Linux
_AT_WORK = (0, 1, 2, 5, 6, 7)  # of its first line: all but idle and waiting, with the host's part
# Reads a study, makes each CORES-th of its tasks and evaluates them; the first one twice, as the
# first time is that of imports.
_BARE = """
import sys, time
from pathlib import Path
from lamwright.app.threads import hold_threads
hold_threads()
from lamwright.app.evaluation import evaluate
from lamwright.app.study_file import read_study
from lamwright.app.study_points import points_of
from lamwright.app.study_task import task_of
path, first, cores, count = sys.argv[1], *map(int, sys.argv[2:])
study = read_study(Path(path))
tasks = [task_of(study, values) for values in points_of(study)[first::cores][:count]]
evaluate(tasks[0])
print("ready", flush=True)
sys.stdin.readline()
began = time.perf_counter()
for task in tasks:
    assert evaluate(task).outcome == "done"
print(time.perf_counter() - began, flush=True)
"""
_STUDY = """
name = "quick designs"
base = "{base}"
effort = "quick"
[[vary]]
key = "layout.barriers"
values = [2, 3, 4]
[[vary]]
key = "layout.end_angle_deg"
least = 32.0
most = 40.0
[[vary]]
key = "rotor.gap_mm"
least = 0.3
most = 0.6
[[goal]]
figure = "torque_nm"
sense = "most"
[sample]
kind = "sobol"
designs = {designs}
"""


def sweep_efficiency(work: Workload, notes: Notes) -> dict[str, float]:
    """Designs a second of `sweep`, its start included, over twice those of a process alone.

    Second the same of two bare processes side by side, which is what the machine allows, and third
    the sweep over these.
    """
    count = work.sweep_designs
    alone, beside, swept = [], [], []
    others: list[float] = []

    def watched(deed: Callable[[], float]) -> float:
        """Its result; whoever else is at work lengthens what two processes do, and it alone."""
        before, began = _taken(), WALL()
        result = deed()
        others.append((_taken() - before) / (WALL() - began))
        return result

    with tempfile.TemporaryDirectory() as folder:
        study = study_file(Path(folder), CORES * count)
        for k in range(work.sweep_rounds):
            out = Path(folder) / f"out{k}"
            before = watched(lambda: bare(study, 1, count))
            swept.append(watched(lambda out=out: sweep_seconds(study, out) / count))
            beside.append(watched(lambda: bare(study, CORES, count)))
            alone.append(0.5 * (before + watched(lambda: bare(study, 1, count))))
    for name, values in (("alone", alone), ("beside", beside), ("swept", swept)):
        notes.tell(f"{name}, of a core a design", values, "s")
    notes.tell("taken by others and by the host", others, "cores")
    one, two, own = (np.array(values) for values in (alone, beside, swept))
    return {
        "sweep_efficiency": float(np.median(one / own)),
        "sweep_efficiency_of_machine": float(np.median(one / two)),
        "sweep_efficiency_of_program": float(np.median(two / own)),
    }


def study_file(folder: Path, designs: int) -> Path:
    """A study of so many designs of the README's machine."""
    path = folder / "study.toml"
    path.write_text(_STUDY.format(base=DESIGN.resolve().as_posix(), designs=designs))
    return path


def bare(study: Path, processes: int, count: int) -> float:
    """Mean wall time in s of a design in processes that do so many each, side by side."""
    command = [sys.executable, "-P", "-c", _BARE, str(study)]
    started = [
        subprocess.Popen(
            [*command, str(first), str(CORES), str(count)],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            text=True,
        )
        for first in range(processes)
    ]
    pipes = [(one.stdin, one.stdout) for one in started]
    for _, told in pipes:
        assert told is not None
        assert told.readline() == "ready\n"
    for asked, _ in pipes:
        assert asked is not None
        asked.write("go\n")
        asked.flush()
    times = [float(one.communicate()[0]) for one in started]
    assert all(one.returncode == 0 for one in started)
    return float(np.mean(times)) / count


def sweep_seconds(study: Path, out: Path) -> float:
    """Wall time of the command."""
    command = [sys.executable, "-P", "-m", "lamwright.app", "sweep", str(study), "--out", str(out)]
    command += ["--workers", str(CORES), "--no-pictures"]
    return seconds(lambda: subprocess.run(command, check=True, capture_output=True), WALL)


def _taken() -> float:
    """Processor time in s that others than this process and its children have taken so far."""
    if not _MACHINE.exists():
        return 0.0
    fields = _MACHINE.read_text().split("\n", 1)[0].split()[1:]
    busy = sum(int(fields[k]) for k in _AT_WORK) / os.sysconf("SC_CLK_TCK")
    own = os.times()
    return busy - own.user - own.system - own.children_user - own.children_system
