"""A flux map from design to folder: its torque two ways, what is kept, what ends it cleanly."""

import json
import math
import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from lamwright.app import map_chapters
from lamwright.app.map_grid import GridWishes
from lamwright.app.map_run import map_design
from lamwright.app.map_store import STORE_FILE
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.coenergy_surface import coenergy_surface, incremental
from lamwright.postprocess.figure_errors import NOT_ESTIMATED
from lamwright.postprocess.flux_map import linkage_torque, mean_torque
from lamwright.postprocess.map_files import read_flux_map

DESIGNS = Path(__file__).parents[2] / "designs"
DEMO = DESIGNS / "demo_24s4p_arc.toml"
SMALL = GridWishes(points=(4, 4), positions=7)
NEWTON = 1e-5  # of the greatest linkage: ten times what Newton's tolerance leaves


@pytest.fixture(scope="module")
def without_chapters():
    """The map alone: each chapter has tests of its own."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(map_chapters, "CHAPTERS", ())
        yield


@pytest.fixture(scope="module")
def mapped(tmp_path_factory, without_chapters):
    """A small coarse map of the demo by two workers: report, folder and what progress told."""
    folder = tmp_path_factory.mktemp("map")
    told = []
    report = map_design(
        DEMO,
        folder,
        SMALL,
        tolerance="coarse",
        workers=2,
        progress=lambda phase, share: told.append((phase, share)),
    )
    return report, folder, told


def figure(report, key):
    return next(figure.value for figure in report.figures if figure.key == key)


def test_folder_holds_whole_files_and_the_store(mapped):
    """Everything promised, nothing hidden or half done; the JSON says what was returned."""
    report, folder, _ = mapped
    names = {path.name for path in folder.iterdir()}
    assert {
        "map.nc",
        "map.csv",
        "map_means.csv",
        "map.mat",
        "map.json",
        "map.png",
        STORE_FILE,
    } <= names
    assert not [name for name in names if name.startswith(".")]
    record = json.loads((folder / "map.json").read_text())
    assert record["map_points_solved"] == 16
    assert record["rated_torque_nm"] == figure(report, "rated_torque_nm")
    assert record["rated_torque_nm_error"] > 0.0
    assert record["winding_temperature_c"] == 100.0
    # Every figure has an error or a reason: nothing is left to the last resort.
    keys = {f.key for f in report.figures}
    given = {key for key in keys if f"{key}_error" in record}
    assert given | set(record["errors_not_given"]) == keys
    assert NOT_ESTIMATED not in record["errors_not_given"].values()


def test_progress_tells_the_share_done(mapped):
    """Every point moves it on; it never goes back and ends below 1."""
    shares = [share for _, share in mapped[2]]
    assert shares == sorted(shares)
    assert len({share for phase, share in mapped[2] if phase == "flux map"}) == 17
    assert shares[-1] < 1.0


def test_torque_of_the_map_is_maxwells(mapped):
    """Issue: 0.5 % of the greatest torque at every pair of currents; here on the coarsest mesh.

    Seven positions let the seventh slot harmonic through; six, the third, made it 2 %.
    """
    flux_map = read_flux_map(mapped[1] / "map.nc")
    mean = mean_torque(flux_map)
    assert linkage_torque(flux_map) == pytest.approx(mean, abs=5e-3 * np.abs(mean).max())
    assert mean.max() > 15.0


@pytest.fixture(scope="module")
def again(mapped):
    """A second run into the folder, with a chapter that cannot be; the map before it."""

    def unable(mapped, stage):
        raise LamwrightError("the supply reaches no torque")

    before = read_flux_map(mapped[1] / "map.nc")
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(map_chapters, "CHAPTERS", (("drive", unable),))
        report = map_design(DEMO, mapped[1], SMALL, tolerance="coarse", workers=1)
    return report, before


def test_a_second_run_solves_nothing(mapped, again):
    """All points are in the store; the map is the same to the last bit."""
    report, folder, _ = mapped
    again, before = again
    assert figure(again, "map_points_solved") == 0
    assert figure(again, "map_points_kept") == 16
    after = read_flux_map(folder / "map.nc")
    assert np.array_equal(before.psi_d, after.psi_d)
    assert figure(again, "rated_torque_nm") == figure(report, "rated_torque_nm")


def test_another_grid_in_the_folder_is_refused(mapped):
    """The store is of one map: one line says what differs, and nothing is lost."""
    with pytest.raises(LamwrightError, match="holds points with another grid of i_d"):
        map_design(DEMO, mapped[1], GridWishes((5, 4), positions=7), tolerance="coarse")
    assert (mapped[1] / "map.json").exists()


def test_a_chapter_that_cannot_be_is_named(again):
    """The map and the other chapters stand; the reason is told as not given."""
    report, _ = again
    assert report.not_given[-1] == "drive: the supply reaches no torque"
    assert figure(report, "rated_torque_nm") > 10.0


def test_a_folder_that_cannot_be_written_is_refused(tmp_path):
    """Before anything is solved."""
    (tmp_path / "file").write_text("")
    with pytest.raises(LamwrightError, match="file: is a file; accepted a folder"):
        map_design(DEMO, tmp_path / "file", SMALL)


def test_a_number_of_workers_that_cannot_be_is_refused(tmp_path):
    """Likewise."""
    with pytest.raises(LamwrightError, match="--workers 0: accepted 1 to 64"):
        map_design(DEMO, tmp_path, SMALL, workers=0)


def command(folder):
    code = "from lamwright.app import map_chapters, cli; map_chapters.CHAPTERS = (); cli.main()"
    options = ["--points", "6x6", "--positions", "6", "--tolerance", "coarse"]
    return [sys.executable, "-c", code, "map", str(DEMO), "--out", str(folder), *options]


@pytest.mark.slow
def test_killed_at_any_moment_it_goes_on(tmp_path, without_chapters):
    """Kill -9 of all its processes at random moments: committed points are never solved again.

    The store takes a point once only, so one that was solved again would end the run with an
    error; the last run's own count is held against what the store held before it. Points agree
    with those of an unbroken run to Newton's tolerance, as a chain that goes on starts anew.
    """
    chance, kept = random.Random(6), 0
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    kills = 0
    for _ in range(60):
        run = subprocess.Popen(
            command(tmp_path), env=environment, start_new_session=True, stderr=subprocess.PIPE
        )
        _wait_for_store(run, tmp_path)
        try:
            # More patience after each kill, so that it ends on a busy machine too.
            _, said = run.communicate(timeout=(4.0 + 2.0 * kills) * chance.random())
        except subprocess.TimeoutExpired:
            os.killpg(run.pid, signal.SIGKILL)
            run.communicate()
            kills += 1
            found = _kept(tmp_path)
            assert found >= kept
            kept = found
            continue
        assert run.returncode == 0, said
        break
    else:
        pytest.fail("never came to its end")
    record = json.loads((tmp_path / "map.json").read_text())
    assert kills > 0
    assert record["map_points_kept"] == kept
    assert record["map_points_solved"] == 36 - kept
    whole = map_design(
        DEMO, tmp_path / "whole", GridWishes((6, 6), positions=6), tolerance="coarse"
    )
    assert figure(whole, "map_points_solved") == 36
    broken = read_flux_map(tmp_path / "map.nc")
    unbroken = read_flux_map(tmp_path / "whole" / "map.nc")
    most = np.abs(unbroken.psi_d).max()
    assert broken.psi_d == pytest.approx(unbroken.psi_d, abs=NEWTON * most)
    assert broken.psi_q == pytest.approx(unbroken.psi_q, abs=NEWTON * most)


@pytest.mark.slow
def test_the_interrupt_key_ends_it_cleanly(tmp_path):
    """One line, exit code 130, no process left, the store kept."""
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    run = subprocess.Popen(
        command(tmp_path), env=environment, start_new_session=True, stderr=subprocess.PIPE
    )
    _wait_for_store(run, tmp_path)
    time.sleep(4.0)
    os.killpg(run.pid, signal.SIGINT)
    _, said = run.communicate(timeout=30.0)
    assert run.returncode == 130, said
    assert b"Traceback" not in said
    assert b"interrupted; the points so far are kept" in said
    with pytest.raises(ProcessLookupError):
        os.killpg(run.pid, 0)
    assert 0 <= _kept(tmp_path) < 36


def _wait_for_store(run, folder):
    """Until this run has opened the store: its lock makes a new log of it."""
    log = folder / f"{STORE_FILE}-wal"
    began = time.time()
    while run.poll() is None and not (log.exists() and log.stat().st_mtime >= began - 1.0):
        time.sleep(0.05)


def _kept(folder):
    import sqlite3

    if not (folder / STORE_FILE).exists():
        return 0
    file = sqlite3.connect(folder / STORE_FILE)
    try:
        return file.execute("select count(*) from point").fetchone()[0]
    except sqlite3.OperationalError:  # killed before there were tables
        return 0
    finally:
        file.close()


@pytest.mark.slow
@pytest.mark.parametrize("name", ["demo_36s4p_magnet", "demo_36s6p_arc", "gallery/lift_27s6p"])
def test_torque_two_ways_on_other_machines(name, tmp_path, without_chapters):
    """With magnets, with other poles and with unlike halves: 0.5 % of the greatest torque."""
    map_design(DESIGNS / f"{name}.toml", tmp_path, GridWishes((4, 5)))
    flux_map = read_flux_map(tmp_path / "map.nc")
    mean = mean_torque(flux_map)
    assert linkage_torque(flux_map) == pytest.approx(mean, abs=5e-3 * np.abs(mean).max())
    assert math.isfinite(float(incremental(coenergy_surface(flux_map), 0.0, 0.0)[0]))
