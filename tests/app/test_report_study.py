"""The report of a study says what its ledger says, and what it takes to compute it again."""

import dataclasses
import re

import pytest
from report_reading import check_numbers
from study_rows import ANGLE, BASE, plain_evaluation, plain_study, plain_task

from lamwright.app.ledger import Ledger
from lamwright.app.report_study import MOST_LISTED, study_report
from lamwright.postprocess.report_html import report_html

DESIGNS = 60


@pytest.fixture
def told(tmp_path):
    """The page of a study with every fifth design rejected, and its rows."""
    path = tmp_path / "study.toml"
    path.write_text("# an invented study\n")
    study = dataclasses.replace(plain_study(), path=path)
    with Ledger.open(tmp_path, study) as ledger:
        for k in range(DESIGNS):
            ledger.record(plain_task(k, study), plain_evaluation(k), "sweep", 1)
        report = study_report(study, ledger, [], "sweep", "--out FOLDER")
        rows = ledger.rows()
    return report_html(report, tmp_path), rows


def test_every_number_is_a_row_s(told):
    """Keys, figures and error bars in the tables are the ledger's, the best designs first."""
    page, rows = told
    stored = {
        str(row.number): {
            **row.values,
            **row.figures,
            **{f"{key}_error": bar for key, bar in row.errors.items()},
        }
        for row in rows
    }
    seen = check_numbers(page, stored, spare=("version", "asked"), whole=("design", "designs"))
    listed = list(dict.fromkeys(re.findall(r'data-key="(\d+)/torque_nm"', page)))
    holding = sorted((r for r in rows if r.passes), key=lambda r: -r.figures["torque_nm"])
    assert listed == [str(row.number) for row in holding[:MOST_LISTED]]
    assert {f"{listed[0]}/torque_nm", f"{listed[3]}/{ANGLE}"} <= seen
    assert f"{len(holding)} of {DESIGNS} designs hold every limit" in page
    assert ANGLE in page


def test_refused_designs_and_the_way_to_repeat_it_are_told(told):
    """Reasons are counted by class; study, base and cards stand there whole."""
    page, rows = told
    rejected = [row for row in rows if row.outcome == "rejected"]
    assert f'<td class=" number">{len(rejected)}</td>' in page
    for text in ("# an invented study", BASE.splitlines()[5], "# a steel, invented", "slot.dxf"):
        assert text in page
