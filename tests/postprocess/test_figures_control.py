"""The picture of the i_d-i_q plane: what it must show, and its base speed in closed form."""

import math

import numpy as np
import pytest
from flux_laws import linear_map

from lamwright.postprocess.c_numbers import number_format
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.control import control_of
from lamwright.postprocess.figures_control import base_speed, control_figure
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.terminals import terminals

L_D, L_Q = 0.05, 0.01  # invented, H
AXIS, BOTH = np.linspace(0.0, 25.0, 7), np.linspace(-25.0, 25.0, 13)


def control(psi_m=0.0, resistance=0.5):
    flux_map = linear_map(2, L_D, L_Q, AXIS, BOTH if psi_m else AXIS, psi_m=psi_m)
    drive = terminals(
        coenergy_surface(flux_map),
        resistance=resistance,
        end_inductance=0.0,
        current_limit=20.0,
        line_voltage=400.0,
    )
    return control_of(drive, 1500.0, (3, 3), number_format("float"))


def test_base_speed_of_the_linear_machine():
    """No resistance: U / |psi| at 45 degrees, |psi| = I sqrt((L_d^2 + L_q^2) / 2) (derived)."""
    volts = 400.0 * math.sqrt(2.0 / 3.0)
    linkage = 20.0 * math.sqrt(0.5 * (L_D**2 + L_Q**2))
    assert base_speed(control(resistance=0.0)) == pytest.approx(volts / linkage)


@pytest.mark.parametrize(
    "psi_m", [0.0, pytest.param(-0.05, marks=pytest.mark.slow)], ids=["no magnets", "outward"]
)
def test_plane(psi_m):
    """Units on both axes, both limits and curves named, no two names of lines in one place."""
    figure = control_figure("demo", control(psi_m), 1500.0, Style())
    figure.canvas.draw()
    (ax,) = figure.axes
    assert (ax.get_xlabel(), ax.get_ylabel()) == ("i_d in A, peak", "i_q in A, peak")
    (legend,) = figure.legends
    said = " ".join(text.get_text() for text in legend.get_texts())
    for part in ("torque", "voltage limit 400 V", "current limit 20 A", "per ampere", "per volt"):
        assert part in said
    names = [text for text in ax.texts if text.get_text()]
    assert sum("rpm" in name.get_text() for name in names) >= 2
    assert sum("N m" in name.get_text() for name in names) >= 3
    boxes = [name.get_window_extent() for name in names]
    clashes = [
        (a.get_text(), b.get_text())
        for k, a in enumerate(names)
        for m, b in enumerate(names)
        if m > k and boxes[k].overlaps(boxes[m])
    ]
    assert clashes == []
    inside = figure.bbox
    assert all(box.x0 >= 0.0 and box.x1 <= inside.x1 for box in boxes)
