"""A study on a Dask cluster: scheduler and workers are started here, on the loopback."""

import os
import random
import shutil
import subprocess
import threading
import time
from pathlib import Path

import pytest
import study_deeds
from dask_processes import PATIENCE_S, cluster
from study_deeds import misbehaving, slept
from study_rows import plain_study
from study_stand_ins import evaluated, stand_in_tasks

from lamwright.app import study_cluster, study_cluster_worker
from lamwright.app.ledger import Ledger
from lamwright.app.study_cluster import ClusterPool
from lamwright.app.study_cluster_worker import carry_out
from lamwright.app.study_hire import PoolWishes, hired
from lamwright.app.study_pool import OverTime, PoolLost, TaskLost
from lamwright.app.study_run import carried_out
from lamwright.app.study_workers import LocalPool
from lamwright.app.version import version
from lamwright.geometry.errors import LamwrightError

LIMIT_S = 2.0


@pytest.fixture(scope="module")
def two_workers(tmp_path_factory):
    with cluster(tmp_path_factory.mktemp("dask"), 2) as made:
        yield PoolWishes(scheduler_file=made.file)


def test_a_worker_has_each_design_done_by_a_process_of_its_own(monkeypatch):
    """What happens on a cluster's worker, without a cluster: a crash, a hang, an error, results."""
    monkeypatch.setenv("PYTHONPATH", str(Path(study_deeds.__file__).parent))  # for its process
    try:
        assert carry_out(misbehaving, "a", LIMIT_S, version()) == "a done"
        with pytest.raises(TaskLost, match="its process ended without an answer"):
            carry_out(misbehaving, "die", LIMIT_S, version())
        with pytest.raises(OverTime, match=r"took longer than the 0\.3 s that a design may"):
            carry_out(misbehaving, "hang", 0.3, version())
        with pytest.raises(ValueError, match="broken off"):
            carry_out(misbehaving, "raise broken off", LIMIT_S, version())
        first = carry_out(slept, 0.0, LIMIT_S, version())
        assert first == carry_out(slept, 0.0, LIMIT_S, version()) != os.getpid()
    finally:
        study_cluster_worker.end_here()


def test_another_version_on_a_worker_ends_the_study():
    """A worker that comes later is not held to anything when the study connects."""
    with pytest.raises(PoolLost, match=r"lamwright \S+ is installed there, 9.9 here"):
        carry_out(misbehaving, "a", LIMIT_S, "9.9")


@pytest.mark.slow
def test_no_scheduler_is_one_line(monkeypatch, tmp_path):
    """Nobody listens at port 1; a file that is not there; an address that is none."""
    monkeypatch.setattr(study_cluster, "CONNECT_S", 0.5)
    with pytest.raises(LamwrightError) as unreachable:
        ClusterPool(misbehaving, PoolWishes(cluster="tcp://127.0.0.1:1"), LIMIT_S)
    said = str(unreachable.value)
    assert said.startswith("--cluster tcp://127.0.0.1:1: no scheduler can be used there: ")
    assert len(said.splitlines()) == 1
    with pytest.raises(LamwrightError, match=r"--cluster nowhere://x: no scheduler can be used"):
        ClusterPool(misbehaving, PoolWishes(cluster="nowhere://x"), LIMIT_S)
    missing = tmp_path / "scheduler.json"
    with pytest.raises(LamwrightError, match=r"scheduler.json: no such file; start: dask sched"):
        ClusterPool(misbehaving, PoolWishes(scheduler_file=missing), LIMIT_S)


class Versions:
    """A client of a cluster with versions as stated."""

    def __init__(self, worker_dask="1.0", python="3.11.7.final.0", lamwright=None):
        """By default all agree."""
        self._told = {
            "client": _told("1.0", "3.11.2.final.0"),
            "scheduler": _told("1.0", python),
            "workers": {"tcp://10.0.0.5:40001": _told(worker_dask, "3.11.7.final.0")},
        }
        self._lamwright = lamwright or version()

    def get_versions(self, check):
        """As Dask's."""
        return self._told

    def run(self, call, on_error):
        """As Dask's."""
        return {"tcp://10.0.0.5:40001": self._lamwright}


def _told(dask, python):
    return {"packages": {"dask": dask, "distributed": "1.0"}, "host": {"python": python}}


@pytest.mark.parametrize(
    ("client", "said"),
    [
        (Versions(worker_dask="0.9"), "worker tcp://10.0.0.5:40001 has dask 0.9, here is 1.0"),
        (Versions(python="3.12.1.final.0"), "the scheduler has Python 3.12, here is 3.11"),
        (
            Versions(lamwright="9.9"),
            f"worker tcp://10.0.0.5:40001 has lamwright 9.9; install lamwright {version()} there",
        ),
        (
            Versions(lamwright=ModuleNotFoundError("No module named 'lamwright'")),
            "worker tcp://10.0.0.5:40001 says: No module named 'lamwright'; "
            f"install lamwright {version()} there",
        ),
    ],
)
def test_versions_that_differ_are_one_line(client, said):
    """The first place that differs; patch versions of Python may."""
    study_cluster._check_versions(Versions(), "here")
    with pytest.raises(LamwrightError) as refused:
        study_cluster._check_versions(client, "--cluster tcp://10.0.0.5:8786")
    assert str(refused.value) == f"--cluster tcp://10.0.0.5:8786: {said}"


