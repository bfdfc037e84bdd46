"""The picture of margins and lives: all ribs named, limits drawn, whole with and without a life."""

import math
from dataclasses import replace

import pytest
from matplotlib.figure import Figure

from lamwright.postprocess.figures_ribs import (
    RibsPicture,
    draw_lives,
    draw_margins,
    write_ribs_figure,
)
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.rib_life import RibLife
from lamwright.postprocess.rib_tables import elastic_figures, rib_rows, shown_ribs
from tests.postprocess.test_rib_tables import SECTION, invented_report

LIFE = RibLife(maximum=2e8, amplitude=1e8, median=1e5, low=3e4, high=3e5)
ENDLESS = replace(LIFE, median=math.inf, low=math.inf, high=math.inf)


def rows(*groups):
    report = invented_report()
    pulled = replace(report.ribs[1], peak=160e6, yield_margin=2.0)
    report = replace(report, ribs=(report.ribs[0], pulled))
    return rib_rows(SECTION, report, elastic_figures(SECTION, report), *groups)


def test_bars_are_the_margins_and_lines_the_limits():
    """Most stressed first: margins 2 and 4; asked 1.5 and yield at 1."""
    ax = Figure().subplots()
    draw_margins(ax, shown_ribs(rows()), 1.5, Style())
    assert [bar.get_width() for bar in ax.patches] == [2.0, 4.0]
    assert sorted(line.get_xdata()[0] for line in ax.get_lines()) == [1.0, 1.5]
    assert next(label.get_text() for label in ax.get_yticklabels()).startswith("tangential 1")


def test_spans_are_the_lives_and_an_endless_one_has_none():
    """From 2.3 to 97.7 % with a dot at half, logarithmic; what is far beyond the tests in words."""
    ax = Figure().subplots()
    draw_lives(ax, shown_ribs(rows((LIFE, ENDLESS))), 1e7, Style())
    drawn = [list(line.get_xdata()) for line in ax.get_lines()]
    assert drawn == [[3e4, 3e5], [1e5], [1e7, 1e7]]
    assert [text.get_text() for text in ax.texts] == ["more than 1e+07", "line tested to 1e+07"]
    assert ax.get_xscale() == "log"
    assert "97.7 %" in ax.get_xlabel()


@pytest.mark.parametrize("tested_to", [None, 1e7])
def test_the_picture_is_written_twice(tested_to, tmp_path):
    """PNG and SVG, with and without a life."""
    lives = () if tested_to is None else ((LIFE, LIFE),)
    write_ribs_figure(tmp_path, RibsPicture("B1", rows(*lives), 1.2, tested_to))
    assert sorted(path.name for path in tmp_path.iterdir()) == ["ribs.png", "ribs.svg"]
    assert (tmp_path / "ribs.png").stat().st_size > 5_000


def test_alike_sides_are_shown_once():
    """Equal peaks of left and right: one row for both; unlike ones keep their names."""
    report = invented_report()
    alike = rib_rows(SECTION, report, elastic_figures(SECTION, report))
    assert [name for name, _ in shown_ribs(alike)] == ["tangential 1, both"]
    assert len(shown_ribs(rows())) == 2
