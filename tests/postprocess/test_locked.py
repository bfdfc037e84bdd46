"""Curves of a locked rotor: feeds, angles, measured values beside, tables, and the picture."""

import csv
import dataclasses
import math
from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.figures_locked import write_locked
from lamwright.postprocess.files import csv_text
from lamwright.postprocess.locked import (
    FEEDS,
    LockedCurves,
    at_angles,
    feed_of,
    locked_angles,
    locked_cautions,
    locked_figures,
    parsed_currents,
)
from lamwright.postprocess.locked_measured import (
    MEASURED,
    NO_CURRENT,
    compared,
    has_measured,
    read_measured,
)
from lamwright.postprocess.locked_tables import comparison_csv, locked_csv, locked_record
from lamwright.solver.integrals import phase_currents

L_D, L_Q, END = 0.090, 0.020, 0.002  # H, of a phase
DEGREE = math.pi / 180.0
CURRENTS = (5.0, 8.0)


def linear_curves(feed: str = "two-in-series") -> LockedCurves:
    """A linear machine of four poles: psi_t = (mean + half sin) I, T = 1/2 I^2 dL/d theta."""
    how, currents = feed_of(feed), np.array(CURRENTS)
    angle = np.array(locked_angles(2, 1, 5.0))
    mean, half = 0.5 * (L_D + L_Q), 0.5 * (L_D - L_Q)
    inductance = how.terminal_factor * (mean + half * np.cos(4.0 * angle))
    slope = -4.0 * how.terminal_factor * half * np.sin(4.0 * angle)  # dL/d theta
    return LockedCurves(
        design_name="linear",
        feed=how,
        pole_pairs=2,
        poles_in_period=1,
        currents=currents,
        angle=angle,
        torque=0.5 * np.outer(currents**2, slope),
        linkage=np.outer(currents, inductance),
        slope=np.outer(np.ones(2), inductance),
        bare_slope=inductance,
        coenergy=0.5 * np.outer(currents**2, inductance),
        end_inductance=END,
        skew_steps=1,
        rated_current=10.0,
        seconds=0.0,
    )


@pytest.mark.parametrize("name", FEEDS)
@pytest.mark.parametrize("angle_el", [0.0, 0.4, 2.0, -1.1])
def test_dq_currents_are_those_of_the_fed_phases(name: str, angle_el: float) -> None:
    """Park's transform of (I, -I/2, -I/2) or (I, -I, 0), whatever the rotor's angle; exact."""
    feed = feed_of(name)
    i_d, i_q = feed.currents(10.0, angle_el)
    phases = phase_currents(i_d, i_q, angle_el + feed.axis_el)
    assert phases == pytest.approx(10.0 * np.array(feed.weights), abs=1e-12)


@pytest.mark.parametrize("name", FEEDS)
def test_linear_machine_gives_its_inductances_back(name: str) -> None:
    """Extremes of the terminal inductance over its factor; T_max = 3/4 p (L_d - L_q) |i|^2."""
    curves = linear_curves(name)
    for figures, current in zip(locked_figures(curves), curves.currents, strict=True):
        assert figures.l_d == pytest.approx(L_D, rel=1e-12)
        assert figures.l_q == pytest.approx(L_Q, rel=1e-12)
        assert figures.l_dd == pytest.approx(L_D, rel=1e-12)
        size = curves.feed.amplitude * current
        # The crest falls on one of eight points between two angles: 1 - cos of half of that.
        assert figures.torque == pytest.approx(0.75 * 2 * (L_D - L_Q) * size**2, rel=2e-4)


def test_interpolant_meets_harmonics_at_any_angle() -> None:
    """A sum of harmonics below the sampling limit is met exactly, in any period."""
    curves = linear_curves()

    def law(angle: np.ndarray) -> np.ndarray:
        return 3.0 + np.cos(4.0 * angle - 0.3) - 0.2 * np.sin(20.0 * angle)

    places = np.array([-3.0, -0.1, 0.0, 0.77, 5.0])
    found = at_angles(curves, law(curves.angle), places.tolist())
    assert found == pytest.approx(law(places), abs=1e-12)


