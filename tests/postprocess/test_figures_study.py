"""The pictures of a study: nothing overlaps, and they show the numbers they were given."""

import dataclasses
from itertools import combinations

import numpy as np
import pytest
from matplotlib.text import Text

from lamwright.postprocess.figures_study import (
    effects_figure,
    front_figure,
    heat_figure,
    parallel_figure,
    write_study_figures,
)
from lamwright.postprocess.figures_study_heat import value_colours
from lamwright.postprocess.figures_study_parallel import parallel_axes
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.studied import Studied, StudyAxis, best_of

STYLE = Style(dpi=60.0)  # a third of the time; sizes on paper are the same
HOLES = (3, 11, 17)  # designs without figures


def made(key_values, *, ripple_limit=15.0, texts=()):
    """A study over all pairs of two keys' values, or over 60 points of them, torque by formula."""
    first, second = key_values
    count = first.size
    torque = 11.0 + 0.3 * np.sin(first) + 0.1 * second
    ripple = 12.0 + 9.0 * np.cos(1.7 * first + second)
    margin = 2.5 - 0.05 * first
    for values in (torque, ripple, margin):
        values[list(HOLES)] = np.nan
    passes = np.nan_to_num(ripple, nan=np.inf) <= ripple_limit
    reasons = ["" if np.isfinite(t) else "barriers 1 and 2 cross" for t in torque]
    reasons[HOLES[0]] = "the rib at the gap is thinner than the sheet and would tear when punched"
    return Studied(
        "an invented study with a rather long name",
        np.arange(1, count + 1),
        passes,
        tuple(reasons),
        (
            StudyAxis("layout.end_angle_deg", "end angle", "deg", first, is_key=True),
            StudyAxis("steel.rotor_card", "rotor card", "", second, texts, is_key=True),
        ),
        (
            StudyAxis(
                "torque_nm", "torque, mean", "N m", torque, errors=0.01 * torque, sense="most"
            ),
            StudyAxis(
                "torque_ripple_percent",
                "torque ripple",
                "%",
                ripple,
                most=ripple_limit,
                sense="least",
            ),
            StudyAxis("yield_margin", "yield margin at overspeed", "", margin, least=1.2),
        ),
    )


def grid(rows, columns, **fields):
    first, second = np.meshgrid(np.linspace(30.0, 41.0, columns), np.arange(rows, dtype=float))
    return made((first.ravel(), second.ravel()), **fields)


def scattered(count):
    random = np.random.default_rng(7)
    return made((random.uniform(4.0, 20.0, count), random.uniform(0.0, 3.0, count)))


STUDIES = {
    "grid": grid(4, 12),
    "texts": grid(3, 8, texts=("steel_a.toml", "steel_b.toml", "steel_c.toml")),
    "wide grid": grid(16, 40),
    "none holds": grid(4, 12, ripple_limit=0.5),
    "scattered": scattered(200),
}


def front(studied, style):
    return front_figure(studied, studied.goals, {}, style)


COMPOSERS = {
    "parallel": parallel_figure,
    "effects": effects_figure,
    "heat": heat_figure,
    "front": front,
}


def beyond(ax):
    """Labels of ticks outside the axes' limits, which exist and are not drawn."""
    for axis in (ax.xaxis, ax.yaxis):
        low, high = sorted(axis.get_view_interval())
        for tick in axis.get_major_ticks():
            if not low <= tick.get_loc() <= high:
                yield from (tick.label1, tick.label2)


def clashes(figure):
    """Pairs of texts that share pixels, and texts that leave the sheet."""
    figure.canvas.draw()
    width, height = figure.canvas.get_width_height()
    unseen = {id(text) for ax in figure.axes for text in beyond(ax)}
    texts = [t for t in figure.findobj(Text) if t.get_visible() and t.get_text().strip()]
    texts = [text for text in texts if id(text) not in unseen]
    found = [(text.get_text(), text.get_window_extent()) for text in texts]
    out = [text for text, b in found if b.x0 < 0 or b.y0 < 0 or b.x1 > width or b.y1 > height]
    return out + [(one, other) for (one, a), (other, b) in combinations(found, 2) if a.overlaps(b)]


CASES = [
    ("parallel", "texts"),
    ("parallel", "scattered"),
    ("effects", "texts"),
    ("effects", "scattered"),
    ("heat", "grid"),
    ("heat", "texts"),
    ("front", "none holds"),
    ("front", "scattered"),
]
SLOW = [
    (name, study)
    for study in STUDIES
    for name in COMPOSERS
    if (name, study) not in CASES and (name, study) != ("heat", "scattered")
]


