"""The chapter on control: its files for a linear machine behind the demo's winding and duty."""

import csv
import json
import math
import shutil
import subprocess
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from flux_laws import linear_map

from lamwright.app.cli import main
from lamwright.app.control_chapter import control_chapter
from lamwright.app.control_wishes import control_wishes
from lamwright.app.lamination import section_of
from lamwright.app.mapped import Mapped
from lamwright.app.progress import Stopwatch, silent
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.winding import end_winding_inductance, phase_resistance
from lamwright.postprocess.c_header import quantity_bases
from lamwright.postprocess.c_numbers import number_format
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.control import control_of
from lamwright.postprocess.control_files import drive_header
from lamwright.postprocess.netcdf import read_netcdf
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.terminals import terminals

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
L_D, L_Q = 0.12, 0.02  # invented, H
FILES = {
    "control.h",
    "control.nc",
    "control_plane.png",
    "control_plane.svg",
    "control_table.csv",
    "inverse_map.csv",
    "most_torque_per_ampere.csv",
    "most_torque_per_volt.csv",
    "most_torque_per_volt_speeds.csv",
}


def mapped(reach=15.0, size="5x4", form="float"):
    machine = read_machine(DEMO)
    axis = np.linspace(0.0, reach, 7)
    flux_map = linear_map(2, L_D, L_Q, axis, axis)
    # Only a map's own chapter of losses asks for fields, so there is neither model nor crew.
    whole = Mapped(
        machine,
        section_of(machine),
        None,
        flux_map,
        coenergy_surface(flux_map),
        "none",
        None,
        Stopwatch(silent, {}),
    )
    return replace(whole, control=control_wishes(size, form))


@pytest.fixture(scope="module")
def written(tmp_path_factory):
    stage = tmp_path_factory.mktemp("control")
    return stage, control_chapter(mapped(form="q15"), stage)


def rows_of(path):
    return list(csv.DictReader(path.read_text(encoding="utf-8").splitlines()))


