"""The store of a map's points: committed one by one, of one run, by one process."""

import os
import subprocess
import sys

import numpy as np
import pytest

from lamwright.app.map_store import STORE_FILE, PointRecord, PointStore
from lamwright.geometry.errors import LamwrightError

RUN = {"design": "abc", "grid of i_d": [0.0, 0.1, 1.0 / 3.0], "positions": 12}


def record(value):
    return PointRecord(np.full((4, 12), value), np.arange(6.0).reshape(2, 3))


def test_points_come_back_whole(tmp_path):
    """Every number of 64 bits, with its shape."""
    with PointStore(tmp_path, RUN) as store:
        assert store.points() == {}
        store.keep((3, 4), record(1.0 / 3.0))
    with PointStore(tmp_path, RUN) as store:
        ((node, kept),) = store.points().items()
    assert node == (3, 4)
    assert np.array_equal(kept.waves, record(1.0 / 3.0).waves)
    assert np.array_equal(kept.harvest, record(0.0).harvest)
    assert [path.name for path in tmp_path.iterdir()] == [STORE_FILE]


def test_a_killed_process_leaves_what_it_committed(tmp_path):
    """No close, no exit handler: the process is gone as by kill -9."""
    code = (
        "import os, signal, sys; sys.path[:0] = sys.argv[2:]\n"
        "from pathlib import Path\n"
        "from tests.app.test_map_store import RUN, record\n"
        "from lamwright.app.map_store import PointStore\n"
        "store = PointStore(Path(sys.argv[1]), RUN)\n"
        "for k in range(5): store.keep((k, 0), record(float(k)))\n"
        "os.kill(os.getpid(), signal.SIGKILL)\n"
    )
    ended = subprocess.run(
        [sys.executable, "-c", code, str(tmp_path), *sys.path],
        cwd=os.getcwd(),
        capture_output=True,
        check=False,
    )
    assert ended.returncode == -9, ended.stderr
    with PointStore(tmp_path, RUN) as store:
        points = store.points()
    assert sorted(points) == [(k, 0) for k in range(5)]
    assert points[4, 0].waves[0, 0] == 4.0


def test_another_run_is_refused_by_what_differs(tmp_path):
    """A store of another design or grid in the folder: one line that says which."""
    PointStore(tmp_path, RUN).__exit__(None, None, None)
    with pytest.raises(
        LamwrightError, match=r"map\.sqlite: holds points with another design and positions; give"
    ):
        PointStore(tmp_path, {**RUN, "design": "xyz", "positions": 13})


def test_a_store_in_use_is_refused(tmp_path):
    """Two runs into one folder would mix."""
    with (
        PointStore(tmp_path, RUN),
        pytest.raises(LamwrightError, match=r"map\.sqlite: in use by another run; wait"),
    ):
        PointStore(tmp_path, RUN)


def test_a_file_that_is_no_store_is_refused(tmp_path):
    """Never overwritten."""
    (tmp_path / STORE_FILE).write_bytes(b"something else of more than a header's length" * 40)
    with pytest.raises(LamwrightError, match=r"map\.sqlite: no store of a map: file is not a data"):
        PointStore(tmp_path, RUN)
