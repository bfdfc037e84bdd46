"""The chapter on envelope and efficiency: its files, what it leaves empty, what it names.

Maps are those of laws, so no field is solved; the design lends duty, winding and losses.
"""

import csv
import json
import math
from pathlib import Path
from types import SimpleNamespace

import numpy as np
import pytest
from flux_laws import linear_map
from shipped import shipped, shipped_model

from lamwright.app import envelope_chapter as module
from lamwright.app.envelope_chapter import envelope_chapter
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.shifted_surface import shifted

NAME, COARSE = "demo_24s4p_arc", 2.0
NO_CARD = "iron loss: the steel card has no table loss: invented"


@pytest.fixture(autouse=True, scope="module")
def small():
    """Tables and pictures of fewer points: the same code in a fifth of the time."""
    sizes = {"SPEEDS": 21, "TABLE_SPEEDS": 6, "TABLE_TORQUES": 5, "SHEET_SPEEDS": 8}
    with pytest.MonkeyPatch.context() as patch:
        for name, size in {**sizes, "SHEET_SHARES": 6}.items():
            patch.setattr(module, name, size)
        yield


def mapped(i_d, i_q, *, psi_m=0.0, l_q=0.02, **duty):
    """The demo with the map of a linear machine, without iron loss; `duty` replaces its keys."""
    one = shipped(NAME, COARSE)
    design = one.machine.design
    changed = design.model_copy(update={"duty": design.duty.model_copy(update=duty)})
    surface = coenergy_surface(linear_map(2, 5.0 * l_q, l_q, i_d, i_q, psi_m=psi_m))
    return SimpleNamespace(
        machine=SimpleNamespace(design=changed),
        section=one.section,
        model=shipped_model(NAME, COARSE),
        surface=surface,
        losses=NO_CARD,
        shifted=(shifted(surface, 0.01, 0.0), shifted(surface, 0.0, 0.01)),
        angle_error=1e-3,
    )


def rows_of(path: Path):
    with path.open(newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file))


def figures_by_key(chapter):
    return {figure.key: figure.value for group in chapter.figures for figure in figures_of(group)}


@pytest.fixture(scope="module")
def usual(tmp_path_factory):
    """Chapter and folder of a linear machine of saliency 5 at 12 A and 400 V."""
    folder = tmp_path_factory.mktemp("usual")
    currents = np.linspace(0.0, 15.0, 4)
    return envelope_chapter(mapped(currents, currents), folder), folder


def test_tables_and_pictures_are_there(usual):
    """Each table and picture stands in the folder, and every number in the JSON is finite."""
    chapter, folder = usual
    names = {path.name for path in folder.iterdir()}
    tables = {"envelope.csv", "envelope_generating.csv", "efficiency.csv", "voltage_run.csv"}
    pictures = {f"{name}.{kind}" for name in ("envelope", "efficiency") for kind in ("png", "svg")}
    assert names == tables | pictures
    assert json.dumps(figures_by_key(chapter), allow_nan=False)


def test_figures_are_those_of_the_table(usual):
    """The base speed's row has both limits; torque up to it and power there agree with the table.

    The table's text has seven figures.
    """
    chapter, folder = usual
    figures = figures_by_key(chapter)
    rows = rows_of(folder / "envelope.csv")
    base = min(rows, key=lambda r: abs(float(r["speed_rpm"]) - figures["base_speed_rpm"]))
    assert float(base["speed_rpm"]) == pytest.approx(figures["base_speed_rpm"], rel=1e-6)
    assert float(base["torque_nm"]) == pytest.approx(figures["base_torque_nm"], rel=1e-5)
    assert float(base["power_w"]) == pytest.approx(figures["corner_power_w"], rel=1e-5)
    assert float(base["line_voltage_rms_v"]) == pytest.approx(400.0, rel=1e-5)
    assert float(base["current_peak_a"]) == pytest.approx(12.0, rel=1e-6)
    assert {row["limit"] for row in rows} >= {"current limit", "current and voltage limit"}
    assert abs(figures["voltage_run_current_difference_percent"]) < 0.5
    assert abs(figures["voltage_run_torque_difference_percent"]) < 0.5
    assert abs(figures["voltage_run_energy_gap_percent"]) < 0.5


def test_what_is_missing_is_named_and_left_empty(usual):
    """Without loss data neither a best efficiency nor an iron loss is given, and no zero stands in.

    Beyond the envelope a row has its torque and speed and nothing else.
    """
    chapter, folder = usual
    assert "best_efficiency_percent" not in figures_by_key(chapter)
    assert "efficiency: its best point is not given without iron loss" in chapter.not_given
    told_elsewhere = ("AC copper", "bearings", "rotor")  # by the map and the chapter on losses
    assert not [line for line in chapter.not_given if any(name in line for name in told_elsewhere)]
    rows = rows_of(folder / "efficiency.csv")
    assert {row["stator_iron_loss_w"] for row in rows} == {""}
    assert {row["rotor_iron_loss_w"] for row in rows} == {""}
    reached = [row for row in rows if row["efficiency_percent"]]
    beyond = [row for row in rows if not row["efficiency_percent"]]
    assert reached
    assert beyond
    asked = ("speed_rpm", "torque_nm")
    assert all(not value for row in beyond for key, value in row.items() if key not in asked)
    one = reached[len(reached) // 2]
    shaft = float(one["torque_nm"]) * float(one["speed_rpm"]) * math.pi / 30.0
    percent = 100.0 * shaft / float(one["input_w"])
    assert float(one["efficiency_percent"]) == pytest.approx(percent, rel=1e-4)


@pytest.mark.slow
def test_a_supply_that_reaches_no_torque_at_rated_speed(tmp_path):
    """Magnets of 0.5 V s against 12 A and 40 V: from some speed on nothing, in one line each."""
    currents = np.linspace(0.0, 15.0, 4)
    both = np.concatenate([-currents[:0:-1], currents])
    chapter = envelope_chapter(mapped(currents, both, psi_m=0.5, supply_voltage_v=40.0), tmp_path)
    lines = [line for line in chapter.not_given if "no torque is reached" in line]
    assert [line.partition(",")[0] for line in lines[1:]] == [
        "no torque is reached at rated speed",
        "voltage run: no torque is reached at rated speed",
    ]
    assert lines[0].endswith("/min up: speeds left empty")
    assert not any(key.startswith("envelope_torque_rated") for key in figures_by_key(chapter))
    empty = [row for row in rows_of(tmp_path / "envelope.csv") if not row["torque_nm"]]
    assert empty
    assert all(row["limit"] == "not reached" and not row["power_w"] for row in empty)


@pytest.mark.parametrize(
    ("i_d", "line"),
    [
        ([0.0, 2.0, 5.0], "current limit 12 A: outside the flux map, which ends at 5 A;"),
        ([2.0, 7.0, 15.0], "the flux map begins at i_d = 2 A; accepted grids that begin at 0 A"),
    ],
    ids=["too small", "not from zero"],
)
def test_a_grid_that_holds_no_envelope_is_one_line(i_d, line, tmp_path):
    """Nothing is written and nothing fails: the rest of the map stands."""
    chapter = envelope_chapter(mapped(np.array(i_d), np.linspace(0.0, 15.0, 4)), tmp_path)
    assert chapter.figures == ()
    assert len(chapter.not_given) == 1
    assert chapter.not_given[0].startswith(f"envelope, efficiency, voltage run: {line}")
    assert list(tmp_path.iterdir()) == []
