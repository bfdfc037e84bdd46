"""Orders of the speed against modes: who can shake whom, at which speed, and how it is told."""

import csv
import io
import math

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.postprocess.figures_modal import GROWN, modal_figure, mode_lines
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.modal_tables import (
    Speeds,
    driven_meetings,
    meetings_csv,
    modal_cautions,
    modal_figures,
    modes_csv,
)
from lamwright.postprocess.quantities import RPM, figures_of
from lamwright.postprocess.resonances import (
    Lamination,
    Order,
    driver,
    meeting_speed,
    meetings,
    nearest,
    orders_of,
)
from lamwright.solver.modal import Mode, Period, lowest_modes
from lamwright.solver.modal_bodies import stator_period
from tests.outlines import plain_design
from tests.plates import STEEL

SPEEDS = Speeds(rated=1500.0 / RPM, maximum=6000.0 / RPM, overspeed=7200.0 / RPM)


@pytest.fixture(scope="module")
def period() -> Period:
    """Any period will do where only frequencies are told."""
    return stator_period(cross_section(plain_design()), STEEL)


def mode(frequency: float, index: int, waves: int = 0) -> Mode:
    """A mode of which only this matters."""
    none = np.zeros((0, 2), dtype=np.complex128)
    return Mode(frequency, index, index == 1, waves, 1.0, 0.0, 0.0, none, False)


def lamination(period: Period, key: str, *modes: Mode) -> Lamination:
    orders = (Order("shaft", 1), Order("electrical 6", 12), Order("slots", 24))
    errors = 1e-3 * np.array([one.frequency for one in modes])
    return Lamination(key, key.replace("_", " "), period, modes, orders, 4, errors)


def test_orders_of_rotor_and_stator():
    """24 slots, 2 pole pairs: electrical k is 2 k a turn; the 12th is the slots, told once."""
    section = cross_section(plain_design())
    rotor = orders_of(section, is_stator=False)
    assert [order.times for order in rotor] == [1, 2, 12, 24, 36, 48]
    assert rotor[3].name == "electrical 12 and slots"
    stator = orders_of(section, is_stator=True)
    assert [order.times for order in stator] == [1, 2, 4, 8, 12, 16, 20, 24, 36, 48]


@pytest.mark.parametrize("sectors", [1, 2, 4, 8])
def test_waves_that_fit(sectors):
    """By trial over space orders r: a wave moves modes of index m alone where r = +-m + k n.

    n = 24 periods, of which the sectors are a divisor; the field has multiples of the sectors, one
    with its axis off the middle the orders next to them too.
    """
    centred = {j * sectors for j in range(60)}
    beside = {order + step for order in centred for step in (-1, 1)}
    for index in range(13):
        own = {sign * index + 24 * k for sign in (1, -1) for k in range(12)}
        told = "field" if own & centred else "offset axis" if own & beside else "neither"
        assert driver(mode(1.0, index), sectors) == told


def test_a_meeting_is_where_order_times_speed_is_the_frequency(period):
    """F = times n / 60: 2400 Hz and order 24 at 6000 1/min; above the top speed none is told."""
    one = lamination(period, "stator", mode(2400.0, 0), mode(2800.0, 2))
    assert meeting_speed(one.modes[0], one.orders[2]) * RPM == pytest.approx(6000.0)
    found = meetings((one,), SPEEDS.overspeed)
    assert [(m.number, m.order.times) for m in found] == [(1, 24), (2, 24)]
    assert [RPM * m.speed for m in found] == pytest.approx([6000.0, 7000.0])
    assert [m.number for m in driven_meetings((one,), SPEEDS.overspeed)] == [1]


def test_the_nearest_order():
    """At 5000 1/min 12 a turn are 1000 Hz and 24 are 2000: of 1600 Hz 25 % above is nearer."""
    orders = (Order("a", 12), Order("b", 24))
    order, share = nearest(mode(1600.0, 0), orders, 5000.0 / RPM)
    assert (order.name, share) == ("b", pytest.approx(0.25))


