"""Hostile drawings of a rotor: one clear line each, within 10 s of the processor and 1 GiB.

The limits are the system's own (`resource`), set on a process for each file; who breaks one is
killed by it, or fails with a memory error, and says no line.
"""

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from hostile_drawings import HOSTILE, LARGE, OVERHEAD, SMALL

ROOT = Path(__file__).parent.parent.parent
DESIGN = ROOT / "designs" / "demo_24s4p_arc.toml"
LONGEST = 420  # characters of a line
QUICK = (
    "empty",
    "garbage",
    "cut_in_entities",
    "number_nan",
    "near_overflow",
    "spline_knots_nan",
    "ellipse_nan",
    "nested_1000",
    "block_in_itself",
    "unit_inches",
)
# What some lines must say, of the supplier's reader; the others name the library's own reason.
TEXTS = {
    "empty": "the file is empty",
    "garbage": "not a readable DXF file",
    "cut_in_entities": "not a readable DXF file",
    "number_nan": "CIRCLE with a coordinate that is no number",
    "near_overflow": "CIRCLE more than 10 km from the drawing's origin",
    "spline_knots_nan": "SPLINE with a coordinate that is no number",
    "ellipse_nan": "ELLIPSE with a coordinate that is no number",
    "ellipse_flat": "ELLIPSE without a width",
    "nested_1000": "blocks nested more than 8 deep",
    "block_in_itself": "blocks nested more than 8 deep",
    "unit_inches": "state --outline-unit-mm 1 if that is its unit",
    "a_thousand_times_small": "state --outline-unit-mm 1000",
    "two_hundred_megabytes": "file too large",
    "rows_of_nothing": "blocks inserted",
    "empty_blocks_by_hundreds": "blocks inserted",
}


def told(names, folder):
    """What each file is refused with, by the supplier's reader and the drawn rotor's."""
    words = [sys.executable, "-m", "hostile_drawings", str(DESIGN), str(folder), *names]
    run = subprocess.run(
        words,
        capture_output=True,
        text=True,
        cwd=ROOT,
        check=True,
        env=os.environ
        | dict.fromkeys(OVERHEAD, "1")
        | {"PYTHONPATH": os.pathsep.join(["tests", os.environ.get("PYTHONPATH", "")])},
    )
    return json.loads(run.stdout)


def check(names, folder):
    lines = told(names, folder)
    assert set(lines) == set(names)
    for name, pair in lines.items():
        for line in pair:
            assert not line.startswith(("TRACEBACK", "KILLED", "accepted")), f"{name}: {line}"
            assert "\n" not in line
            assert line.isprintable()
            assert 10 < len(line) < LONGEST, f"{name}: {line}"
        assert TEXTS.get(name, "") in pair[0], f"{name}: {pair[0]}"


def test_there_are_more_than_forty():
    """As issued."""
    assert len(HOSTILE) >= 40


def test_some_are_refused(tmp_path):
    """One of each kind, small."""
    check(QUICK, tmp_path)


@pytest.mark.slow
def test_all_small_ones_are_refused(tmp_path):
    """Files of up to 2 MB."""
    check([name for name in SMALL if name not in QUICK], tmp_path)


@pytest.mark.slow
@pytest.mark.parametrize("name", LARGE)
def test_large_ones_are_refused(name, tmp_path):
    """Files that would take minutes or all memory if they were followed to their end."""
    check([name], tmp_path)
