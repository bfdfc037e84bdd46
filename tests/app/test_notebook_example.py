"""`designs/notebook.py` does what it says, cell by cell; its last values show themselves."""

import ast
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
EXAMPLE = ROOT / "designs" / "notebook.py"
CELLS = EXAMPLE.read_text(encoding="utf-8").split("\n# %% ")
QUICK = 6  # of the cells after the head: what takes seconds
PATIENCE = 900.0  # s; nothing is measured


def ran(cells: list[str], folder: Path) -> str:
    """What a notebook would show: after each cell the page of its last value, told by its size.

    Run as a script of its own in a copy, so that `out` does not land in the checkout.
    """
    aside = shutil.ignore_patterns("pictures", "gallery", "measured")
    shutil.copytree(ROOT / "designs", folder / "designs", ignore=aside)
    lines = []
    for cell in cells:
        code = "# " + cell
        last = ast.parse(code).body[-1]
        if isinstance(last, ast.Expr) and isinstance(last.value, ast.Name):
            code += f"\nprint('shown', {last.value.id!r}, len({last.value.id}._repr_html_()))\n"
        lines.append(code)
    script = folder / "cells.py"
    script.write_text("\n".join(lines), encoding="utf-8")
    run = subprocess.run(
        [sys.executable, str(script)],
        cwd=folder,
        capture_output=True,
        text=True,
        timeout=PATIENCE,
        env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)},
    )
    assert run.returncode == 0, run.stderr
    return run.stdout


def test_it_is_invented_and_says_so():
    """House rule: demo data is invented, and a warning stands where rotors are designed."""
    assert "invented" in CELLS[0]
    assert "Rotors burst" in CELLS[0]


def test_the_first_cells_show_a_design_and_its_verdict(tmp_path):
    """The quick ones, in full. Torque of the demo as README has it, the mesh's 2 % apart."""
    told = ran(CELLS[1:QUICK], tmp_path)
    assert "shown machine " in told
    assert "shown verdict " in told
    torque = next(line for line in told.splitlines() if line.startswith("torque_nm: "))
    assert float(torque.split()[1]) == pytest.approx(11.61, rel=0.02)
    assert "broken.toml:28: rotor.gap_mm = -0.4: too small" in told
    assert (tmp_path / "out" / "notebook" / "verdict" / "verdict.json").is_file()


@pytest.mark.slow
def test_all_cells_run(tmp_path):
    """The map and the study too; the best rotors come in the order of their torque."""
    told = ran(CELLS[1:], tmp_path)
    assert "shown flux_map " in told
    torques = [float(line.split()[-3]) for line in told.splitlines() if line.endswith(" N m")][-3:]
    assert torques == sorted(torques, reverse=True)
    assert len(torques) == 3
