"""Slopes for the polish: what follows from linkages and peak, and what each axis moves."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from invented_verdict import MAGNETIC
from search_stand_in import study_file

from lamwright.app.point import read_machine
from lamwright.app.search_slopes import KNOWN_FIGURES, axis_motions, design_slopes, relative_slopes
from lamwright.app.search_space import search_space
from lamwright.app.study_file import read_study
from lamwright.app.study_task import task_of
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.slopes import KeySlope, ShapeFigures, SlopeTable
from lamwright.postprocess.summary import terminal_figures

DESIGNS = Path(__file__).parents[2] / "designs"
KEY = "rotor.barrier[1].thickness_mm"
SHAPE = {"torque": 1.0, "saliency": 2.0, "rib_peak": 2e8}


def invented_table(psi_d: float, psi_q: float) -> SlopeTable:
    """One key whose step of 0.1 mm changes both linkages by a share, and the peak by 3 %."""
    at = ShapeFigures(psi_d=MAGNETIC.psi_d, psi_q=MAGNETIC.psi_q, **SHAPE)
    change = ShapeFigures(
        torque=0.0,
        saliency=0.0,
        rib_peak=0.03 * at.rib_peak,
        psi_d=psi_d * at.psi_d,
        psi_q=psi_q * at.psi_q,
    )
    row = KeySlope(KEY, 2.6, 0.1, "mm", change)
    return SlopeTable("invented", MAGNETIC.i_d, MAGNETIC.i_q, at, 0.0, (row,), ())


@pytest.mark.parametrize(("d", "q"), [(0.02, 0.0), (0.0, 0.02), (0.01, -0.03)])
def test_power_factor_and_voltage_follow_from_the_linkages(d, q):
    """Against central differences of what the verdict computes: error of order h^2, 1e-6."""
    design = read_machine(DESIGNS / "demo_24s4p_arc.toml").design
    found = relative_slopes(design, invented_table(d, q))
    h = 1e-3
    up, down = (
        terminal_figures(
            design,
            replace(
                MAGNETIC,
                psi_d=MAGNETIC.psi_d * (1 + sign * h * d),
                psi_q=MAGNETIC.psi_q * (1 + sign * h * q),
            ),
        )
        for sign in (1, -1)
    )
    for figure, name in (("power_factor", "power_factor"), ("terminal_voltage_v", "line_voltage")):
        expected = np.log(getattr(up, name) / getattr(down, name)) / (2.0 * h) / 0.1
        assert found[figure][KEY] == pytest.approx(expected, rel=1e-5)


def test_the_yield_margin_falls_as_the_peak_rises():
    """Margin = strength / peak: the relative slopes are opposite, 0.3 per mm here."""
    design = read_machine(DESIGNS / "demo_24s4p_arc.toml").design
    found = relative_slopes(design, invented_table(0.0, 0.0))
    assert found["rib_stress_peak_mpa"][KEY] == pytest.approx(0.3)
    assert found["yield_margin"][KEY] == pytest.approx(-0.3)
    assert set(found) == set(KNOWN_FIGURES)


def test_a_key_of_the_design_moves_itself_alone(tmp_path):
    """A whole axis moves the key by its range: 4 mm and 30 degrees."""
    study = read_study(study_file(tmp_path), is_searched=True)
    space = search_space(study)
    motions = axis_motions(study, space, space.values((20_000, 15_000)))
    thickness, angle = motions
    assert thickness == pytest.approx({"rotor.barrier[1].thickness_mm": 4.0})
    assert angle == pytest.approx({"rotor.barrier[1].end_angle_deg": 30.0})


def test_a_layout_moves_all_barriers_and_other_keys_are_held():
    """The insulation ratio thickens every barrier; count and speed have no slopes.

    A layout is rounded to 0.01 mm, the difference is taken over 4 % of the axis: a part in ten.
    """
    study = read_study(DESIGNS / "studies" / "torque_against_ripple.toml", is_searched=True)
    space = search_space(study)
    values = {
        "layout.barriers": 3,
        "layout.end_angle_deg": 37.0,
        "layout.insulation_ratio": 0.32,
        "layout.rib_factor": 1.2,
        "duty.maximum_speed_rpm": 9000.0,
    }
    barriers, angle, insulation, ribs, speed = axis_motions(study, space, values)
    assert barriers is None
    assert speed is None
    for number in (1, 2, 3):
        assert insulation[f"rotor.barrier[{number}].thickness_mm"] > 0.5
        # Ends are equally spaced: end k of 3 at k / 3 of the innermost.
        expected = 11.0 * number / 3.0
        assert angle[f"rotor.barrier[{number}].end_angle_deg"] == pytest.approx(expected, rel=0.1)
    assert max(value for key, value in ribs.items() if key.endswith("tangential_rib_mm")) > 0.3


def test_a_machine_without_slopes_says_why(tmp_path, monkeypatch):
    """The reason of `slopes`, on one line, and no error."""
    why = "no outline\nto follow"

    def refused(*_: object) -> None:
        raise LamwrightError(why)

    monkeypatch.setattr("lamwright.app.slopes.slopes_of", refused)
    study = read_study(study_file(tmp_path), is_searched=True)
    told = design_slopes(task_of(study, search_space(study).values((8_000, 3_000))))
    assert told.refusal == "no outline to follow"
    assert told.by_figure == {}
