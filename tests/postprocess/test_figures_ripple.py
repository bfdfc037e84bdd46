"""Pictures of torque orders and forces: what is shown is what was given, within the sheet."""

from fractions import Fraction

import numpy as np
import pytest

from lamwright.postprocess.figures_ripple import (
    ForcesPictured,
    RipplePictured,
    forces_figure,
    ripple_figure,
)
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.force_orders import ForceOrder, ToothForces
from lamwright.postprocess.skew_orders import SkewedTorque
from lamwright.postprocess.torque import TorqueSpectrum
from lamwright.postprocess.torque_causes import Slotting
from lamwright.postprocess.torque_pairs import WavePair

ORDERS = tuple(range(6, 61, 6))
AMPLITUDE = np.linspace(1.0, 0.1, 10)
PAIRS = tuple((WavePair(m, m - 1.0, -1.0, m - 1.0, 0.3, 0.7, 0.9, -0.2),) for m in ORDERS)


def pictured(own_steps: int) -> RipplePictured:
    """Amplitudes that fall, halved by each skew."""
    skews = tuple(
        SkewedTorque(steps, 0.5, 10.0, ORDERS, 0.5 * AMPLITUDE, 0.4 * AMPLITUDE)
        for steps in (own_steps, 2, 3, 4, 0)
    )
    spectrum = TorqueSpectrum(ORDERS, AMPLITUDE, np.zeros(10))
    by = Slotting(Fraction(12), 16)
    return RipplePictured("invented", spectrum, 10.0, skews, PAIRS, by)


@pytest.mark.parametrize(("steps", "rows"), [(1, 3), (5, 4)])
def test_a_bar_for_each_order_and_rotor(steps, rows):
    """The design's own skew is a row of its own only where it has one; heights in percent."""
    figure = ripple_figure(pictured(steps), Style())
    bars, texts = figure.axes
    assert len(bars.containers) == rows
    heights = [bar.get_height() for bar in bars.containers[0]]
    assert heights == pytest.approx(100.0 * AMPLITUDE / 10.0)
    figure.draw_without_rendering()
    legend = bars.get_legend().get_window_extent()
    assert legend.x1 <= figure.bbox.width  # in one line, beside nothing else
    told = " ".join(text.get_text() for text in texts.texts)
    assert "order 12:" in told
    assert "winding order -11 (slots) with rotor order 11" in told


def test_a_circle_for_each_wave_of_stress():
    """The mean is left out; labels of circles and axes lie on the sheet."""
    orders = (
        ForceOrder(0, 0.0, 2e5, 1e4),
        ForceOrder(4, 2.0, 1e5, 0.0),
        ForceOrder(20, -2.0, 5e4, 0.0),
        ForceOrder(24, 0.0, 4e4, 0.0),
    )
    angle = np.linspace(0.0, 2.0 * np.pi, 36, endpoint=False)
    teeth = ToothForces(angle, np.ones((36, 24)), np.zeros((36, 24)))
    figure = forces_figure(ForcesPictured("invented", orders, teeth, 50.0), Style())
    figure.draw_without_rendering()
    waves = figure.axes[0]
    drawn = sum(len(group.get_offsets()) for group in waves.collections)
    assert drawn == 3
    assert {text.get_text() for text in waves.texts} >= {"100", "50", "40"}
    for axes in figure.axes:
        box = axes.get_tightbbox()
        assert box.x0 >= 0.0
        assert box.x1 <= figure.bbox.width
        assert box.y1 <= figure.bbox.height