def test_most_torque_per_volt_with_resistance_needs_the_least_voltage(written):
    """Linear machine: along a torque's line i_d i_q is fixed, and 20 001 trials need no less.

    u^2 = (R i_d - w (L_q + L_w) i_q)^2 + (R i_q + w (L_d + L_w) i_d)^2; the least of the trials
    lies a step off, 1e-7 of the voltage.
    """
    rows = rows_of(written[0] / "most_torque_per_volt_speeds.csv")
    design = read_machine(DEMO).design
    resistance, end = phase_resistance(design), end_winding_inductance(design)
    told = sorted({float(row["speed_rpm"]) for row in rows})
    assert told == pytest.approx([design.duty.rated_speed_rpm, 3000.0, 4500.0, 6000.0])
    for row in rows[:: len(rows) // 12]:
        i_d, i_q = float(row["i_d_a"]), float(row["i_q_a"])
        w = design.pole_pairs * float(row["speed_rpm"]) * math.pi / 30.0
        d = i_d * np.geomspace(0.3, 3.0, 20001)
        q = i_d * i_q / d
        volts = np.hypot(resistance * d - w * (L_Q + end) * q, resistance * q + w * (L_D + end) * d)
        own = float(row["voltage_line_rms_v"]) / math.sqrt(1.5)
        assert own == pytest.approx(volts.min(), rel=1e-6)
        assert float(row["torque_nm"]) == pytest.approx(1.5 * 2 * (L_D - L_Q) * i_d * i_q)


def test_files(written):
    """Every file is there, and no other."""
    stage, _ = written
    assert {path.name for path in stage.iterdir()} == FILES


def test_figures(written):
    """At 12 A: T = 3/2 p (L_d - L_q) I^2 / 2 at 45 degrees (checks A7)."""
    _, chapter = written
    figures = {
        figure.key: figure.value for group in chapter.figures for figure in figures_of(group)
    }
    assert figures["torque_at_current_limit_nm"] == pytest.approx(1.5 * (L_D - L_Q) * 144.0)
    assert figures["gamma_at_current_limit_el_deg"] == pytest.approx(45.0)
    assert figures["pull_out_ratio_rated_speed"] > 1.0
    assert 0.0 < figures["table_torque_error_rms_nm"] < figures["table_torque_error_most_nm"]
    assert json.dumps(figures)
    assert chapter.not_given == ()
    assert all("\n" not in line for line in chapter.cautions)


def test_planning_table(written):
    """Units in the headers; a row without currents is one that is marked unreachable."""
    stage, _ = written
    rows = rows_of(stage / "control_table.csv")
    assert len(rows) == 5 * 4
    for row in rows:
        assert (row["i_d_a"] == "") == (row["reachable"] == "0")
        assert float(row["speed_rpm"]) <= 6000.0
    assert {row["reachable"] for row in rows} == {"0", "1"}
    top = [row for row in rows if row["reachable"] == "1"][-1]
    assert float(top["voltage_line_rms_v"]) <= 400.0 * (1.0 + 1e-6)
    assert float(top["pull_out_ratio"]) >= 1.0


def test_netcdf_says_the_same(written):
    """The planning table in SI, gaps as nan."""
    stage, _ = written
    variables, attributes = read_netcdf(stage / "control.nc")
    rows = rows_of(stage / "control_table.csv")
    given = np.array([float(row["i_q_a"] or "nan") for row in rows]).reshape(5, 4)
    assert variables["i_q"].values == pytest.approx(given, rel=1e-7, nan_ok=True)
    assert variables["i_q"].unit == "A"
    assert variables["speed"].values[-1] == pytest.approx(6000.0 * np.pi / 30.0)
    assert attributes["current_limit_a"] == 12.0


@pytest.mark.skipif(shutil.which("cc") is None, reason="no C compiler")
def test_header_compiles_and_holds_the_torque(written, tmp_path):
    """Names of the design; the torque limit at standstill is the torque at 12 A, to a count."""
    stage, _ = written
    program = """
    #include <stdio.h>
    #include "control.h"
    int main(void) {
        printf("%.9g %d\\n", demo_24_4_arc_torque_limit[0] * DEMO_24_4_ARC_TORQUE_BASE / 32768.0,
               DEMO_24_4_ARC_SPEED_NODES);
        return 0;
    }
    """
    (tmp_path / "read.c").write_text(program)
    flags = ["-Wall", "-Werror", "-std=c99", "-I", str(stage), "-o", str(tmp_path / "read")]
    subprocess.run(["cc", *flags, str(tmp_path / "read.c")], check=True, capture_output=True)
    torque, speeds = subprocess.run(
        [tmp_path / "read"], check=True, capture_output=True, text=True
    ).stdout.split()
    assert float(torque) == pytest.approx(1.5 * (L_D - L_Q) * 144.0, rel=1e-4)
    assert int(speeds) == 4
    text = (stage / "control.h").read_text()
    for said in ("demo 24/4 arc", "invented", "Caution", "N m rms", "12 A peak", "400 V rms"):
        assert said in text


def test_errors_are_stated_of_the_numbers_that_are_written():
    """The bases that the reading error is computed with are those of the header."""
    whole = mapped()
    drive = terminals(
        whole.surface,
        resistance=0.9,
        end_inductance=0.001,
        current_limit=12.0,
        line_voltage=400.0,
    )
    control = control_of(drive, 1000.0, (3, 3), number_format("q15"))
    bases = quantity_bases(drive_header(control, "demo", ()), control.form)
    assert bases["current"] == control.current_base
    assert bases["torque"] == control.torque_base


def test_a_current_limit_beyond_the_map_is_not_given(tmp_path):
    """One line instead of figures; nothing is extrapolated, no file is written."""
    chapter = control_chapter(mapped(reach=11.0), tmp_path)
    assert chapter.figures == ()
    (line,) = chapter.not_given
    assert "current limit 12 A: outside the flux map, which ends at 11 A" in line
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("option", "value", "said"),
    [
        ("--table-size", "16", "accepted torques x speeds from 2x2 to 256x256"),
        ("--c-format", "double", "accepted float, or q7 to q31"),
    ],
)
def test_options_are_checked_before_anything_is_solved(tmp_path, option, value, said):
    """One line, exit code 2, no folder."""
    from click.testing import CliRunner

    out = tmp_path / "out"
    result = CliRunner().invoke(main, ["map", str(DEMO), "--out", str(out), option, value])
    assert result.exit_code == 2
    assert said in result.output
    assert len(result.output.strip().splitlines()) == 1
    assert not out.exists()
