"""Labels beside a drawing: nearest heights, leaders that meet neither each other nor letters."""

import math
from itertools import combinations

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from scipy.optimize import lsq_linear

from lamwright.postprocess.figures_labels import Callout, place_callouts, spread, uncrossed
from lamwright.postprocess.figures_section import bare
from lamwright.postprocess.figures_style import Style, mm_per_point

STYLE = Style()


def sheet():
    """Bare axes that fill a sheet of 8 by 6 inches."""
    figure = Figure((8.0, 6.0), dpi=100.0)
    FigureCanvasAgg(figure)
    ax = figure.add_axes((0.0, 0.0, 1.0, 1.0))
    bare(ax)
    return figure, ax


def test_spread_heights_are_the_nearest_ones():
    """Against scipy's bounded least squares on the distances between neighbours."""
    rng = np.random.default_rng(3)
    for count in (1, 2, 5, 12):
        wanted = np.sort(rng.uniform(0.0, 10.0, count))
        heights = spread(wanted, 0.7, -20.0, 30.0)
        below = np.tril(np.ones((count, count)))
        least = np.full(count, 0.7)
        least[0] = -20.0
        twin = below @ lsq_linear(below, wanted, (least, np.inf), tol=1e-14).x
        assert heights == pytest.approx(twin, abs=1e-5)  # what the twin's iteration reaches
    with pytest.raises(ValueError, match="12 labels of pitch 1 do not fit"):
        spread(wanted, 1.0, 0.0, 10.0)


def crosses(a, b, c, d):
    """Whether segments ab and cd cross, by solving for their common point."""
    matrix = np.array([[(b - a).real, (c - d).real], [(b - a).imag, (c - d).imag]])
    if abs(np.linalg.det(matrix)) < 1e-12:
        return False
    s, t = np.linalg.solve(matrix, [(c - a).real, (c - a).imag])
    return 0.0 < s < 1.0 and 0.0 < t < 1.0


def test_uncrossed_leaders_do_not_cross():
    """100 times 12 random anchors; the heights used stay the same."""
    rng = np.random.default_rng(4)
    for _ in range(100):
        anchors = list(rng.uniform(0, 1, 12) + 1j * rng.uniform(0, 1, 12))
        heights = uncrossed(anchors, np.linspace(0.0, 1.0, 12), 1.5)
        assert sorted(heights) == pytest.approx(np.linspace(0.0, 1.0, 12))
        for i, j in combinations(range(12), 2):
            ends = complex(1.5, heights[i]), complex(1.5, heights[j])
            assert not crosses(ends[0], anchors[i], ends[1], anchors[j])


@pytest.mark.parametrize("seed", range(12))
def test_leaders_cross_neither_each_other_nor_letters(seed):
    """Random anchors in a fan with labels on both sides, judged on the drawn lines."""
    rng = np.random.default_rng(seed)
    figure, ax = sheet()
    arc = 70.0 * np.exp(1j * np.linspace(math.pi / 4, 3 * math.pi / 4, 100))
    side = np.linspace(0.0, 1.0, 100)
    fan = np.concatenate([arc[0] * side, arc, arc[-1] * side[::-1]])
    radii, turns = rng.uniform(40.0, 69.0, 12), rng.uniform(0.8, 2.34, 12)
    callouts = [
        Callout(f"part number {k}", r * np.exp(1j * t), "left" if t > math.pi / 2 else "right")
        for k, (r, t) in enumerate(zip(radii, turns, strict=True))
    ]
    place_callouts(ax, fan, callouts, STYLE)
    figure.canvas.draw()
    lines = [line.get_xydata() @ [1.0, 1.0j] for line in ax.lines if len(line.get_xydata()) == 3]
    assert len(lines) == 12
    for one, other in combinations(lines, 2):
        assert not crosses(one[1], one[2], other[1], other[2])
    point = mm_per_point(ax)
    for one in lines:
        at = one[1] + (one[2] - one[1]) * np.linspace(0.0, 1.0, 200)
        # Nearer, it could not be told which of two leaders goes on where.
        assert all(np.abs(at - other[1]).min() > 3.9 * point for other in lines if other is not one)
    for one, other in combinations([text.get_window_extent() for text in ax.texts], 2):
        assert not one.overlaps(other)
    boxes = [text.get_window_extent().transformed(ax.transData.inverted()) for text in ax.texts]
    for line in lines:
        at = line[1] + (line[2] - line[1]) * np.linspace(0.0, 1.0, 200)
        for box in boxes:
            inside = (at.real > box.x0) & (at.real < box.x1)
            assert not np.any(inside & (at.imag > box.y0) & (at.imag < box.y1))


def test_more_labels_than_a_sheet_holds_are_refused():
    """300 labels on 6 inches: an error that says so, not a heap of letters."""
    _, ax = sheet()
    square = np.array([-1 - 1j, 1 - 1j, 1 + 1j, -1 + 1j])
    callouts = [Callout("name", 0.001j * k, "left") for k in range(300)]
    with pytest.raises(ValueError, match="300 labels do not fit beside the drawing"):
        place_callouts(ax, square, callouts, STYLE)