def test_figures_and_tables_tell_the_same(period):
    """Three laminations; the first meeting of a field's mode is that of the held rotor."""
    free = lamination(period, "rotor_free", mode(5000.0, 2, 2), mode(6000.0, 0))
    held = lamination(period, "rotor_held", mode(2000.0, 0), mode(5500.0, 1, 1))
    stator = lamination(period, "stator", mode(1200.0, 2, 2), mode(9000.0, 4, 4))
    whole = (free, held, stator)
    values = {f.key: f.value for g in modal_figures(whole, SPEEDS) for f in figures_of(g)}
    assert values["rotor_mode_free_hz"] == values["rotor_mode_oval_hz"] == 5000.0
    assert values["rotor_mode_held_hz"] == 2000.0
    assert (values["stator_mode_hz"], values["stator_mode_waves"]) == (1200.0, 2)
    assert values["mode_meetings"] == values["mode_meetings_overspeed"] == 1
    assert values["speed_mode_met_lowest_rpm"] == pytest.approx(5000.0)
    # At rated speed 24 a turn are 600 Hz, at maximum 2400 Hz: both nearest to 2000 Hz.
    assert values["mode_nearest_rated_percent"] == pytest.approx(-70.0)
    assert values["mode_nearest_maximum_percent"] == pytest.approx(20.0)
    rows = list(csv.DictReader(io.StringIO(modes_csv(whole, SPEEDS))))
    assert [float(row["frequency_hz"]) for row in rows] == [5e3, 6e3, 2e3, 5.5e3, 1.2e3, 9e3]
    told = [row["shaken_by"] for row in rows]
    assert told == ["neither", "field", "field", "offset axis", "neither", "field"]
    assert (rows[2]["nearest_maximum"], rows[2]["off_maximum_percent"]) == ("slots", "20.00")
    met = list(csv.DictReader(io.StringIO(meetings_csv(whole, SPEEDS))))
    speeds = [float(row["speed_rpm"]) for row in met]
    assert speeds == pytest.approx([3000.0, 5000.0, 6000.0])
    assert [row["lamination"] for row in met] == ["stator", "rotor_held", "stator"]
    first, *_ = modal_cautions(whole, SPEEDS)
    assert first.startswith("rotor held: order 24 (slots) meets the mode of 2000 Hz at 5000 1/min:")


def test_no_meeting_no_figure_of_it(period):
    """High modes: no speed, no warning but the standing ones; nothing is 0 that is not there."""
    one = lamination(period, "rotor_free", mode(1e5, 0))
    whole = (one, one, one)
    keys = {f.key for g in modal_figures(whole, SPEEDS) for f in figures_of(g)}
    assert "speed_mode_met_lowest_rpm" not in keys
    assert "rotor_mode_oval_hz" not in keys
    assert len(modal_cautions(whole, SPEEDS)) == 1
    assert math.isfinite(nearest(one.modes[0], one.orders, SPEEDS.rated)[1])


def test_a_mode_is_drawn_all_round(period):
    """24 pitches of edges that join end to end, at rest and moved: the phase from pitch to pitch.

    The farthest point moves by the share of the radius that is said.
    """
    one = lowest_modes(period, 1)[0]
    for lines in mode_lines(period, one):
        assert len(lines) % 24 == 0
        ends = np.round(np.concatenate([lines[:, 0], lines[:, 2]]), 6)
        _, met = np.unique(ends, return_counts=True)
        assert set(met.tolist()) == {2}
    rest, moved = mode_lines(period, one)
    outer = np.abs(rest).max()
    assert np.abs(moved - rest).max() == pytest.approx(GROWN * outer)


@pytest.mark.slow
def test_all_words_of_the_picture_are_on_its_sheet(period):
    """Names of orders stand beside the axes: none is cut off at the edge of the figure."""
    one = Lamination(
        "stator",
        "stator",
        period,
        lowest_modes(period, 6),
        orders_of(cross_section(plain_design()), is_stator=True),
        4,
        np.zeros(6),
    )
    figure = modal_figure("plain", (one, one, one), SPEEDS, Style())
    figure.canvas.draw()
    sheet = figure.bbox
    words = [*figure.texts, *(text for ax in figure.axes for text in (*ax.texts, ax.title))]
    assert len(words) > 50
    for text in words:
        box = text.get_window_extent()
        assert sheet.x0 <= box.x0 < box.x1 <= sheet.x1, text.get_text()
        assert sheet.y0 <= box.y0 < box.y1 <= sheet.y1, text.get_text()
