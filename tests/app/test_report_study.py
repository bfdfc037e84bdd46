"""The report of a study says what its ledger says, and what it takes to compute it again."""

import dataclasses
import re

import pytest
from study_rows import ANGLE, BASE, plain_evaluation, plain_study, plain_task

from lamwright.app.ledger import Ledger
from lamwright.app.lines import number
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
    """Figures in the tables are those of the ledger, the best designs first."""
    page, rows = told
    shown = re.findall(r'data-key="torque_nm">([\d.]+)<', page)
    holding = sorted((r.figures["torque_nm"] for r in rows if r.passes), reverse=True)
    assert shown == [number(holding[0]), *(number(value) for value in holding[:MOST_LISTED])]
    assert f"{len(holding)} of {DESIGNS} designs hold every limit" in page
    assert ANGLE in page


def test_refused_designs_and_the_way_to_repeat_it_are_told(told):
    """Reasons are counted by class; study, base and cards stand there whole."""
    page, rows = told
    rejected = [row for row in rows if row.outcome == "rejected"]
    assert f'<td class=" number">{len(rejected)}</td>' in page
    for text in ("# an invented study", BASE.splitlines()[5], "# a steel, invented", "slot.dxf"):
        assert text in page
