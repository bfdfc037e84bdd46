"""The command `ledger` from outside: what it lists, writes and refuses."""

import csv
import os
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from lamwright.app import ledger_screen
from lamwright.app.cli import main
from lamwright.app.evaluation import Evaluation
from lamwright.app.ledger import Ledger
from lamwright.app.ledger_rows import Row
from lamwright.app.ledger_tables import (
    Best,
    best_of,
    ranked,
    reason_classes,
    reasons,
    told_reasons,
)
from lamwright.app.study_file import read_study
from lamwright.app.study_points import points_of
from lamwright.app.study_task import task_of
from lamwright.geometry.design_file import read_machine
from lamwright.postprocess.netcdf import read_netcdf
from tests.study_rows import ANGLE, GAP, plain_evaluation, plain_study, plain_task

STUDY = Path(__file__).parents[2] / "designs" / "studies" / "barriers_by_end_angle.toml"


def invoke(*args):
    """The command in this process."""
    return CliRunner().invoke(main, ["ledger", *(str(arg) for arg in args)])


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """Thirty of forty designs of a study without physics."""
    made = tmp_path_factory.mktemp("study")
    with Ledger.open(made, plain_study()) as ledger:
        ledger.note("planned", "40")
        for k in range(1, 31):
            ledger.record(plain_task(k), plain_evaluation(k))
    return made


def test_progress_reasons_and_the_best_of_each_goal(folder):
    """Counts, classes of reasons without their numbers, and the best that hold every limit."""
    told = invoke(folder)
    assert told.exit_code == 0, told.output
    assert told.output.splitlines() == [
        "angle by gap: 30 of 40 designs (24 done, 6 rejected, 20 hold every limit)",
        "  rejected 6: rib .. is thinner than the sheet",
        f"most torque_nm: 29.00 +- 0.29, design 29 ({ANGLE} = 7.25, {GAP} = 0.4)",
        f"least torque_ripple_percent: 11.00, design 29 ({ANGLE} = 7.25, {GAP} = 0.4)",
    ]
    with Ledger.open(folder, plain_study()):
        assert "; going on now" in invoke(folder).output


def test_a_list_is_sorted_filtered_and_cut(folder):
    """Three lines of designs below their heads, and how many there are."""
    told = invoke(
        folder, "--where", "passes and torque_nm < 20", "--sort", "-torque_nm", "--limit", 3
    )
    heads, *lines, count = told.output.splitlines()
    assert heads.split()[:5] == ["design", "outcome", "passes", ANGLE, GAP]
    assert [int(line.split()[0]) for line in lines] == [19, 18, 17]
    assert count == "3 of 12 designs; --limit 12 lists all"


def test_a_column_reads_as_its_values_do_one_by_one():
    """Numbers of all sizes, where they round to one digit more, few values often, holes."""
    sizes = np.random.default_rng(1).uniform(-6.0, 8.0, 400)
    mixed = [*(10.0**sizes).tolist(), -9.9999, 999.49, 999.5, 1e-4, 0.0]
    for values in (mixed, [None, *mixed], [0.3, None, 0.5] * 50, ["a"] * 150, [1, 0, None] * 60):
        for text in (ledger_screen._plain, ledger_screen._keyed):
            alone = ["" if value is None else text(value) for value in values]
            assert list(ledger_screen._column(values, text)) == alone
    for value in mixed:
        if 1e-4 <= abs(value) < 1e3:
            digits = ledger_screen._plain(value).lstrip("-0.").replace(".", "")
            assert len(digits) == 4


def test_two_designs_are_compared_by_their_error_bars(folder):
    """Design 12 has four times the torque of design 3; 0.03 and 0.12 N m are their errors."""
    lines = {
        line.split()[0]: line.split()[1:]
        for line in invoke(folder, "--compare", 3, 12).output.splitlines()
    }
    assert " ".join(lines["torque_nm"]) == "3.000 +- 0.03 12.00 +- 0.12 +300.00 % yes"
    assert lines[GAP] == ["0.4", "0.3", "-25.00", "%"]
    assert lines["yield_margin"][:2] == ["1.300", "2.200"]


