"""A whole flux map from the shell's point of view: all cores, all points committed."""

import json
import subprocess
import sys
import tempfile
from pathlib import Path

from .ours import DESIGN
from .timing import Notes
from .workload import Workload

# The map alone, without the chapters that are made of it; wall by phase, and processor time of this
# process and of its workers, which have ended and been waited for.
_MAP = """
import json, os, sys
from lamwright.app import map_chapters
from lamwright.app.map_grid import GridWishes
from lamwright.app.map_run import map_design
map_chapters.CHAPTERS = ()
design, out, tolerance, side, positions = sys.argv[1:]
wishes = GridWishes((int(side), int(side)), positions=int(positions))
report = map_design(design, out, wishes, tolerance=tolerance)
print(json.dumps({**report.seconds, "processors": sum(os.times()[:4])}))
"""
UNTIL_KNOWN = ("start", "mesh", "flux map")  # phases until the last point is committed


def map_seconds(work: Workload, notes: Notes) -> dict[str, float]:
    """Wall time until the map of the README's design is whole, on all cores, and the whole run's.

    15 x 15 currents to 1.25 x the most, 12 positions each, at `normal`, iron-loss coefficients
    included; the whole run adds its error bars and files, not the chapters. Third the processor
    time of all processes together, imports included.
    """
    side, positions = max(3, work.map_side), max(6, work.map_positions)
    tolerance = "normal" if work.scale <= 1.0 else "coarse"
    with tempfile.TemporaryDirectory() as folder:
        out = str(Path(folder) / "out")
        options = [str(DESIGN), out, tolerance, str(side), str(positions)]
        run = subprocess.run(
            [sys.executable, "-P", "-c", _MAP, *options], check=True, capture_output=True, text=True
        )
    seconds = json.loads(run.stdout)
    known = sum(seconds[phase] for phase in UNTIL_KNOWN)
    each = 1e3 * seconds["flux map"] / (side * side * positions)
    notes.say(f"{side} x {side} x {positions}: {each:.3g} ms of wall time a position")
    return {
        "map_seconds": known,
        "map_seconds_with_files": seconds["total"],
        "map_seconds_of_processors": seconds["processors"],
    }
