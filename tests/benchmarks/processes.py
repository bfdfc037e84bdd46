"""What needs processes of its own: two cores, a worker's memory, a whole design."""

import math
import subprocess
import sys
import tempfile
from pathlib import Path

from lamwright.app.desk import Desk
from lamwright.app.pool import Worker
from lamwright.solver.chains import OperatingPoint

from .ours import DESIGN, Case, case
from .timing import WALL, Notes, ratio, seconds
from .workload import Workload

MIB = 1024.0  # KiB
STEP_EL = math.radians(2.0)

# One assessment to import everything and make all files once, then the one that is timed: wall,
# and processor time of this process and of its workers, which have ended and been waited for.
# A worker writes the DXF; its library is imported here so that the worker, a copy, has it too.
_WITHOUT_START = """
import os, sys, time
import ezdxf
from lamwright.app.run import assess
design, out, pictures = sys.argv[1:]
assess(design, out, pictures=pictures == "pictures")
began, used = time.perf_counter(), sum(os.times()[:4])
assess(design, out, pictures=pictures == "pictures")
print(time.perf_counter() - began, sum(os.times()[:4]) - used)
"""


def core_efficiency(work: Workload, notes: Notes) -> dict[str, float]:
    """Wall time of one chain on one worker over that of two chains on two workers."""
    ours = case(work.scale)
    workers = [_ready(ours) for _ in range(2)]
    chain = _chain(ours, work.core_points)

    def on(chosen: list[Worker[Desk]]) -> None:
        for future in [worker.submit(Desk.chain, chain, None) for worker in chosen]:
            future.result()

    def one_by_one() -> None:
        # Each of the two takes its turn alone, so that a slow core counts on both sides.
        on(workers[:1])
        on(workers[1:])

    def both_twice() -> None:
        on(workers)
        on(workers)

    name = "core_efficiency"
    try:
        on(workers)  # imports and factors
        return {name: ratio(name, one_by_one, both_twice, work.core_rounds, notes, WALL)}
    finally:
        for worker in workers:
            worker.stop()


def peak_memory_mib(work: Workload, notes: Notes) -> dict[str, float]:
    """Greatest resident memory of a worker that solves a chain on a fine mesh."""
    ours = case(work.memory_scale)
    worker = _ready(ours)
    try:
        worker.submit(Desk.chain, _chain(ours, 3), None).result()
        peak = _peak_kib(worker.pid) / MIB
    finally:
        worker.stop()
    notes.say(f"{ours.unknowns} unknowns, three positions, each with its factor as far as kept")
    return {"peak_memory_mib": peak}


def design_seconds(work: Workload, notes: Notes) -> dict[str, float]:
    """Wall time of the README's design in a warm process, and as a command from the shell.

    Both without pictures; the last figure is the first with them. Third the processor time that
    the first takes, all processes together: half of it is what two idle cores cannot go below.
    """
    with tempfile.TemporaryDirectory() as folder:
        out = str(Path(folder) / "out")
        python = [sys.executable, "-P"]
        in_process = [*python, "-c", _WITHOUT_START, str(DESIGN), out]
        command = [*python, "-m", "lamwright.app", "assess", str(DESIGN), "--out", out]
        warm, cold, processor, drawn = [], [], [], []
        for _ in range(work.design_rounds):
            wall, used = map(float, _output([*in_process, "none"]).split())
            warm.append(wall)
            processor.append(used)
            cold.append(seconds(lambda: _output([*command, "--no-pictures"]), WALL))
            drawn.append(float(_output([*in_process, "pictures"]).split()[0]))
    notes.tell("without start-up", warm, "s")
    notes.tell("with start-up", cold, "s")
    notes.tell("without start-up, pictures drawn", drawn, "s")
    notes.tell("processors' time without start-up, workers' imports included", processor, "s")
    middle = work.design_rounds // 2
    return {
        "design_seconds": sorted(warm)[middle],
        "design_seconds_with_start": sorted(cold)[middle],
        "design_seconds_of_processors": sorted(processor)[middle],
        "design_seconds_with_pictures": sorted(drawn)[middle],
    }


def _ready(ours: Case) -> Worker[Desk]:
    worker = Worker(Desk)
    worker.submit(Desk.take_model, ours.model)
    return worker


def _chain(ours: Case, count: int) -> list[OperatingPoint]:
    """Positions at rated current, 50 degrees from the d axis."""
    i_d, i_q = ours.currents(50.0)
    step = STEP_EL / ours.section.pole_pairs
    return [OperatingPoint(i_d, i_q, k * step) for k in range(count)]


def _peak_kib(pid: int) -> float:
    """Greatest resident memory of a process, in KiB.

    From the process's own page (Linux). `resource.getrusage` of a child would also count what its
    parent held when it was started (measured: it never falls below the parent's).
    """
    for line in Path(f"/proc/{pid}/status").read_text().splitlines():
        if line.startswith("VmHWM:"):
            return float(line.split()[1])
    raise RuntimeError("this system does not tell a process's greatest memory")


def _output(command: list[str]) -> str:
    return subprocess.run(command, check=True, capture_output=True, text=True).stdout