def test_angles_fill_the_period_evenly() -> None:
    """0.7 degrees do not divide 90: 129 steps a little less; a whole number is kept."""
    assert len(locked_angles(2, 1, 0.7)) == 129
    assert len(locked_angles(2, 1, None)) == 90
    assert len(locked_angles(2, 2, 1.0)) == 180
    angles = locked_angles(3, 1, 1.0)
    assert np.diff(angles) == pytest.approx(DEGREE, rel=1e-12)
    assert angles[-1] + DEGREE == pytest.approx(math.pi / 3)


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("", "no current"),
        (" , ", "no current"),
        ("15,,25", "'' is no number"),
        ("15,-3", "-3 A is not above 0"),
        ("0", "0 A is not above 0"),
        ("nan", "nan A is not above 0"),
        ("1e999", "1e999 A is not above 0"),
        ("15;25", "'15;25' is no number"),
        ("15,15.0", "15.0 A stands there twice"),
        (",".join(str(k) for k in range(1, 14)), "13 currents"),
    ],
)
def test_bad_currents_are_refused_in_one_line(text: str, fault: str) -> None:
    """Each names the fault and what is accepted."""
    with pytest.raises(LamwrightError) as caught:
        parsed_currents(text)
    line = str(caught.value)
    assert fault in line
    assert "accepted up to 12 different currents" in line
    assert "\n" not in line


@pytest.mark.parametrize("step", [0.0, -1.0, math.nan, math.inf, 5.1, 0.049])
def test_bad_steps_are_refused_in_one_line(step: float) -> None:
    """Of four poles 0.05 to 5 mechanical degrees are accepted."""
    with pytest.raises(LamwrightError, match=r"--step-deg .*accepted 0\.05 to 5 \(mechanical\)$"):
        locked_angles(2, 1, step)


def test_cautions_name_torque_skew_and_too_much_current() -> None:
    """Three quarters of 4 (L_d - L_q) I^2 a phase: 8.96 N m; 8 A is below 10, not 4."""
    curves = linear_curves()
    plain = locked_cautions(curves)
    assert "up to 8.96 N m" in plain[0]
    assert not any("rated" in line or "skew" in line for line in plain)
    hard = locked_cautions(dataclasses.replace(curves, rated_current=4.0, skew_steps=3))
    assert any(line.startswith("8 A is 2 times the design's rated peak current") for line in hard)
    assert any("3 steps of skew" in line for line in hard)


def filled(path: Path, rows: list[tuple[float, float, str, str]]) -> Path:
    """A table of measured torque and apparent inductance."""
    header = ["current_a", "angle_mech_deg", *list(MEASURED)[:2]]
    path.write_text(csv_text(header, [[str(cell) for cell in row] for row in rows]))
    return path


def test_measured_values_are_compared_where_they_stand(tmp_path: Path) -> None:
    """Offsets put in come out: torque 0.1 too much, inductance with the end winding, zero at 10."""
    curves = linear_curves()

    def torque(angle_deg: float) -> float:
        return float(at_angles(curves, curves.torque[1], [DEGREE * angle_deg])[0])

    def inductance(angle_deg: float) -> float:
        field = at_angles(curves, curves.apparent[1], [DEGREE * angle_deg])[0]
        return 1e3 * float(field + 2.0 * END)

    rows = [(8.0, a + 10.0, f"{torque(a) + 0.1}", f"{inductance(a)}") for a in (-7.0, 3.3, 100.0)]
    rows.append((8.01, 30.0, f"{torque(20.0) - 0.3}", " "))
    path = filled(tmp_path / "bench.csv", rows)
    torques, inductances = (compared(curves, one) for one in read_measured(path, CURRENTS, 10.0))
    assert torques.difference == pytest.approx([0.1, 0.1, -0.3, 0.1], abs=1e-9)
    assert torques.rms == pytest.approx(math.sqrt(0.12 / 4), rel=1e-9)
    assert torques.measured.angle[torques.worst] == pytest.approx(20.0 * DEGREE)
    assert inductances.difference == pytest.approx([0.0] * 3, abs=1e-9)


