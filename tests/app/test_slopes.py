"""The command `slopes`: what lands in the folder, and that it tells the truth of the design."""

import json
import re
from pathlib import Path

import pytest
from click.testing import CliRunner

from lamwright.app.cli import main
from lamwright.geometry.design_file import read_design
from lamwright.solver.design_motion import shape_keys

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"


@pytest.fixture(scope="module")
def run(tmp_path_factory):
    """The command's result and its record."""
    out = tmp_path_factory.mktemp("slopes")
    result = CliRunner().invoke(main, ["slopes", str(DEMO), "--out", str(out)])
    assert result.exit_code == 0, result.output
    return result, out, json.loads((out / "slopes.json").read_text())


def test_files_and_screen_hold_every_key(run):
    """Four files; each key of the design in table and screen, ranked by torque."""
    result, out, record = run
    assert {file.name for file in out.iterdir()} == {
        "slopes.csv",
        "slopes.json",
        "slopes.png",
        "slopes.svg",
    }
    keys = [row["key"] for row in record["keys"]]
    assert sorted(keys) == sorted(shape_keys(read_design(DEMO)))
    assert all(f"{key} = " in result.stdout for key in keys)
    changes = [abs(row["change_torque_nm"]) for row in record["keys"]]
    assert changes == sorted(changes, reverse=True)


def test_signs_are_those_of_the_trade(run):
    """A wider gap costs torque; a longer stack brings it in proportion; ribs leak and carry."""
    rows = {row["key"]: row for row in run[2]["keys"]}
    assert rows["rotor.gap_mm"]["change_torque_percent"] < -1.0
    stack = rows["stator.stack_length_mm"]
    assert stack["change_torque_percent"] == pytest.approx(10.0 / stack["value_mm"], rel=1e-9)
    rib = rows["rotor.barrier[2].tangential_rib_mm"]
    assert rib["change_psi_q_vs"] > 0.0 > rib["change_torque_nm"]
    strongest = min(row["change_rib_stress_peak_mpa"] for row in rows.values())
    assert any(
        row["change_rib_stress_peak_mpa"] == strongest and "tangential_rib" in key
        for key, row in rows.items()
    )
    assert rows["rotor.sheet_thickness_mm"]["change_torque_nm"] == 0.0
    assert rows["stator.outer_diameter_mm"]["change_rib_stress_peak_mpa"] == 0.0


def test_figures_follow_from_the_linkages(run):
    """Torque 3/2 p (psi_d i_q - psi_q i_d) and saliency from the same means, and a small bias."""
    record = run[2]
    ratio = record["psi_d_vs"] * record["i_q_a"] / (record["psi_q_vs"] * record["i_d_a"])
    assert record["saliency_ratio"] == pytest.approx(ratio, rel=1e-12)
    torque = 3.0 * (record["psi_d_vs"] * record["i_q_a"] - record["psi_q_vs"] * record["i_d_a"])
    assert record["torque_nm"] == pytest.approx(torque, rel=1e-12)
    assert -4.0 < record["rib_stress_smoothing_bias_percent"] < 0.0


def test_a_broken_design_ends_with_2(tmp_path):
    """As every command: one line a fault, nothing written."""
    broken = tmp_path / "broken.toml"
    broken.write_text(DEMO.read_text().replace("gap_mm = 0.4", "gap_mm = -0.4"))
    result = CliRunner().invoke(main, ["slopes", str(broken), "--out", str(tmp_path / "out")])
    assert result.exit_code == 2
    assert "gap_mm" in result.stderr
    assert not (tmp_path / "out").exists()


@pytest.mark.slow
def test_magnets_and_skew_have_slopes_too(tmp_path):
    """Both at once: saliency without the no-load psi_q, a line about the stress, torque by gap.

    More gap takes flux of both kinds: less torque.
    """
    source = DEMO.parent / "demo_36s4p_magnet.toml"
    text = source.read_text().replace(
        "[rotor]\n", "[rotor]\nskew_steps = 2\nskew_angle_deg = 5.0\n"
    )
    text = re.sub(r'"((?:steel|magnet)/)', rf'"{DEMO.parent}/\1', text)
    design = tmp_path / "skewed.toml"
    design.write_text(text)
    out = tmp_path / "out"
    result = CliRunner().invoke(main, ["slopes", str(design), "--out", str(out)])
    assert result.exit_code == 0, result.output
    record = json.loads((out / "slopes.json").read_text())
    plain = record["psi_d_vs"] * record["i_q_a"] / (record["psi_q_vs"] * record["i_d_a"])
    assert record["saliency_ratio"] < 0.95 * plain  # psi_q at no load is negative
    assert any("magnets' load" in line for line in record["left_out"])
    (gap,) = (row for row in record["keys"] if row["key"] == "rotor.gap_mm")
    assert gap["change_torque_nm"] < 0.0
