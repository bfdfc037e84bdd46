"""Verdict and flux map in a notebook: figures as reported, text escaped, pictures of numbers."""

import base64
import dataclasses
import re
from html import unescape
from io import BytesIO

import flux_laws
import invented_verdict as invented
import matplotlib
import numpy as np
import pytest
from matplotlib.figure import Figure
from PIL import Image

from lamwright.postprocess.figures_notebook import draw_linkage_ends, draw_mean_torque
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.flux_map import mean_torque

HOSTILE = "<script>alert(1)</script>"


def rows_of(shown: str) -> list[list[str]]:
    """The cells of every row of a table's body."""
    body = "".join(re.findall(r"<tbody>(.*?)</tbody>", shown))
    rows = re.findall(r"<tr>(.*?)</tr>", body)
    cells = [re.findall(r"<td[^>]*>(.*?)</td>", row) for row in rows]
    return [[unescape(re.sub(r"<[^>]+>", "", cell)) for cell in row] for row in cells]


def test_a_verdict_shows_limits_values_and_error_bars():
    """By hand from the invented figures: 40 % ripple misses a limit of 25 %, the rest holds."""
    missed = dataclasses.replace(invented.MAGNETIC, ripple=0.4)
    verdict = invented.verdict(missed, errors={"torque_nm": 0.012})
    shown = verdict._repr_html_()
    rows = rows_of(shown)
    assert rows[0] == ["torque, mean", "10.00 N m", "0.012", ">= 9.000 N m", "holds"]
    assert rows[1] == ["torque ripple", "40.00 %", "", "<= 25.00 %", "missed"]
    assert ["power factor", "~ 0.6200", "", "", ""] in rows
    assert "fails: torque ripple" in shown
    assert "passes: every limit holds" in invented.verdict()._repr_html_()


def test_a_verdict_tells_a_voltage_over_the_supply():
    """The same word as on the terminal."""
    terminal = dataclasses.replace(invented.TERMINAL, line_voltage=500.0)
    rows = rows_of(invented.verdict(terminal=terminal)._repr_html_())
    assert [
        "line voltage at rated speed, rms",
        "~ 500.0 V",
        "",
        "<= 400.0 V",
        "exceeded",
    ] in rows


def test_texts_of_a_verdict_are_escaped():
    """Names come from files of others."""
    verdict = invented.verdict(design_name=HOSTILE, cautions=(HOSTILE,), version=HOSTILE)
    shown = verdict._repr_html_()
    assert "<script" not in shown
    assert unescape(shown).count(HOSTILE) == 3


CURRENTS = np.linspace(0.0, 30.0, 5)


def test_a_flux_map_shows_its_greatest_torque_and_a_picture():
    """The law F1 at its corner; the picture is a PNG that opens, twice the same bytes."""
    flux_map = flux_laws.f1_map(CURRENTS, CURRENTS)
    shown = flux_map._repr_html_()
    rows = dict(rows_of(shown))
    most = float(mean_torque(flux_map).max())
    assert rows["greatest mean torque"].startswith(f"{most:.2f} N m at i_d 30.00 A, i_q 30.00 A")
    data = base64.b64decode(re.search(r"base64,([^\"]+)", shown)[1])
    image = Image.open(BytesIO(data))
    assert image.width > 600
    assert np.ptp(np.asarray(image.convert("L"))) > 150  # something is inked on it
    assert flux_map._repr_html_() == shown


def test_a_single_row_of_currents_has_a_table_alone():
    """No plane, no picture."""
    flux_map = flux_laws.linear_map(2, 0.03, 0.01, [5.0], CURRENTS)
    shown = flux_map._repr_html_()
    assert "<img" not in shown
    assert dict(rows_of(shown))["currents"] == "1 x 5, A peak"


def test_what_is_drawn_is_the_map():
    """Linkages of a linear machine without crossing: straight lines of slope L, from the plot."""
    flux_map = flux_laws.linear_map(2, 0.03, 0.01, CURRENTS, CURRENTS)
    left, right = Figure().subplots(1, 2)
    draw_linkage_ends(left, flux_map, Style())
    slopes = [np.ptp(line.get_ydata()) / np.ptp(line.get_xdata()) for line in left.lines]
    assert slopes == pytest.approx([0.03, 0.03, 0.01, 0.01], rel=1e-12)
    assert [text.get_text() for text in left.get_legend().get_texts()] == [
        "psi_d, i_q = 0 A",
        "psi_d, i_q = 30 A",
        "psi_q, i_d = 0 A",
        "psi_q, i_d = 30 A",
    ]
    draw_mean_torque(right, flux_map, Style())
    # T = 3/2 p (L_d - L_q) i_d i_q, linear along an edge between nodes, where lines cross it.
    for collection in right.collections:
        for level, path in zip(collection.levels, collection.get_paths(), strict=True):
            on_edge = [(d, q) for d, q in path.vertices if d in CURRENTS or q in CURRENTS]
            assert np.allclose([3.0 * 0.02 * d * q for d, q in on_edge], level)
    assert right.get_xlabel() == "i_d, A peak"


def test_a_users_settings_stay_and_do_not_show():
    """A style sheet of the notebook changes nothing, nor is it changed."""
    flux_map = flux_laws.f1_map(CURRENTS, CURRENTS)
    before = flux_map._repr_html_()
    with matplotlib.rc_context({"lines.linewidth": 9.0, "axes.facecolor": "red"}):
        assert flux_map._repr_html_() == before
        assert matplotlib.rcParams["lines.linewidth"] == 9.0
