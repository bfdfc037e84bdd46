"""The command `sweep` from outside, whole processes: killed, interrupted, without room.

Where a test says nothing else, the evaluation is a stand-in that takes 30 ms, so that what is
tested is the run around it.
"""

import os
import random
import signal
import subprocess
import sys
import time
from contextlib import contextmanager
from pathlib import Path

import pytest
import study_stand_ins
from click.testing import CliRunner
from dask_processes import cluster

from lamwright.app import evaluation
from lamwright.app.cli import main
from lamwright.app.ledger import Ledger
from lamwright.geometry.errors import LamwrightError

DESIGNS = Path(__file__).parents[2] / "designs"
PATIENCE_S = 120.0
STAND_IN = "from study_stand_ins import main; main()"
REAL = "from lamwright.app.cli import main; main(prog_name='lamwright')"


@pytest.fixture
def study(tmp_path):
    """300 designs of the demo."""
    return _study(tmp_path, 30)


def _study(folder, gaps):
    path = folder / "study.toml"
    path.write_text(
        f"""
        name = "gap by position"
        base = "{(DESIGNS / "demo_24s4p_arc.toml").as_posix()}"
        [[vary]]
        key = "rotor.gap_mm"
        least = 0.3
        most = {0.3 + 0.01 * (gaps - 1):.2f}
        step = 0.01
        [[vary]]
        key = "rotor.barrier[1].depth_mm"
        least = 3.2
        most = 4.1
        step = 0.1
        [[goal]]
        figure = "torque_nm"
        sense = "most"
        """
    )
    return path


@contextmanager
def _sweep(study, out, *options, code=STAND_IN):
    """The command in a process group of its own; killed at the end of the block."""
    tests = str(Path(study_stand_ins.__file__).parent)
    paths = [tests, *(path for path in sys.path if path and path != tests)]
    command = [
        sys.executable,
        "-c",
        code,
        "sweep",
        str(study),
        "--out",
        str(out),
        "--no-pictures",
        *options,
    ]
    with subprocess.Popen(
        command,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
        env={**os.environ, "PYTHONPATH": os.pathsep.join(paths)},
    ) as run:
        try:
            yield run
        finally:
            if run.poll() is None:
                os.killpg(run.pid, signal.SIGKILL)


def _ended(study, out, *options, code=STAND_IN):
    """Exit code and what was said."""
    with _sweep(study, out, *options, code=code) as run:
        said, told = run.communicate(timeout=PATIENCE_S)
    return run.returncode, said, told


def _count(out):
    """Rows, read while another process may write."""
    try:
        with Ledger.read(out) as ledger:
            return ledger.count()
    except LamwrightError:  # not made yet
        return 0


def _until(condition):
    ends = time.monotonic() + PATIENCE_S
    while not condition():
        assert time.monotonic() < ends
        time.sleep(0.01)


def _table(out):
    """All rows without what differs from run to run; each hash once, the file sound."""
    with Ledger.read(out) as ledger:
        ledger.check()
        rows = ledger.rows()
        files = {row.hash: ledger.design(row.number) for row in rows}
    same = ("values", "outcome", "reason", "stage", "passes", "figures", "errors")
    same += ("tolerance", "effort", "version", "origin")
    table = {row.hash: [getattr(row, name) for name in same] for row in rows}
    assert len(table) == len(rows)
    return table, files


def _faults(told):
    """What is said on stderr beside the progress that a busy machine has time for."""
    return [line for line in told.splitlines() if not line.startswith("sweep: ")]


def _group_is_gone(leader):
    try:
        os.killpg(leader, 0)
    except ProcessLookupError:
        return True
    return False


def test_a_sweep_is_told_and_repeated_without_computing(tmp_path, monkeypatch):
    """Counts, the best with its values, where to look on; the second time all is known."""
    monkeypatch.setattr(evaluation, "evaluate", study_stand_ins.drawn)
    out = tmp_path / "out"
    asked = ["sweep", str(_study(tmp_path, 2)), "--out", str(out), "--no-pictures"]
    first = CliRunner().invoke(main, [*asked, "--workers", "1"])
    assert first.exit_code == 0, first.stderr
    assert first.stderr.splitlines()[-1].startswith("sweep: 20/20  ")
    assert "gap by position: 20 of 20 designs" in first.stdout
    assert "\n20 designs computed in " in first.stdout
    before = _table(out)
    second = CliRunner().invoke(main, asked)
    assert second.exit_code == 0
    assert "\n0 designs computed in " in second.stdout
    assert ", 20 were known before\n" in second.stdout
    assert _table(out) == before


