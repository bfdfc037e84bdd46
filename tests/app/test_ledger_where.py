"""The conditions of `ledger --where`: what they mean, and what they refuse."""

import pytest

from lamwright.app.ledger import Ledger
from lamwright.geometry.errors import LamwrightError
from tests.study_rows import ANGLE, plain_evaluation, plain_study, plain_task

COUNT = 40


@pytest.fixture(scope="module")
def ledger(tmp_path_factory):
    """Forty designs; see `study_rows` for what they have."""
    with Ledger.open(tmp_path_factory.mktemp("study"), plain_study()) as made:
        for k in range(1, COUNT + 1):
            made.record(plain_task(k), plain_evaluation(k))
        yield made


DONE = [k for k in range(1, COUNT + 1) if k % 5]
MEANT = [
    ("torque_nm > 6 and passes", lambda k: k > 6 and k >= 5),
    ("not torque_nm > 6", lambda k: k <= 6),
    ("torque_nm>6or passes == False", lambda k: k > 6 or k < 5),
    ("3 < torque_nm <= 9", lambda k: 3 < k <= 9),
    (f"{ANGLE} == 3", lambda k: k == 12),
    (f"{ANGLE} >= 2.25 and rotor.gap_mm != 0.3", lambda k: k >= 9 and k % 2),
    ("torque_nm / yield_margin < 5 / 2", lambda k: k / (1 + k / 10) < 2.5),
    ("-torque_nm + 2 * yield_margin > -20", lambda k: -k + 2 * (1 + k / 10) > -20),
    ("(torque_nm < 3 or torque_nm > 38) and not passes", lambda k: k < 3),
    ("torque_nm_error > 0.3", lambda k: 0.01 * k > 0.3),
    ("number < 4", lambda k: k < 4),
    ("torque_nm is not None", lambda k: True),
]


@pytest.mark.parametrize(("text", "holds"), MEANT, ids=[text for text, _ in MEANT])
def test_conditions_mean_what_python_means(ledger, text, holds):
    """Against the same condition on the numbers that the rows were made of."""
    found = [row.number for row in ledger.rows(f"({text}) and outcome == 'done'")]
    assert found == [k for k in DONE if holds(k)]
    assert ledger.count_where(text) >= len(found)


def test_rows_without_a_value_fulfil_neither(ledger):
    """Rejected designs have no torque: neither more nor less than anything."""
    assert ledger.count_where("torque_nm > 10 or not torque_nm > 10") == len(DONE)
    assert ledger.count_where("torque_nm is None") == COUNT - len(DONE)
    assert ledger.count_where("outcome == 'rejected' and reason != ''") == COUNT - len(DONE)


REFUSED = [
    ("torque_n > 6", "no column torque_n; did you mean torque_nm?"),
    ("rotor.gap < 1", "no column rotor.gap; did you mean rotor.gap_mm?"),
    ("torque_nm = 6", "= is not understood; write == to compare"),
    ("torque_nm", "torque_nm is compared with nothing; write torque_nm > 0 or alike"),
    ("torque_nm > '6'", "a number is compared with a text"),
    ("outcome == done", "no column done; "),
    ("outcome > None", "None can be met by `is None` and `is not None` alone"),
    ("torque_nm > (", "; accepted names, "),
    ("torque_nm > 3 $ passes", "is not understood at '$'; "),
    ("__import__('os').remove('x')", " is not understood; accepted names, "),
    ("reason.join(outcome) == 1", " is not understood; accepted names, "),
    ("[k for k in (1,)]", " is not understood; accepted names, "),
    ("torque_nm ** 9 > 1", "accepted names, numbers"),
    ("torque_nm > 1e999", "is no number that can be compared"),
    ("reason + 1 > 2", "reason is no number"),
    ('reason == "x"; drop table design', "is not understood at"),
    ("1" + "+1" * 600 + " > 2", "1205 characters long; accepted up to 1000"),
    ("(" * 400 + "1" + ")" * 400, "--where"),
    ("", "--where"),
]


@pytest.mark.parametrize(("text", "told"), REFUSED, ids=[text[:30] for text, _ in REFUSED])
def test_what_is_not_understood_is_one_line(ledger, text, told):
    """With the word, and the nearest name there is; nothing is carried out."""
    with pytest.raises(LamwrightError) as refused:
        ledger.count_where(text)
    assert told in str(refused.value)
    assert str(refused.value).startswith("--where")
    assert "\n" not in str(refused.value)
    assert ledger.count() == COUNT


def test_texts_are_parameters(ledger):
    """Quotes and signs of SQL in a text are compared, never carried out."""
    assert ledger.count_where("""reason == "'; drop table design; --" """) == 0
    assert ledger.count() == COUNT


def test_lists_are_sorted_with_gaps_last(ledger):
    """By any name, both ways."""
    torque = [row.figures.get("torque_nm") for row in ledger.rows(sort="-torque_nm")]
    assert torque[: len(DONE)] == sorted(map(float, DONE), reverse=True)
    assert set(torque[len(DONE) :]) == {None}
    assert [row.number for row in ledger.rows(sort="torque_ripple_percent", limit=2)] == [39, 38]
    with pytest.raises(LamwrightError, match="--sort torque: no such column; did you mean torque_"):
        ledger.rows(sort="-torque")