def test_table_can_be_filled_in_and_read_again(tmp_path: Path) -> None:
    """Columns are empty until someone fills them; filled, they are read and written back."""
    curves, path = linear_curves(), tmp_path / "locked.csv"
    path.write_text(locked_csv(curves, ()))
    rows = list(csv.DictReader(path.read_text().splitlines()))
    assert len(rows) == 2 * 19  # 0 to 90 degrees with both ends
    assert all(row[name] == "" for row in rows for name in MEASURED)
    assert not has_measured(path)
    with pytest.raises(LamwrightError, match="no row has a measured value; fill in measured_"):
        read_measured(path, CURRENTS)
    rows[3]["measured_torque_nm"] = "-2.5"
    path.write_text(csv_text(list(rows[0]), [list(row.values()) for row in rows]))
    assert has_measured(path)
    comparisons = [compared(curves, one) for one in read_measured(path, CURRENTS)]
    again = list(csv.DictReader(locked_csv(curves, comparisons).splitlines()))
    assert [row["measured_torque_nm"] for row in again if row["measured_torque_nm"]] == ["-2.5"]
    assert again[3]["measured_torque_nm"] == "-2.5"
    beside = tmp_path / "locked_comparison.csv"
    beside.write_text(comparison_csv(curves, comparisons))
    assert read_measured(beside, CURRENTS)[0].value == pytest.approx([-2.5])
    record = locked_record(curves, comparisons, "0", "hash")
    assert record["comparisons"][0]["difference_rms_nm"] == pytest.approx(comparisons[0].rms)


def test_bridge_values_need_no_current(tmp_path: Path) -> None:
    """They are held to the curve without current, and stand in the table once."""
    curves, path = linear_curves(), tmp_path / "bridge.csv"
    path.write_text("current_a,angle_mech_deg,measured_inductance_no_current_mh\n,0,185\n,45,43\n")
    (measured,) = read_measured(path, CURRENTS)
    found = compared(curves, measured)
    assert found.measured.current == 0.0
    # 2 (90 + 2) = 184 and 2 (20 + 2) = 44 mH
    assert found.difference == pytest.approx([1e-3, -1e-3], abs=1e-9)
    text = locked_csv(curves, [found])
    rows = [row[NO_CURRENT] for row in csv.DictReader(text.splitlines()) if row[NO_CURRENT]]
    assert rows == ["185", "43"]


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("", ":1: no column current_a"),
        ("current_a,angle_mech_deg,torque\n8,1,2\n", ":1: no column measured_"),
        ("current_a,angle_mech_deg,measured_torque_nm\n8,1,x\n", ":2: measured_torque_nm = 'x'"),
        ("current_a,angle_mech_deg,measured_torque_nm\n8,,1\n", ":2: angle_mech_deg = ''"),
        ("current_a,angle_mech_deg,measured_torque_nm\n8,0,inf\n", "'inf': no number"),
        ("current_a,angle_mech_deg,measured_torque_nm\n9,0,1\n", "9: not computed; accepted 5, 8"),
        ("current_a,angle_mech_deg,measured_torque_nm\n8\n", "no row has a measured value"),
    ],
)
def test_bad_tables_are_refused_in_one_line(tmp_path: Path, text: str, fault: str) -> None:
    """With file, line, column and what would do."""
    path = tmp_path / "bench.csv"
    path.write_text(text)
    with pytest.raises(LamwrightError) as caught:
        read_measured(path, CURRENTS)
    assert fault in str(caught.value)
    assert "\n" not in str(caught.value)


def test_absent_and_binary_tables_are_refused(tmp_path: Path) -> None:
    """One line with the path each."""
    with pytest.raises(LamwrightError, match=r"absent\.csv: cannot be read: no such file"):
        read_measured(tmp_path / "absent.csv", CURRENTS)
    (tmp_path / "binary.csv").write_bytes(b"\xff\xfe\x00\x80")
    with pytest.raises(LamwrightError, match=r"binary\.csv: cannot be read: is no text"):
        read_measured(tmp_path / "binary.csv", CURRENTS)


def test_picture_shows_measured_values_too(tmp_path: Path) -> None:
    """Both files are whole, the SVG names marks once and every current."""
    curves = linear_curves()
    rows = [(c, a, "1.0", "90.0") for c in (5.0, 8.0) for a in (10.0, 50.0)]
    found = read_measured(filled(tmp_path / "bench.csv", rows), CURRENTS)
    write_locked(tmp_path, curves, [compared(curves, one) for one in found])
    text = (tmp_path / "locked.svg").read_text()
    assert text.count(">measured<") == 2  # torque and inductance
    assert ">5 A<" in text
    assert ">8 A<" in text
    assert (tmp_path / "locked.png").read_bytes()[:4] == b"\x89PNG"
    one = dataclasses.replace(curves, currents=curves.currents[:1])
    write_locked(tmp_path, one)  # a single current has a colour too
