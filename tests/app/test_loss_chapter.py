"""The chapter of `map` on losses: figures, tables and pictures, and what is not given."""

import csv
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from lamwright.app.chapter import Chapter
from lamwright.app.loss_chapter import loss_chapter
from lamwright.app.mapped import Mapped
from lamwright.app.pool import Crew
from lamwright.app.progress import Stopwatch
from lamwright.geometry.design_file import Machine
from lamwright.geometry.design_loss import LossesDesign, StrandDesign
from lamwright.geometry.winding import phase_resistance
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.quantities import figures_of
from tests.flux_laws import linear_map
from tests.shipped import shipped, shipped_model

NAME = "demo_24s4p_arc"
STRANDS = StrandDesign(round_diameter_mm=0.944, in_hand=2)


def _mapped(machine: Machine) -> Mapped:
    """The demo with a linear machine's map: the chapter takes the current angle from it alone."""
    axis = np.linspace(0.0, 15.0, 5)
    flux_map = linear_map(2, 0.04, 0.008, axis, axis)
    one = shipped(NAME, 2.0)
    return Mapped(
        machine=machine,
        section=one.section,
        model=shipped_model(NAME, 2.0),
        flux_map=flux_map,
        surface=coenergy_surface(flux_map),
        losses="iron loss: told by the map",
        crew=Crew.__new__(Crew),
        watch=Stopwatch(lambda _: None),
    )


def _figures(chapter: Chapter) -> dict[str, float]:
    return {f.key: f.value for group in chapter.figures for f in figures_of(group)}


def _rows(path: Path) -> tuple[list[str], np.ndarray]:
    header, *rows = csv.reader(path.read_text().splitlines())
    return header, np.array(rows, dtype=float)


def test_all_losses_of_a_machine(tmp_path):
    """Figures agree with tables, parts with sums; copper by its formula, AC copper near Field's."""
    machine = shipped(NAME, 2.0).machine
    design = machine.design
    winding = design.winding.model_copy(update={"strands": STRANDS})
    losses = LossesDesign(bearing_friction_nm=0.05)
    machine = replace(
        machine, design=design.model_copy(update={"winding": winding, "losses": losses})
    )
    chapter = loss_chapter(_mapped(machine), tmp_path)
    told = _figures(chapter)
    assert chapter.not_given == ()
    assert told["loss_angle_el_deg"] == pytest.approx(45.0, abs=0.2)
    copper = 1.5 * phase_resistance(design) * design.duty.rated_current_a**2
    assert told["copper_slots_w"] + told["copper_end_turns_w"] == pytest.approx(copper)
    # Slots of one phase in a saturated machine: the mouth's flux adds to the slot's own.
    assert 1.0 < told["copper_ac_percent"] / told["copper_ac_closed_percent"] < 3.0
    extra = 0.01 * told["copper_ac_percent"] * told["copper_slots_w"]
    assert told["copper_ac_extra_w"] == pytest.approx(extra)
    parts = told["iron_teeth_w"] + told["iron_yoke_w"] + told["iron_rotor_w"]
    kinds = told["iron_hysteresis_w"] + told["iron_eddy_w"] + told["iron_excess_w"]
    assert parts == pytest.approx(kinds)
    header, orders = _rows(tmp_path / "iron_loss_orders.csv")
    assert orders[:, header.index("rotor_w")].sum() == pytest.approx(told["iron_rotor_w"], rel=1e-4)
    assert orders[:, -3:].sum() == pytest.approx(parts, rel=1e-4)
    header, rows = _rows(tmp_path / "losses.csv")
    assert header[0] == "speed_rpm"
    assert rows[-1, 0] == pytest.approx(design.duty.maximum_speed_rpm)
    assert np.all(np.diff(rows[:, header.index("iron_rotor_w")]) > 0.0)
    at_rated = np.array([np.interp(1500.0, rows[:, 0], column) for column in rows.T])
    assert at_rated[header.index("bearings_w")] == pytest.approx(told["bearings_w"], rel=1e-6)
    for name in ("losses", "loss_density"):
        assert (tmp_path / f"{name}.png").stat().st_size > 10_000
        assert (tmp_path / f"{name}.svg").exists()


def test_what_lacks_an_input_is_named_as_not_given(tmp_path):
    """No loss points, no strands, no bearing torque: no figure, a line for each, never a guess."""
    machine = shipped(NAME, 2.0).machine
    card = machine.rotor_steel.model_copy(update={"loss": None})
    winding = machine.design.winding.model_copy(update={"strands": None})
    design = machine.design.model_copy(update={"winding": winding})
    bare = replace(machine, design=design, rotor_steel=card, stator_steel=card)
    chapter = loss_chapter(_mapped(bare), tmp_path)
    told = _figures(chapter)
    assert not [key for key in told if key.startswith(("iron", "copper_ac", "bearings"))]
    assert told["copper_slots_w"] > 0.0
    assert chapter.not_given == (
        "AC copper loss, the efficiency is without it: the design has no table winding.strands",
        "friction of bearings, the efficiency is without it: "
        "the design states no losses.bearing_friction_nm",
    )
    header, _ = _rows(tmp_path / "losses.csv")
    assert header == ["speed_rpm", "copper_slots_w", "copper_end_turns_w", "windage_w"]
    assert not (tmp_path / "iron_loss_orders.csv").exists()
    assert not (tmp_path / "loss_density.png").exists()
