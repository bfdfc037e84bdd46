"""Lines `name: value`, each measured in this run: `python -m tests.benchmarks [NAME...]`."""

import argparse
import os
import sys
from pathlib import Path

from lamwright.app.threads import SINGLE_THREADED, hold_threads


def main() -> None:
    """Run the benchmarks named, or all."""
    os.environ.update(SINGLE_THREADED)  # before numpy is imported
    hold_threads()
    sys.path.insert(0, str(Path(__file__).parents[1]))  # as pytest does: stand-ins are found there
    from .registry import BENCHMARKS
    from .timing import ALOUD, SILENT
    from .workload import FULL, TINY

    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks", description=__doc__)
    parser.add_argument("names", nargs="*", metavar="NAME", help=", ".join(BENCHMARKS))
    parser.add_argument("--verbose", action="store_true", help="spread and times on stderr")
    parser.add_argument("--tiny", action="store_true", help="coarse and once: shows that it runs")
    options = parser.parse_args()
    unknown = sorted(set(options.names) - set(BENCHMARKS))
    if unknown:
        parser.error(f"unknown: {', '.join(unknown)}; accepted: {', '.join(BENCHMARKS)}")
    notes = ALOUD if options.verbose else SILENT
    for name in options.names or BENCHMARKS:
        if hasattr(os, "getloadavg"):  # not on Windows
            notes.say(f"{name}: load average {os.getloadavg()[0]:.1f} on {os.cpu_count()} cores")
        for key, value in BENCHMARKS[name](TINY if options.tiny else FULL, notes).items():
            print(f"{key}: {value:.4g}", flush=True)


if __name__ == "__main__":
    main()