def test_the_interrupt_key_ends_it_in_one_line_and_keeps_what_is_finished(study, tmp_path):
    """The key reaches the whole group; exit code 130, no process left, the rows are there."""
    out = tmp_path / "out"
    with _sweep(study, out, "--workers", "2") as run:
        _until(lambda: _count(out) > 5)
        os.killpg(run.pid, signal.SIGINT)
        said, told = run.communicate(timeout=PATIENCE_S)
        _until(lambda: _group_is_gone(run.pid))
    assert (run.returncode, said) == (130, "")
    line = "interrupted; what is finished is kept: the same command goes on from there"
    assert _faults(told) == [line]
    assert len(_table(out)[0]) > 5


@pytest.mark.slow
def test_workers_end_with_a_sweep_that_is_killed_alone(study, tmp_path):
    """Kill -9 of the first process of the group: nobody is left to work on."""
    out = tmp_path / "out"
    with _sweep(study, out, "--workers", "2") as run:
        _until(lambda: _count(out) > 5)
        run.kill()
        run.wait()
        _until(lambda: _group_is_gone(run.pid))


@pytest.mark.slow
def test_killed_at_twenty_random_moments_it_ends_with_the_table_of_one_never_disturbed(tmp_path):
    """Kill -9 of the whole process group; in turn while it starts, and after new rows."""
    study, out = _study(tmp_path, 60), tmp_path / "out"
    chance = random.Random(8)
    counts = [0]
    for k in range(20):
        with _sweep(study, out, "--workers", "2") as run:
            if k % 2:
                _until(lambda: _count(out) > counts[-1])
                time.sleep(0.6 * chance.random())
            else:
                time.sleep(1.5 * chance.random())
            assert run.poll() is None
            os.killpg(run.pid, signal.SIGKILL)
            run.wait()
        counts.append(_count(out))
        assert counts[-1] >= counts[-2]
    assert counts[-1] < 600
    assert _ended(study, out, "--workers", "2")[0] == 0
    assert _ended(study, tmp_path / "undisturbed", "--workers", "2")[0] == 0
    assert len(_table(out)[0]) == 600
    assert _table(out) == _table(tmp_path / "undisturbed")


@pytest.mark.slow
def test_killed_in_the_middle_of_real_fields_the_table_is_the_same(tmp_path):
    """Six rotors computed in truth; killed three times, each time after another row."""
    study, out = _study(tmp_path, 2), tmp_path / "out"
    study.write_text(study.read_text().replace("most = 4.1", "most = 3.4"))
    for k in range(3):
        with _sweep(study, out, "--workers", "2", code=REAL) as run:
            _until(lambda k=k, run=run: _count(out) > k or run.poll() is not None)
            assert run.poll() is None
            os.killpg(run.pid, signal.SIGKILL)
            run.wait()
    assert 3 <= _count(out) <= 6
    assert _ended(study, out, "--workers", "2", code=REAL)[0] == 0
    assert _ended(study, tmp_path / "undisturbed", "--workers", "1", code=REAL)[0] == 0
    table, files = _table(out)
    assert len(table) == 6
    assert all(one[1] == "done" for one in table.values())
    assert (table, files) == _table(tmp_path / "undisturbed")


@pytest.mark.slow
def test_a_cluster_gives_the_table_of_this_machine(tmp_path):
    """Six rotors computed in truth by a scheduler's two workers, and by processes here."""
    study = _study(tmp_path, 2)
    study.write_text(study.read_text().replace("most = 4.1", "most = 3.4"))
    with cluster(tmp_path, 2) as made:
        far = ("--scheduler-file", str(made.file))
        code, said, told = _ended(study, tmp_path / "far", *far, code=REAL)
    assert (code, _faults(told)) == (0, [])
    assert "\n6 designs computed in " in said
    assert _ended(study, tmp_path / "here", "--workers", "2", code=REAL)[0] == 0
    assert _table(tmp_path / "far") == _table(tmp_path / "here")


@pytest.mark.slow
def test_workers_killed_at_random_cost_no_design(tmp_path):
    """Five of them in sixty designs, of which each may be lost once: all sixty have their row."""
    study, out = _study(tmp_path, 6), tmp_path / "out"
    chance = random.Random(8)
    with _sweep(study, out, "--workers", "2") as run:
        for k in range(5):
            _until(lambda k=k: _count(out) >= 8 * k + 2)
            time.sleep(0.1 * chance.random())
            os.kill(chance.choice(_workers(run.pid)), signal.SIGKILL)
        _, told = run.communicate(timeout=PATIENCE_S)
    assert (run.returncode, _faults(told)) == (0, [])
    assert _ended(study, tmp_path / "undisturbed", "--workers", "2")[0] == 0
    assert len(_table(out)[0]) == 60
    assert _table(out) == _table(tmp_path / "undisturbed")


