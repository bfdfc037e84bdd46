"""The chapter on ripple and forces: whole on a coarse demo, and its faults in one line."""

import csv
import io
import math

import numpy as np
import pytest
from shipped import DESIGNS, shipped, shipped_model

from lamwright.app.map_run import make_desk, map_design
from lamwright.app.pool import Crew
from lamwright.app.ripple_chapter import rated_currents, written
from lamwright.app.ripple_work import highest_order, ripple_work, slot_skew, widest_skew
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.flux_map import FluxMap
from lamwright.postprocess.quantities import figures_of


def linear_map(l_d: float, l_q: float) -> FluxMap:
    """Two poles with constant inductances in H, currents 0 to 10 A."""
    i = np.linspace(0.0, 10.0, 4)
    i_d, i_q = np.meshgrid(i, i, indexing="ij")
    psi_d, psi_q = l_d * i_d, l_q * i_q
    torque = 1.5 * (psi_d * i_q - psi_q * i_d)
    coenergy = 0.75 * (psi_d * i_d + psi_q * i_q)
    fields = (values[..., None] for values in (psi_d, psi_q, torque, coenergy))
    return FluxMap(1, i, i, np.zeros(1), *fields)


def test_rated_currents_of_a_linear_machine() -> None:
    """Most torque per ampere at 45 degrees (checks A7), to the search's 0.1 degree."""
    i_d, i_q = rated_currents(coenergy_surface(linear_map(0.08, 0.02)), 8.0)
    assert math.hypot(i_d, i_q) == pytest.approx(8.0)
    assert math.degrees(math.atan2(i_q, i_d)) == pytest.approx(45.0, abs=0.06)


def test_orders_resolved_hold_three_slot_orders() -> None:
    """24/4: 60, the usual waveform's; 48/4: 72; 132/4: no more than 150; 141/4: its first, 282."""
    assert highest_order(2, 24) == 60
    assert highest_order(2, 48) == 72
    assert highest_order(2, 132) == 150
    assert highest_order(2, 141) == 282


def test_widest_skew_is_the_slot_orders_period() -> None:
    """24 slots, 4 poles: a slot pitch, 30 el. degrees; 12 and 10: 30 of a slot pitch of 150."""
    assert slot_skew(5, 12) == pytest.approx(math.pi / 6.0)
    assert widest_skew(shipped("demo_24s4p_arc", 2.5).machine) == pytest.approx(math.pi / 6.0)


@pytest.mark.parametrize("offset", [0.0, -0.1, 0.17, math.nan])
def test_a_rotor_that_would_touch_is_refused(offset, tmp_path) -> None:
    """24/4 demo, gap 0.4 mm: one line before anything is solved, and no folder."""
    path = next(p for p in DESIGNS if p.stem == "demo_24s4p_arc")
    with pytest.raises(LamwrightError, match=r"--eccentricity-mm .*accepted above 0 to 0\.16"):
        map_design(path, tmp_path / "out", eccentricity_mm=offset)
    assert not (tmp_path / "out").exists()


@pytest.mark.slow
def test_chapter_of_the_demo(tmp_path) -> None:
    """24/4 demo on a coarse mesh: tables, pictures, and figures that agree with each other."""
    one, model = shipped("demo_24s4p_arc", 2.5), shipped_model("demo_24s4p_arc", 2.5)
    shares: list[float] = []
    with Crew(make_desk, 1) as crew:
        work = ripple_work(one.machine, one.section, model, crew, (6.5, 10.0), 4e-5, shares.append)
    chapter = written(one.machine, one.section, work, tmp_path)
    assert shares[-1] == 1.0
    names = ("ripple.csv", "ripple_pairs.csv", "forces.csv", "tooth_forces.csv")
    names += ("ripple.png", "ripple.svg", "forces.png", "forces.svg")
    assert {path.name for path in tmp_path.iterdir()} == set(names)
    values = {f.key: f.value for group in chapter.figures for f in figures_of(group)}
    assert values["ripple_slot_order_el"] == 12
    rows = list(csv.DictReader(io.StringIO((tmp_path / "ripple.csv").read_text())))
    assert [row["order_el"] for row in rows] == [str(6 * k) for k in range(11)]
    assert float(rows[0]["amplitude_nm"]) == pytest.approx(work.waveform.mean, rel=1e-5)
    slot = float(rows[2]["percent_of_mean"])
    assert slot == pytest.approx(values["ripple_slot_order_percent"], rel=1e-5)
    assert rows[2]["is_slot_order"] == "yes"
    assert values["ripple_slot_order_slot_skew_percent"] < 0.5 * slot
    # The pull of a saturated, slotted machine is below that of a smooth gap, and no other sign.
    assert 0.0 < values["eccentric_pull_n"] < values["eccentric_pull_smooth_n"]
    assert values["eccentric_pull_n_per_mm"] == pytest.approx(values["eccentric_pull_n"] / 0.04)
    # Like poles: nothing pulls a centred rotor.
    assert values["centred_pull_most_n"] == pytest.approx(0.0, abs=1e-6)
    # Twice the electrical frequency, four waves: 2 * 2 * 1500 / 60.
    assert values["force_lowest_space_order"] == 4
    assert values["force_lowest_order_hz"] == pytest.approx(100.0)
