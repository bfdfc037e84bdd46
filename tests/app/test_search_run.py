"""A search with its ledger: end to end by a formula, killed and begun again, refused politely."""

import os
import signal
import subprocess
import sys
from dataclasses import replace

import pytest
from click.testing import CliRunner
from search_stand_in import SETTINGS, run, stood_in, study_file

from lamwright.app.cli import main
from lamwright.app.ledger import Ledger
from lamwright.app.search_run import ROUNDS
from lamwright.geometry.errors import LamwrightError

THICKNESS, ANGLE = "rotor.barrier[1].thickness_mm", "rotor.barrier[1].end_angle_deg"


def rows_of(folder):
    """All that does not depend on when it was computed, by hash."""
    with Ledger.read(folder) as ledger:
        assert ledger.count() == len({row.hash for row in ledger.rows()})
        return {
            row.hash: (row.values, row.outcome, row.reason, row.figures, row.passes, row.origin)
            for row in ledger.rows()
        }


def state_of(folder):
    with Ledger.read(folder) as ledger:
        return ledger.state("search"), ledger.state("polish")


@pytest.fixture(scope="module")
def whole(tmp_path_factory):
    """The study and the folder of a search that was never disturbed, with its report."""
    folder = tmp_path_factory.mktemp("whole")
    path = study_file(folder)
    with stood_in() as asked:
        report = run(path, folder / "out", replace(SETTINGS, polish=3))
    return path, folder / "out", report, asked


def test_the_front_holds_all_limits_and_nothing_betters_it(whole):
    """Of all rows of the ledger, polish included, by the definition of dominance.

    The limits are the study's mass and the base design's own: at most 15 % ripple.
    """
    _, folder, report, asked = whole
    with Ledger.read(folder) as ledger:
        rows = ledger.rows()
    assert len(rows) == len(asked) == report.computed
    held = [row for row in rows if row.passes]
    front = {row.hash for row in report.front}
    assert front
    for row in held:
        t, r = row.figures["torque_nm"], row.figures["torque_ripple_percent"]
        others = [(o.figures["torque_nm"], o.figures["torque_ripple_percent"]) for o in held]
        bettered = any(a >= t and b <= r and (a, b) != (t, r) for a, b in others)
        assert (row.hash in front) == (not bettered)
    torques = [row.figures["torque_nm"] for row in report.front]
    assert torques == sorted(torques, reverse=True)


def test_a_rejected_design_keeps_its_reason(whole):
    """Thick barriers far out have no room; the base design is the first that is tried."""
    _, folder, _, asked = whole
    rejected = [row for row in rows_of(folder).values() if row[1] == "rejected"]
    assert rejected
    assert all(row[2].startswith("barrier 1: no room at ") for row in rejected)
    assert asked[0] == pytest.approx({THICKNESS: 2.6, ANGLE: 16.3})


def test_the_polish_goes_through_the_ledger(whole):
    """Its designs are rows of their own origin, each member tried at most so many times."""
    _, folder, report, _ = whole
    polished = [row for row in rows_of(folder).values() if row[5] == "polish"]
    assert 0 < len(polished) <= 3 * ROUNDS
    assert len(report.polish.points) >= len(polished)
    assert all(line.tries <= ROUNDS for line in report.polish.lines)


def test_an_interrupted_search_ends_like_one_undisturbed(whole, tmp_path):
    """Ctrl-C in the first generation, in a later one and in the polish: rows and state bit by bit.

    Nothing is computed twice: all evaluations together are as many as the rows.
    """
    path, folder, _, asked = whole

    def end(at):
        def interrupt(count):
            if count == at:
                raise KeyboardInterrupt

        return interrupt

    total = 0
    for at in (3, 18, len(asked) - 28):
        with stood_in(end(at)) as some, pytest.raises(KeyboardInterrupt, match="goes on from"):
            run(path, tmp_path, replace(SETTINGS, polish=3))
        total += len(some)
    with stood_in() as some:
        run(path, tmp_path, replace(SETTINGS, polish=3))
    assert total + len(some) == len(asked)
    assert rows_of(tmp_path) == rows_of(folder)
    assert state_of(tmp_path) == state_of(folder)


def test_a_killed_search_ends_like_one_undisturbed(whole, tmp_path):
    """SIGKILL in the third generation: the next process goes on to the same state, bit by bit."""
    path, folder, _, _ = whole
    command = [sys.executable, "-m", "search_stand_in", path, tmp_path, "21"]
    env = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)}
    assert subprocess.run(command, check=False, env=env).returncode == -signal.SIGKILL
    assert 8 <= len(rows_of(tmp_path)) <= 21
    with stood_in():
        run(path, tmp_path, replace(SETTINGS, polish=3))
    assert state_of(tmp_path) == state_of(folder)
    assert rows_of(tmp_path) == rows_of(folder)


def test_a_finished_search_computes_nothing_again(whole):
    """The same command again: the same front, no design computed."""
    path, folder, report, _ = whole
    with stood_in() as asked:
        again = run(path, folder, replace(SETTINGS, polish=3))
    assert asked == []
    assert again.front == report.front
    assert again.computed == 0


def test_the_command_prints_front_end_and_next_commands(whole):
    """As a user sees it, without a terminal."""
    path, folder, report, _ = whole
    options = ["--population", "8", "--budget", "48", "--seed", "3", "--stall", "0"]
    with stood_in():
        done = CliRunner().invoke(
            main,
            ["search", str(path), "--out", str(folder), "--no-pictures", *options, "--polish", "3"],
        )
    assert done.exit_code == 0, done.output
    assert "front along torque_nm" in done.output
    assert "ended: the budget of 48 designs is spent" in done.output
    assert "polish: " in done.output
    assert f"{len(report.front)} on the front" in done.output
    assert "48 known before" not in done.output or report.computed == 48
    assert "a design back by: lamwright ledger" in done.output


@pytest.mark.parametrize(
    ("change", "text"),
    [
        ({"seed": 4}, "--seed 4: the search in this folder has 3; accepted 3, or another --out"),
        ({"population": 7}, "--population 7: accepted even numbers from 4"),
        ({"budget": 6}, "--budget 6: less than a generation; accepted from 8, or a smaller"),
    ],
)
def test_settings_that_do_not_fit_are_refused(whole, change, text):
    """One line each, before anything is computed."""
    path, folder, _, _ = whole
    with stood_in() as asked, pytest.raises(LamwrightError, match=text):
        run(path, folder, replace(SETTINGS, **change))
    assert asked == []


def test_a_polish_without_slopes_is_refused_before_the_search(whole, tmp_path):
    """Ripple alone has none: one line, no folder is made."""
    path = tmp_path / "ripple.toml"
    text = whole[0].read_text(encoding="utf-8")
    path.write_text(text.replace('figure = "torque_nm"\nsense', 'figure = "active_mass_kg"\nsense'))
    with stood_in(), pytest.raises(LamwrightError, match="--polish: no slopes of active_mass_kg, "):
        run(path, tmp_path / "out", replace(SETTINGS, polish=1))
    assert not (tmp_path / "out").exists()
