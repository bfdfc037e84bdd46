"""The ledger of a study: rows that outlive any end, one writer, readers at any time."""

import dataclasses
import os
import sqlite3
import subprocess
import sys

import pytest

from lamwright.app.evaluation import Evaluation
from lamwright.app.ledger import Ledger
from lamwright.app.ledger_file import LEDGER_FILE
from lamwright.app.study import Sampling, StudyLimit
from lamwright.geometry.errors import LamwrightError
from tests.study_rows import ANGLE, GAP, plain_evaluation, plain_study, plain_task


def filled(folder, count):
    """A ledger with the first designs in it, closed."""
    with Ledger.open(folder, plain_study()) as ledger:
        fill(ledger, count)
    return folder


def fill(ledger, count):
    """Record the first designs, those that are missing."""
    for k in range(1, count + 1):
        ledger.record(plain_task(k), plain_evaluation(k))


def broken_off(ledger, task, evaluation):
    """Record a row and a state together, and fail before the end."""
    with ledger.together():
        ledger.record(task, evaluation)
        ledger.keep_state(b"never")
        raise ZeroDivisionError


def test_a_row_comes_back_whole(tmp_path):
    """Values, figures and errors to the last bit, file, cards and drawings to the last byte."""
    third = dataclasses.replace(
        plain_evaluation(3), figures={"torque_nm": 1.0 / 3.0}, errors={"torque_nm": 1e-300}
    )
    with Ledger.open(tmp_path, plain_study()) as ledger:
        made = ledger.record(plain_task(3), third, "polish", 2)
        ledger.record(plain_task(5), plain_evaluation(5))
    with Ledger.read(tmp_path) as ledger:
        kept, rejected = ledger.rows()
        design = ledger.design(1)
        study = ledger.study
        ledger.check()
    assert kept == made
    assert dict(kept.values) == {ANGLE: 0.75, GAP: 0.4}
    assert dict(kept.figures) == {"torque_nm": 1.0 / 3.0}
    assert dict(kept.errors) == {"torque_nm": 1e-300}
    assert (kept.origin, kept.attempts, kept.passes, kept.outcome) == ("polish", 2, False, "done")
    assert (rejected.passes, rejected.reason) == (None, "rib 5 is thinner than the sheet")
    assert not rejected.figures
    assert design.text == plain_task(3).design_text
    assert design.files == {
        "cards/steel.toml": b"# a steel, invented\n",
        "slot.dxf": b"\x00\xff drawn",
    }
    assert (study.name, study.keys) == ("angle by gap", (ANGLE, GAP))
    assert study.limits == (("yield_margin", 1.5, None),)
    assert study.goals == (("torque_nm", "most"), ("torque_ripple_percent", "least"))


def test_a_design_has_one_row(tmp_path):
    """A known design keeps its row; one that failed gets the new outcome in its place."""
    with Ledger.open(tmp_path, plain_study()) as ledger:
        ledger.record(plain_task(1), Evaluation("failed", "no end after 60 s", "field"))
        ledger.record(plain_task(2), plain_evaluation(2))
        again = ledger.record(plain_task(1), plain_evaluation(1), attempts=2)
        same = ledger.record(plain_task(2), plain_evaluation(7))
        assert (again.number, again.outcome, again.attempts) == (1, "done", 2)
        assert same.figures["torque_nm"] == 2.0
        assert ledger.known(plain_task(9).hash) is None
        assert ledger.outcomes() == {"done": 2}


def test_a_killed_process_leaves_what_it_committed(tmp_path):
    """Gone as by kill -9: its rows are there, what was not committed is not, the lock is free."""
    code = (
        "import os, signal, sys; sys.path[:0] = sys.argv[2:]\n"
        "from pathlib import Path\n"
        "from tests.study_rows import plain_evaluation, plain_study, plain_task\n"
        "from lamwright.app.ledger import Ledger\n"
        "ledger = Ledger.open(Path(sys.argv[1]), plain_study())\n"
        "for k in range(1, 8): ledger.record(plain_task(k), plain_evaluation(k))\n"
        "with ledger.together():\n"
        "    ledger.record(plain_task(8), plain_evaluation(8))\n"
        "    os.kill(os.getpid(), signal.SIGKILL)\n"
    )
    ended = subprocess.run(
        [sys.executable, "-c", code, str(tmp_path), *sys.path],
        cwd=os.getcwd(),
        capture_output=True,
        check=False,
    )
    assert ended.returncode == -9, ended.stderr
    with Ledger.open(tmp_path, plain_study()) as ledger:
        ledger.check()
        assert [row.hash for row in ledger.rows()] == [plain_task(k).hash for k in range(1, 8)]