@pytest.mark.parametrize(("name", "study"), CASES)
def test_no_two_texts_overlap_and_none_leaves_the_sheet(name, study):
    """Of a grid, of texts, of a study where no design holds, of a scattered set."""
    assert clashes(COMPOSERS[name](STUDIES[study], STYLE)) == []


@pytest.mark.slow
@pytest.mark.parametrize(("name", "study"), SLOW)
def test_no_two_texts_overlap_in_any_study(name, study):
    """All others, a map of 640 cells too."""
    assert clashes(COMPOSERS[name](STUDIES[study], STYLE)) == []


def test_a_map_writes_each_value_and_hatches_each_reason():
    """48 cells, three of them without a value; the best that holds every limit in a box."""
    studied = STUDIES["grid"]
    figure = heat_figure(studied, STYLE)
    torque = figure.axes[0]
    values = studied.figures[0].values
    finite = np.isfinite(values)
    written = [text.get_text() for text in torque.texts]
    assert sorted(written) == sorted(f"{value:.2f}" for value in values[finite])
    boxed = [text.get_text() for text in torque.texts if text.get_bbox_patch() is not None]
    assert boxed == [f"{values[best_of(studied.figures[0], studied.passes)]:.2f}"]
    hatches = [patch.get_hatch() for patch in torque.patches]
    assert len(hatches) == len(HOLES)
    assert len(set(hatches)) == 2
    legend = [text.get_text() for text in figure.legends[0].get_texts()]
    assert legend[0] == "barriers 1 and 2 cross"
    assert legend[1].startswith("the rib at the gap is thinner")


def test_parallel_axes_put_the_better_on_top():
    """The best by ripple, which is to be least, is at the top of its axis."""
    studied = STUDIES["grid"]
    axes = parallel_axes(studied)
    assert [axis.name for axis in axes][-2:] == ["torque_nm", "torque_ripple_percent"]
    figure = parallel_figure(studied, STYLE)
    best = best_of(studied.goals[1], studied.passes)
    accent = [line for line in figure.axes[0].lines if line.get_color() == STYLE.accent]
    heights = np.array([line.get_ydata() for line in accent])
    assert best == np.nanargmin(np.where(studied.passes, studied.figures[1].values, np.nan))
    assert heights[:, -1].max() == pytest.approx(0.97)
    others = [line.get_ydata() for line in figure.axes[0].lines if len(line.get_ydata()) > 2]
    assert np.nanmax([heights[-1] for heights in others]) == pytest.approx(0.97)


def test_curves_of_effects_hold_mean_and_deviation():
    """The bars' ends are one standard deviation off the mean of a column of the grid."""
    studied = STUDIES["grid"]
    panel = effects_figure(studied, STYLE).axes[0]
    torque, angle = studied.figures[0].values, studied.keys[0].values
    column = torque[(angle == 30.0) & np.isfinite(torque)]
    ends = panel.collections[0].get_segments()[0][:, 1]
    assert ends == pytest.approx(
        [column.mean() - column.std(ddof=1), column.mean() + column.std(ddof=1)]
    )


def test_colours_fall_in_lightness_with_dark_the_better():
    """So that a map reads in grey print and with colour-blindness; reversed for a goal of least."""
    axis = STUDIES["grid"].figures[0]
    grey = np.array([0.2126, 0.7152, 0.0722])
    light = value_colours(axis)(np.linspace(0.0, 1.0, 64))[:, :3] @ grey
    assert (np.diff(light) < 0.0).all()
    least = value_colours(dataclasses.replace(axis, sense="least"))(np.linspace(0.0, 1.0, 64))
    assert (np.diff(least[:, :3] @ grey) > 0.0).all()


def test_files_are_the_same_to_the_byte(tmp_path):
    """Drawn twice from the same rows; what cannot be drawn is left out."""
    studied = grid(2, 9)
    style = Style(dpi=30.0)
    for name in ("one", "two"):
        (tmp_path / name).mkdir()
        written = write_study_figures(tmp_path / name, studied, {}, style)
    names = sorted(path.name for path in written)
    assert names == sorted(
        f"study_{part}.{ending}"
        for part in ("effects", "front", "heat", "parallel")
        for ending in ("png", "svg")
    )
    for name in names:
        assert (tmp_path / "one" / name).read_bytes() == (tmp_path / "two" / name).read_bytes()
