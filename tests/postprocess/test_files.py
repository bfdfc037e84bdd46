"""Files of results: whole or none, also when a run is stopped."""

import math

import pytest

from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.files import (
    VERDICT_FILE,
    json_text,
    prepared_folder,
    staged,
)


@pytest.mark.parametrize("value", [math.nan, math.inf])
def test_json_refuses_what_is_no_number(value):
    """JSON has no NaN; a file with one is unreadable elsewhere, so it is never written."""
    with pytest.raises(ValueError, match="not JSON compliant"):
        json_text({"torque_nm": value})


def test_staged_files_appear_together_at_the_end(tmp_path):
    """While the block runs the folder shows nothing; afterwards the files, nothing else."""
    with staged(tmp_path) as stage:
        write_text(stage / VERDICT_FILE, "{}")
        write_text(stage / "torque.csv", "1")
        assert [path.name for path in tmp_path.iterdir() if not path.name.startswith(".")] == []
    assert sorted(path.name for path in tmp_path.iterdir()) == ["torque.csv", VERDICT_FILE]


@pytest.mark.parametrize("stop", [KeyboardInterrupt, OSError])
def test_a_stopped_run_leaves_what_was_there(tmp_path, stop):
    """Interrupted or failed before its end, a run changes nothing in the folder."""
    write_text(tmp_path / VERDICT_FILE, "old")
    with pytest.raises(stop):
        _stopped_run(tmp_path, stop)
    assert [path.name for path in tmp_path.iterdir()] == [VERDICT_FILE]


def _stopped_run(folder, stop):
    with staged(folder) as stage:
        write_text(stage / "torque.csv", "1")
        raise stop


def test_an_old_verdict_goes_before_new_files_come(tmp_path):
    """A verdict must never stand beside files of another run: none here, so it is gone."""
    write_text(tmp_path / VERDICT_FILE, "old")
    with staged(tmp_path) as stage:
        write_text(stage / "lamination.dxf", "new")
    assert [path.name for path in tmp_path.iterdir()] == ["lamination.dxf"]


def test_folder_is_made_with_its_parents(tmp_path):
    """A new path of several levels is a usual way to name results."""
    folder = tmp_path / "a" / "b"
    assert prepared_folder(folder) == folder
    assert list(folder.iterdir()) == []


def test_a_file_is_no_folder(tmp_path):
    """One line that says what is wrong with --out, also where a parent is the file."""
    file = tmp_path / "file"
    file.write_text("")
    with pytest.raises(LamwrightError, match="file: is a file; accepted a folder"):
        prepared_folder(file)
    with pytest.raises(LamwrightError, match="cannot be written: "):
        prepared_folder(file / "below")
