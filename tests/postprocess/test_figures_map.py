"""The figure of a flux map: whole, labelled with units, nothing outside the sheet."""

import numpy as np
import pytest
from flux_laws import F1_RATED, f1_map, linear_map
from matplotlib.figure import Figure

from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.figures_map import (
    DrawnMap,
    draw_linkage,
    draw_ripple_plane,
    draw_torque_plane,
    write_map_figure,
)
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.map_figures import map_figures

CURRENTS = np.linspace(0.0, 1.25 * F1_RATED, 8)


def drawn(flux_map, most=F1_RATED):
    surface = coenergy_surface(flux_map)
    return DrawnMap("F1", flux_map, surface, map_figures(flux_map, surface, F1_RATED), most)


def test_figure_is_written_twice(tmp_path):
    """PNG and SVG, nothing else."""
    written = write_map_figure(tmp_path, drawn(f1_map(CURRENTS, CURRENTS, swing=0.4)))
    assert sorted(path.name for path in tmp_path.iterdir()) == ["map.png", "map.svg"]
    assert all(path.stat().st_size > 10_000 for path in written)


@pytest.mark.parametrize("most", [F1_RATED, 1.2 * F1_RATED])
def test_axes_have_units_and_lines_their_currents(most):
    """A line for each of five currents of the other axis, its last node on it."""
    figure = Figure()
    what = drawn(f1_map(CURRENTS, CURRENTS), most)
    axes = figure.subplots(2, 2)
    draw_linkage(axes[0, 0], what, "d", Style())
    draw_linkage(axes[0, 1], what, "q", Style())
    draw_torque_plane(axes[1, 0], what, Style())
    draw_ripple_plane(axes[1, 1], what, Style())
    assert axes[0, 0].get_xlabel() == "i_d, A peak"
    assert axes[0, 1].get_ylabel() == "psi_q, V s peak"
    curves = axes[0, 0].get_lines()
    assert len(curves) == 10
    for line, nodes in zip(curves[::2], curves[1::2], strict=True):
        assert line.get_ydata()[-1] == pytest.approx(nodes.get_ydata()[-1], rel=1e-9)
    texts = {text.get_text() for text in axes[1, 0].texts}
    assert any(text.startswith("20.3 N m at 57.") for text in texts)


def test_both_signs_and_no_ripple_are_drawn(tmp_path):
    """A machine with magnets, both signs of i_q, and a torque without any ripple."""
    i_q = np.linspace(-CURRENTS[-1], CURRENTS[-1], 9)
    flux_map = linear_map(2, 0.03, 0.01, CURRENTS, i_q, psi_m=0.1)
    write_map_figure(tmp_path, drawn(flux_map))
    assert (tmp_path / "map.png").exists()