def test_tables_hold_every_number(folder, tmp_path):
    """CSV to the last bit, netCDF with units; both of the designs of --where alone."""
    for option, name in (("--csv", "t.csv"), ("--netcdf", "t.nc")):
        told = invoke(folder, option, tmp_path / name, "--where", "number <= 7")
        assert told.exit_code == 0, told.output
    rows = list(csv.DictReader((tmp_path / "t.csv").read_text().splitlines()))
    assert [int(row["number"]) for row in rows] == [1, 2, 3, 4, 5, 6, 7]
    assert float(rows[2]["torque_nm_error"]) == 0.01 * 3
    assert (rows[4]["torque_nm"], rows[4]["passes"]) == ("", "")
    assert rows[4]["reason"] == "rib 5 is thinner than the sheet"
    variables, attributes = read_netcdf(tmp_path / "t.nc")
    assert variables["torque_nm"].unit == "N m"
    assert variables["torque_nm"].values[:3].tolist() == [1.0, 2.0, 3.0]
    assert variables["rotor_barrier_1_end_angle_deg"].values[3] == 1.0
    assert variables["outcome"].long_name == "outcome: 0 done, 1 rejected"
    assert attributes["goals"] == "most torque_nm, least torque_ripple_percent"


def test_what_sql_finds_is_what_all_rows_say(tmp_path):
    """Best of each goal, reasons and lists, before and after the first that holds every limit."""
    draws = np.random.default_rng(4).integers(0, 6, 200)
    with Ledger.open(tmp_path, plain_study()) as ledger:
        for k, draw in enumerate(draws.tolist()):
            ledger.record(plain_task(k + 1), drawn_evaluation(k, draw))
            if k in (0, 100, 199):
                rows = ledger.rows()
                assert best_of(ledger) == [
                    Best(figure, sense, row, bool(row.passes))
                    for figure, sense in ledger.study.goals
                    for row in ranked(rows, figure, sense)[:1]
                ]
                assert told_reasons(ledger.reasons()) == reasons(rows)
                assert ledger.holding() == sum(row.passes is True for row in rows)
                listed = ledger.rows("torque_nm < 5", "-torque_nm", 30)
                names = ["number", "torque_nm", "outcome", GAP]
                assert ledger.cells(names, "torque_nm < 5", "-torque_nm", 30) == [
                    (row.number, row.figures["torque_nm"], row.outcome, row.values[GAP])
                    for row in listed
                ]
        assert {best.holds for best in best_of(ledger)} == {True}


def drawn_evaluation(k, draw):
    """By what was drawn from 0 to 5: rejected, failed, or done with few different figures."""
    if draw < 2:
        reason = [f"key_{k}: rib {k} is thin; accepted 4", "no end after 60 s", ""][k % 3]
        return Evaluation(("rejected", "failed")[draw], reason, "outline")
    figures = {"torque_nm": float(draw), "yield_margin": 2.0}
    if k % 2:
        figures["torque_ripple_percent"] = float(k % 7)
    return Evaluation("done", "", "field", figures, {}, bool(k > 100 and draw < 5))


@pytest.fixture(scope="module")
def real(tmp_path_factory):
    """Two designs of a study that is shipped, with figures that are made up."""
    made = tmp_path_factory.mktemp("real")
    study = read_study(STUDY)
    with Ledger.open(made, study) as ledger:
        for k, values in enumerate(points_of(study)[9:11]):
            figures = {"torque_nm": 10.0 + k, "torque_ripple_percent": 9.0 + k, "yield_margin": 2.0}
            ledger.record(
                task_of(study, values), Evaluation("done", "", "field", figures, {}, True)
            )
    return made