def test_readers_list_while_one_writes(tmp_path):
    """A reader sees each commit at once, also columns that came up after it was opened."""
    with Ledger.open(tmp_path, plain_study()) as writer, Ledger.read(tmp_path) as reader:
        assert reader.rows() == []
        assert reader.is_written
        for k in (5, 6, 7):
            writer.record(plain_task(k), plain_evaluation(k))
            assert len(reader.rows()) == reader.count() == k - 4
        assert reader.rows("torque_nm > 6")[0].figures["torque_nm"] == 7.0
        with pytest.raises(LamwrightError, match=r"in use by another program; .*; wait for it"):
            Ledger.open(tmp_path, plain_study())
    with Ledger.read(tmp_path) as reader:
        assert not reader.is_written


def test_another_study_is_refused_by_what_differs(tmp_path):
    """One line; a study that differs in the size of its sample goes on."""
    filled(tmp_path, 2)
    other = plain_study(limits=(StudyLimit("yield_margin", least=2.0),), tolerance="fine")
    with pytest.raises(LamwrightError) as refused:
        Ledger.open(tmp_path, other)
    assert str(refused.value) == (
        f"{tmp_path / LEDGER_FILE}: holds another study: its tolerance and limits differ; give "
        "another --out, or remove it"
    )
    larger = plain_study(sampling=Sampling("sobol", 512))
    with Ledger.open(tmp_path, larger) as ledger:
        assert ledger.count() == 2


def test_state_is_committed_with_its_rows_or_not_at_all(tmp_path):
    """An error within the block takes back both."""
    with Ledger.open(tmp_path, plain_study()) as ledger:
        with ledger.together():
            ledger.record(plain_task(1), plain_evaluation(1))
            ledger.keep_state(b"one")
        with pytest.raises(ZeroDivisionError):
            broken_off(ledger, plain_task(2), plain_evaluation(2))
        assert (ledger.state(), ledger.count(), ledger.state("other")) == (b"one", 1, None)
        # A column that was made in what was taken back is made again.
        extra = dataclasses.replace(plain_evaluation(3), figures={"rotor_mass_kg": 2.0})
        with pytest.raises(ZeroDivisionError):
            broken_off(ledger, plain_task(3), extra)
        assert ledger.record(plain_task(3), extra).figures == {"rotor_mass_kg": 2.0}


def test_a_full_disk_is_one_line_and_keeps_what_is_there(tmp_path):
    """The file may not grow, as on a full disk; what was committed stays, and it goes on later."""
    with Ledger.open(tmp_path, plain_study()) as ledger:
        pages = ledger._file.execute("pragma page_count").fetchone()[0]
        ledger._file.execute(f"pragma max_page_count = {pages + 1}")
        with pytest.raises(LamwrightError) as told:
            fill(ledger, 200)
        kept = ledger.count()
        assert "the disk is full; finished designs in it are kept; free space" in str(told.value)
        assert "\n" not in str(told.value)
        ledger.check()
        ledger._file.execute("pragma max_page_count = 1000000")
        fill(ledger, 200)
        assert ledger.count() == 200 > kept > 2


def test_a_damaged_file_is_one_line(tmp_path):
    """Overwritten in the middle, cut short, or no ledger at all."""
    path = filled(tmp_path, 400) / LEDGER_FILE
    whole = path.read_bytes()
    half = len(whole) // 2
    path.write_bytes(whole[:half] + b"\x55" * 8192 + whole[half + 8192 :])
    with Ledger.read(tmp_path) as ledger, pytest.raises(LamwrightError, match="is damaged"):
        ledger.check()
    study = whole.index(b"# a base design")
    path.write_bytes(whole[:study] + b"\x55" * 2000 + whole[study + 2000 :])
    with pytest.raises(LamwrightError, match=r"ledger\.sqlite: is damaged; .*copy it"):
        Ledger.read(tmp_path).check()
    path.write_bytes(b"not a database at all" * 100)
    with pytest.raises(LamwrightError, match=f"{LEDGER_FILE}: is no ledger; "):
        Ledger.read(tmp_path)
    path.unlink()
    sqlite3.connect(path).close()
    with pytest.raises(LamwrightError, match=f"{LEDGER_FILE}: is no ledger; "):
        Ledger.read(tmp_path)


def test_a_folder_without_ledger_is_told(tmp_path):
    """One line with what to give."""
    with pytest.raises(LamwrightError, match=r"holds no ledger\.sqlite; give the --out of a study"):
        Ledger.read(tmp_path)