@pytest.mark.slow
def test_a_crash_a_hang_and_an_error_cost_their_own_task_alone(two_workers):
    """As on this machine: three of eight go wrong, and both workers are still there."""
    wishes = ["a", "die", "b", "hang", "c", "raise broken off", "d", "e"]
    with hired(misbehaving, two_workers, LIMIT_S) as pool:
        futures = {wish: pool.submit(wish) for wish in wishes}
        errors = {wish: future.exception(PATIENCE_S) for wish, future in futures.items()}
        assert pool.cores == 2
    told = {wish: type(error) for wish, error in errors.items() if error is not None}
    assert told == {"die": TaskLost, "hang": OverTime, "raise broken off": ValueError}
    assert futures["e"].result() == "e done"


@pytest.mark.slow
def test_a_stopped_pool_leaves_nobody_waiting(two_workers):
    """What is under way fails at once; the workers are free for the next."""
    with hired(slept, two_workers, LIMIT_S) as pool:
        futures = [pool.submit(1000.0) for _ in range(4)]
    for future in futures:
        assert isinstance(future.exception(PATIENCE_S), PoolLost)
    with pytest.raises(PoolLost, match="the scheduler is gone"):
        pool.submit(0.0)
    with hired(slept, two_workers, LIMIT_S) as pool:
        pool.submit(0.0).result(PATIENCE_S)


@pytest.mark.slow
def test_workers_killed_at_random_cost_no_design(tmp_path):
    """Five of them in sixty designs, each replaced by a new one: all sixty are done, each once."""
    chance = random.Random(8)
    tasks = stand_in_tasks(["sleep 0.1"] * 60)
    rows = []
    with cluster(tmp_path, 2) as made, Ledger.open(tmp_path, plain_study()) as ledger:

        def kill_five():
            for k in range(5):
                while len(rows) < 8 * k + 4:
                    time.sleep(0.02)
                time.sleep(0.5 * chance.random())
                made.workers[k].kill()
                made.add_worker()

        killer = threading.Thread(target=kill_five)
        with hired(evaluated, PoolWishes(scheduler_file=made.file), 60.0) as pool:
            killer.start()
            done = carried_out(tasks, ledger, pool, lambda row, _: rows.append(row))
        killer.join()
        assert [row.outcome for row in done] == ["done"] * 60
        assert [row.figures for row in done] == [evaluated(task).figures for task in tasks]
        assert ledger.count() == 60
        ledger.check()


@pytest.mark.slow
def test_a_scheduler_that_is_gone_ends_the_run_and_loses_nothing(tmp_path):
    """One line; the ledger has what was told, and this machine's cores do the rest."""
    tasks = stand_in_tasks(["sleep 0.2"] * 20)
    rows = []

    def take(row, is_known):
        rows.append(row)
        if len(rows) == 6:
            made.scheduler.kill()

    with Ledger.open(tmp_path, plain_study()) as ledger:
        with cluster(tmp_path, 2) as made:
            wishes = PoolWishes(scheduler_file=made.file)
            with (
                pytest.raises(PoolLost, match=r"scheduler.json: the scheduler is gone$"),
                hired(evaluated, wishes, 60.0) as pool,
            ):
                carried_out(tasks, ledger, pool, take)
        assert 6 <= ledger.count() < 20
        with LocalPool(evaluated, 2, 60.0) as here:
            assert {row.outcome for row in carried_out(tasks, ledger, here)} == {"done"}
        ledger.check()


@pytest.mark.slow
def test_tls_lets_in_who_has_a_certificate(tmp_path):
    """The scheduler's port takes no connection without one; with the three files it works."""
    if shutil.which("openssl") is None:
        pytest.skip("makes its certificates with openssl")
    ca, cert, key = _certificates(tmp_path)
    options = ("--protocol", "tls", "--tls-ca-file", str(ca))
    options += ("--tls-cert", str(cert), "--tls-key", str(key))
    with cluster(tmp_path, 1, options) as made:
        with_tls = PoolWishes(scheduler_file=made.file, tls_ca=ca, tls_cert=cert, tls_key=key)
        with hired(misbehaving, with_tls, LIMIT_S) as pool:
            assert pool.submit("a").result(PATIENCE_S) == "a done"
        with (
            pytest.raises(LamwrightError, match="no scheduler can be used there"),
            hired(misbehaving, PoolWishes(scheduler_file=made.file), LIMIT_S),
        ):
            pass


def _certificates(folder: Path) -> tuple[Path, Path, Path]:
    """Of an authority made here, and one that it signed, with its key."""
    ca, ca_key, cert, key, request = (
        folder / name for name in ("ca.pem", "ca_key.pem", "cert.pem", "key.pem", "request.pem")
    )
    rsa = ("-newkey", "rsa:2048", "-nodes")
    signed = ("-CA", ca, "-CAkey", ca_key, "-CAcreateserial", "-days", "2")
    for command in (
        (
            "req",
            "-x509",
            *rsa,
            "-days",
            "2",
            "-subj",
            "/CN=authority",
            "-keyout",
            ca_key,
            "-out",
            ca,
        ),
        ("req", *rsa, "-subj", "/CN=127.0.0.1", "-keyout", key, "-out", request),
        ("x509", "-req", "-in", request, *signed, "-out", cert),
    ):
        subprocess.run(["openssl", *map(str, command)], check=True, capture_output=True)
    return ca, cert, key