def test_a_design_comes_back_ready_for_assess(real, tmp_path):
    """Its cards lie beside it, wherever it is written; it reads as the machine of the point."""
    told = invoke(real, "--show", 2)
    assert told.exit_code == 0, told.output
    path = real / "designs" / "design-2.toml"
    assert told.output.strip().endswith(f"): {path}")
    assert len(read_machine(path).design.rotor.barrier) == 2
    elsewhere = tmp_path / "a" / "b.toml"
    assert invoke(real, "--show", 2, "--to", elsewhere).exit_code == 0
    assert read_machine(elsewhere).design == read_machine(path).design
    assert read_machine(elsewhere).cards == read_machine(path).cards
    # A card of the same name that is another file stays as it is.
    card = next((tmp_path / "a" / "cards").iterdir())
    card.write_text("# mine\n")
    assert invoke(real, "--show", 2, "--to", elsewhere).exit_code == 0
    assert card.read_text() == "# mine\n"
    assert read_machine(elsewhere).cards == read_machine(path).cards


FAULTS = [
    (("--show", 31), "has no design 31; it has 30"),
    (("--where", "torq > 3"), "no column torq; did you mean torque_nm?"),
    (("--sort", "torq"), "--sort torq: no such column; did you mean torque_nm?"),
    (("--compare", 1, 99), "has no design 99; it has 30"),
    (("--csv", "no/such/folder/x.csv"), "--csv no/such/folder/x.csv: cannot be written: no such"),
    (("--netcdf", "x.nc", "--where", "torque_nm > 99"), "no design to write"),
]


@pytest.mark.parametrize(("args", "fault"), FAULTS, ids=[str(args) for args, _ in FAULTS])
def test_faults_are_one_line(folder, args, fault):
    """Exit code 2, on stderr."""
    told = invoke(folder, *args)
    assert told.exit_code == 2
    assert fault in told.output
    assert len(told.output.splitlines()) == 1


def test_a_ledger_of_nothing_yet(tmp_path):
    """A study that has just begun, and a folder without one."""
    Ledger.open(tmp_path, plain_study()).close()
    assert "0 designs" in invoke(tmp_path).output
    assert invoke(tmp_path, "--where", "passes").output.splitlines()[-1] == "0 designs"
    told = invoke(tmp_path, "--pictures")
    assert (told.exit_code, len(told.output.splitlines())) == (2, 1)
    assert "no design has figures yet" in told.output
    assert invoke(tmp_path / "none").exit_code == 2


@pytest.mark.skipif(os.name != "posix" or os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_that_cannot_be_written_is_read(tmp_path):
    """Listing works; writing a design there is one line."""
    with Ledger.open(tmp_path, plain_study()) as ledger:
        ledger.record(plain_task(1), plain_evaluation(1))
    tmp_path.chmod(0o500)
    try:
        assert invoke(tmp_path).exit_code == 0
        told = invoke(tmp_path, "--show", 1)
        assert (told.exit_code, len(told.output.splitlines())) == (2, 1)
    finally:
        tmp_path.chmod(0o700)


def test_reasons_of_like_faults_are_one_class():
    """Place and remedy are left out, numbers where they differ."""
    told = (
        "rotor.barrier[2].depth_mm = 3.5: crosses barrier 1 by 0.25 mm; accepted 3.7 to 8",
        "rotor.barrier[2].depth_mm = 3.6: crosses barrier 1 by 0.15 mm; accepted 3.7 to 8",
        "layout.barriers = 5: a barrier would be thinner than 0.75 mm",
        "layout.barriers = 6: a barrier would be thinner than 0.75 mm",
    )
    rows = [row_of("rejected", reason) for reason in told] + [
        row_of("done", ""),
        row_of("failed", ""),
    ]
    assert reason_classes(rows) == [
        *["crosses barrier .. by .. mm"] * 2,
        *["a barrier would be thinner than 0.75 mm"] * 2,
        *("", "failed"),
    ]
    assert [count for _, _, count in reasons(rows)] == [2, 2, 1]


def row_of(outcome, reason):
    return Row(1, "", outcome, reason, "", None, 0.0, "", "", "", "", 1)
