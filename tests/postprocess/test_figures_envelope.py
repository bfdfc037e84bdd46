"""Pictures of envelope and efficiency: regions, what is not reached, what the title says."""

import math

import numpy as np
import pytest
from matplotlib.figure import Figure

from lamwright.postprocess.efficiency import LoadPoints
from lamwright.postprocess.envelope import Envelope, Region
from lamwright.postprocess.figures_envelope import (
    EfficiencySheet,
    draw_over_speed,
    efficiency_figure,
    region_spans,
)
from lamwright.postprocess.figures_style import Style

REGIONS = [Region.CURRENT] * 3 + [Region.BOTH] * 2 + [Region.NONE] * 2


def invented() -> Envelope:
    speed = 100.0 * np.arange(7.0)
    values = np.where(np.array(REGIONS) == Region.NONE, np.nan, 10.0)
    return Envelope(speed, *[values] * 8, np.array(REGIONS, dtype=np.int64))


def test_regions_meet_in_the_middle_and_cover_all_speeds():
    """Between speeds 200 and 300 rad/s one region ends and the next begins at 250; no gap."""
    assert region_spans(invented()) == [
        (Region.CURRENT, 0.0, 250.0),
        (Region.BOTH, 250.0, 450.0),
        (Region.NONE, 450.0, 600.0),
    ]


def test_speeds_that_are_not_reached_have_no_curve():
    """The line ends where nothing is reached; the axis still shows all speeds in 1/min."""
    ax = Figure().subplots()
    draw_over_speed(ax, invented(), invented().torque, "torque in N m", Style())
    drawn = ax.lines[0].get_ydata()
    assert np.isnan(drawn).tolist() == [False] * 5 + [True] * 2
    assert ax.get_xlim() == pytest.approx((0.0, 600.0 * 30.0 / math.pi))


@pytest.mark.parametrize(
    ("missing", "says"),
    [
        (("iron loss", "friction of bearings"), "left out, not given: iron loss, friction"),
        ((), "all losses in"),
    ],
)
def test_the_efficiency_says_what_it_leaves_out(missing, says):
    """The second line of the picture; its best point is marked only where iron loss is in."""
    speed, share = np.linspace(10.0, 300.0, 6), np.linspace(0.1, 1.0, 5)
    torque = 20.0 * np.ones((6, 1)) * share
    shaft = torque * speed[:, None]
    efficiency = (shaft / (1.1 * shaft + 50.0)).ravel()
    rest = [np.zeros(30)] * 7
    points = LoadPoints(np.repeat(speed, 5), torque.ravel(), *rest, np.zeros(30), efficiency)
    sheet = EfficiencySheet(speed, torque, points, missing, has_best=not missing)
    figure = efficiency_figure("invented", sheet, Style())
    texts = [text.get_text() for text in figure.texts]
    assert any(text.startswith(says) for text in texts)
    marks = [text.get_text() for text in figure.axes[0].texts if " % at " in text.get_text()]
    best = 100.0 * efficiency.max()
    assert marks == ([f"{best:.1f} % at 20 N m, {300.0 * 30.0 / math.pi:.0f}/min"] * (not missing))