def _workers(parent):
    """Processes that were spawned to work, by their number; one may just be replaced."""
    until = time.monotonic() + PATIENCE_S
    while time.monotonic() < until:
        told = Path(f"/proc/{parent}/task/{parent}/children")
        threads = told.parent.parent.glob("*/children")
        children = [int(pid) for file in threads for pid in file.read_text().split()]
        found = [pid for pid in children if b"spawn_main" in _command(pid)]
        if found:
            return found
        time.sleep(0.01)
    raise AssertionError("no worker")


def _command(pid):
    try:
        return Path(f"/proc/{pid}/cmdline").read_bytes()
    except OSError:
        return b""


@contextmanager
def _small_disk(folder, size):
    """A file system of that size in memory."""
    folder.mkdir()
    mount = ["mount", "-t", "tmpfs", "-o", f"size={size}", "tmpfs", str(folder)]
    if (
        os.name == "nt"
        or os.geteuid() != 0
        or subprocess.run(mount, capture_output=True).returncode
    ):
        pytest.skip("takes the right to mount a file system in memory")
    try:
        yield folder
    finally:
        subprocess.run(["umount", "-l", str(folder)], check=True)


@pytest.mark.slow
def test_a_full_disk_is_one_line_and_what_was_committed_is_intact(study, tmp_path):
    """A file system of 200 kB has no room for 300 rows with their designs; a larger one has."""
    with _small_disk(tmp_path / "disk", "200k") as disk:
        code, said, told = _ended(study, disk / "out", "--workers", "2")
        assert (code, said) == (2, "")
        assert _faults(told) == [
            f"{disk / 'out' / 'ledger.sqlite'}: the disk is full; finished designs in it are kept; "
            "free space and run the same command again"
        ]
        before = _table(disk / "out")[0]
        assert 5 < len(before) < 300
        subprocess.run(["mount", "-o", "remount,size=20m", str(disk)], check=True)
        assert _ended(study, disk / "out", "--workers", "2")[0] == 0
        after = _table(disk / "out")[0]
        assert len(after) == 300
        assert before == {key: after[key] for key in before}


@pytest.mark.slow
def test_a_folder_that_cannot_be_written_is_one_line(tmp_path):
    """Before anything, and after a run that left rows, which are still read."""
    study = _study(tmp_path, 2)
    with _small_disk(tmp_path / "disk", "20m") as disk:
        assert _ended(study, disk / "out", "--workers", "2")[0] == 0
        subprocess.run(["mount", "-o", "remount,ro", str(disk)], check=True)
        for out in (disk / "out", disk / "other"):
            code, said, told = _ended(study, out)
            assert (code, said) == (2, "")
            assert told == f"--out {out}: cannot be written: read-only file system\n"
        assert len(_table(disk / "out")[0]) == 20


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (("--workers", "0"), "--workers 0: accepted 1 to 256"),
        (("--time-limit", "0"), "--time-limit 0: accepted above 0, in s"),
        (
            ("--cluster", "tcp://a:1", "--scheduler-file", "f"),
            "--cluster and --scheduler-file name a scheduler; give one of them",
        ),
        (
            ("--cluster", "tcp://a:1", "--workers", "2"),
            "--workers is of this machine's; a cluster's workers are started beside it, see "
            "app/CLUSTER.md",
        ),
        (
            ("--cluster", "tls://a:1", "--tls-ca", "ca.pem"),
            "--tls-cert, --tls-key: not given; TLS takes all three files",
        ),
        (
            ("--tls-ca", "a", "--tls-cert", "b", "--tls-key", "c"),
            "--tls-ca: of no use without --cluster or --scheduler-file",
        ),
        (
            ("--cluster", "tls://a:1", "--tls-ca", "a", "--tls-cert", "b", "--tls-key", "c"),
            "--tls-ca a: no such file",
        ),
    ],
)
def test_options_that_do_not_fit_are_one_line(tmp_path, options, said):
    """Told before the study is read, and nothing is written."""
    asked = ["sweep", "study.toml", "--out", str(tmp_path / "out"), "--no-pictures", *options]
    done = CliRunner().invoke(main, asked)
    assert (done.exit_code, done.stderr) == (2, f"{said}\n")
    assert not (tmp_path / "out").exists()
