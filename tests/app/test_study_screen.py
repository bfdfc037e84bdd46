"""What a study tells on its way."""

import pytest
from study_rows import plain_evaluation, plain_study, plain_task

from lamwright.app.evaluation import Evaluation
from lamwright.app.ledger import Ledger
from lamwright.app.study_screen import StudyProgress, shown, time_text


@pytest.fixture(scope="module")
def rows(tmp_path_factory):
    """Twenty designs: four rejected, one failed; torque 1 to 19, the margin 1.5 from 5 Nm on."""
    with Ledger.open(tmp_path_factory.mktemp("ledger"), plain_study()) as ledger:
        made = [ledger.record(plain_task(k), plain_evaluation(k)) for k in range(19)]
        failed = Evaluation("failed", "took longer than the 60 s; tried 2 times")
        return [*made, ledger.record(plain_task(19), failed)]


def test_rate_time_left_failures_and_best(rows):
    """Twenty of thirty-two designs, 2 a second after the first: 6 s for the twelve left."""
    now = iter(0.5 * k for k in range(100))
    progress = StudyProgress(plain_study(), 32, clock=lambda: next(now))
    for row in rows:
        progress(row, False)
    assert progress.text() == (
        "2/s, 6 s left, 4 rejected, 1 failed, 11 pass, best torque_nm 18, "
        "best torque_ripple_percent 22"
    )


def test_known_rows_do_not_count_for_the_rate(rows):
    """Ten designs of another day are read in a moment; two more then take 2 s each."""
    times = iter([0.0, *[7.0] * 10, 9.0, 11.0])
    progress = StudyProgress(plain_study(), 12, clock=lambda: next(times))
    for k, row in enumerate(rows[:12]):
        progress(row, k < 10)
    assert progress.rate == pytest.approx(0.5)
    assert progress.text().startswith("30/min, 10 known before")


def test_the_best_is_one_that_passes(rows):
    """A design that misses a limit is the best only as long as none holds all."""
    study = plain_study()
    progress = StudyProgress(study, None)
    ripple = study.goals[1]
    assert progress.best(ripple) is None
    progress(rows[1], False)  # margin 1.1, ripple 39
    assert progress.best(ripple).number == 2
    progress(rows[6], False)  # margin 1.6, ripple 34
    progress(rows[4], False)  # margin 1.4, ripple 36
    assert progress.best(ripple).number == 7


def test_plain_lines_name_failures_and_the_end(rows, capsys):
    """Without a terminal: a line for the failure, one at the end, nothing on stdout."""
    with shown(StudyProgress(plain_study(), len(rows)), "sweep") as show:
        for row in rows:
            show(row, False)
    said = capsys.readouterr()
    assert said.out == ""
    first, last = said.err.splitlines()
    assert first == "design 20 failed: took longer than the 60 s; tried 2 times"
    assert last.startswith("sweep: 20/20  ")
    assert "1 failed" in last


@pytest.mark.parametrize(
    ("seconds", "said"), [(0.2, "0 s"), (59.4, "59 s"), (61.0, "1 min"), (7300.0, "2 h 2 min")]
)
def test_times_are_told_as_a_person_would(seconds, said):
    """Whole seconds, whole minutes, hours and minutes."""
    assert time_text(seconds) == said
