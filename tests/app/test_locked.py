"""`locked` against a closed form, against virtual work, and end to end."""

import csv
import dataclasses
import json
import math

import numpy as np
import pytest
from annulus import Ring, RingMachine, sheet_model
from click.testing import CliRunner
from shipped import DESIGNS, shipped, shipped_model

from lamwright.app.bench import Bench
from lamwright.app.cli import main
from lamwright.app.locked import locked_curves
from lamwright.postprocess.locked import FEEDS, Feed, feed_of, locked_angles
from lamwright.solver.field import MagneticModel
from lamwright.solver.steel import linear_law
from lamwright.solver.types import Quadrature

DEMO = next(path for path in DESIGNS if path.stem == "demo_24s4p_arc")
DEGREE = math.pi / 180.0


def bench_of(model: MagneticModel) -> Bench:
    """A bench with the model on it."""
    bench = Bench()
    bench.take_model(model)
    return bench


@pytest.mark.parametrize("name", FEEDS)
def test_laminated_cylinder(name: str) -> None:
    """Checks A1.1: L_t = k (L_d cos^2 + L_q sin^2), T = 1/2 I^2 dL_t/d theta, at any angle.

    k is 3/2 or 2; L_d 5.27283, L_q 2.42007 mH. To 2e-4, the field's own error there.
    """
    l_d, l_q, feed, current = 5.27283e-3, 2.42007e-3, feed_of(name), 10.0
    rings = (Ring("rotor_iron", 0.030, 12),), (Ring("stator_iron", 0.048, 3),)
    ring = RingMachine(1, rings[0], 0.040, rings[1], 0.1, gap_layers=6, n_circle=48)
    model = sheet_model(ring, linear_law(1.0), linear_law(1e9), 100)
    scale = np.array([1.0 / math.sqrt(2.49813), 1.0 / math.sqrt(1200.4)])
    grad = model.iron.quad.grad.copy(order="K")
    grad[: model.iron.n_rotor] *= scale[:, None]
    iron = dataclasses.replace(model.iron, quad=Quadrature(grad, model.iron.quad.weight))
    angles = np.array([0.0, 0.3, 0.7, 1.2, 2.9])
    bench = bench_of(dataclasses.replace(model, iron=iron))
    torque, psi, slope, coenergy = bench.readings(feed, angles.tolist(), (0.0, current)).T
    factor = feed.terminal_factor
    inductance = factor * (l_d * np.cos(angles) ** 2 + l_q * np.sin(angles) ** 2)
    assert psi[1] / current == pytest.approx(inductance, rel=2e-4)
    assert slope[0] == pytest.approx(inductance, rel=2e-4)
    assert slope[1] == pytest.approx(inductance, rel=2e-4)
    assert coenergy[1] == pytest.approx(0.5 * inductance * current**2, rel=2e-4)
    turning = -0.5 * factor * (l_d - l_q) * np.sin(2.0 * angles) * current**2
    assert torque[1] == pytest.approx(turning, abs=2e-4 * np.abs(turning).max())
    assert torque[0] == pytest.approx(0.0)
    assert psi[0] == pytest.approx(0.0)


@pytest.mark.parametrize("feed", [feed_of(name) for name in FEEDS], ids=FEEDS)
def test_torque_is_the_slope_of_the_coenergy(feed: Feed) -> None:
    """Checks A8.2: T = dW'/d theta at constant phase currents, central difference, 1 %.

    And the incremental inductance is the slope of the linkage over the current: the difference
    over +-2 % errs by its third derivative, and Newton's 1e-6 counts 1/0.04 times.
    """
    model, current, h = shipped_model("demo_24s4p_arc", 2.0, 1e-6), 8.0, 0.25 * DEGREE
    bench, at = bench_of(model), 21.3 * DEGREE
    currents = (0.98 * current, current, 1.02 * current)
    low, middle, high = bench.readings(feed, (at - h, at, at + h), currents)
    assert (high[1, 3] - low[1, 3]) / (2.0 * h) == pytest.approx(middle[1, 0], rel=1e-2)
    by_difference = (middle[2, 1] - middle[0, 1]) / (0.04 * current)
    assert middle[1, 2] == pytest.approx(by_difference, rel=5e-3)
    assert (middle[2, 3] - middle[0, 3]) / (0.04 * current) == pytest.approx(middle[1, 1], rel=1e-3)


def test_rotor_rests_on_the_axis_of_the_current() -> None:
    """T = 0 with the d axis on the current's axis, of both feeds; the rotor is pulled back to it.

    The winding of one layer has its axis on a mirror line of the slots only with one-and-two; the
    other's axis lies 30 degrees on, one slot pitch: a mirror line again. 1e-3 of the peak.
    """
    bench = bench_of(shipped_model("demo_24s4p_arc", 2.0))
    for name in FEEDS:
        torque = bench.readings(feed_of(name), (-0.1, 0.0, 0.1), (8.0,))[:, 0, 0]
        assert torque[0] > 0.0 > torque[2]
        assert abs(torque[1]) < 1e-3 * abs(torque[0])


@pytest.fixture(scope="module")
def written(tmp_path_factory: pytest.TempPathFactory):
    """A coarse run of the demonstration design, and what it printed."""
    folder = tmp_path_factory.mktemp("locked")
    call = ["locked", str(DEMO), "--out", str(folder), "--currents", "8", "--step-deg", "5"]
    result = CliRunner().invoke(main, [*call, "--tolerance", "coarse"])
    assert result.exit_code == 0, result.output
    return folder, result.output, call


def test_run_writes_table_record_and_picture(written) -> None:
    """0 to 90 degrees, columns for measured values empty; the mean torque is zero.

    The coenergy is periodic, so dW'/d theta has no mean; what slots leave of it when sampled every
    5 degrees is below 2 % of the peak.
    """
    folder, output, _ = written
    files = {path.name for path in folder.iterdir()}
    assert files == {"locked.csv", "locked.json", "locked.png", "locked.svg"}
    rows = list(csv.DictReader((folder / "locked.csv").read_text().splitlines()))
    assert [float(row["angle_mech_deg"]) for row in rows] == pytest.approx(range(0, 91, 5))
    assert all(row["measured_torque_nm"] == "" for row in rows)
    torque = np.array([float(row["torque_nm"]) for row in rows[:-1]])
    assert abs(torque.mean()) < 0.02 * np.abs(torque).max()
    record = json.loads((folder / "locked.json").read_text())
    figures = record["currents"][0]
    assert figures["current_a"] == 8.0
    apparent = [float(row["terminal_inductance_apparent_mh"]) for row in rows]
    assert figures["l_d_apparent_mh"] == pytest.approx(max(apparent) / 1.5, rel=1e-3)
    assert figures["l_q_apparent_mh"] == pytest.approx(min(apparent) / 1.5, rel=1e-3)
    assert "clamp it" in output
    assert "end winding" in output


def test_filled_table_is_not_written_over(written) -> None:
    """Without --measured a table that holds measured values stays, and one line says so."""
    folder, _, call = written
    path = folder / "locked.csv"
    empty = path.read_text()
    path.write_text(empty.rstrip("\n").removesuffix(",,") + "1.25,,\n")
    result = CliRunner().invoke(main, call)
    path.write_text(empty)
    assert result.exit_code == 2
    assert "locked.csv there holds measured values; accepted with --measured" in result.output


@pytest.mark.parametrize(
    ("option", "fault"),
    [
        (("--currents", "-5"), "-5 A is not above 0"),
        (("--currents", ""), "no current"),
        (("--step-deg", "90"), "--step-deg 90: not between"),
        (("--zero-deg", "nan"), "--zero-deg nan: not a finite number"),
        (("--measured", "absent.csv"), "--measured absent.csv: cannot be read: no such file"),
    ],
)
def test_bad_options_end_with_one_line(tmp_path, option: tuple[str, str], fault: str) -> None:
    """Exit code 2, nothing computed, nothing written."""
    call = ["locked", str(DEMO), "--out", str(tmp_path / "out"), "--currents", "8", *option]
    result = CliRunner().invoke(main, call)
    assert result.exit_code == 2
    assert fault in result.output
    assert result.output.count("\n") == 1
    assert not (tmp_path / "out").exists()


@pytest.mark.slow
def test_magnets_and_skew_are_honoured() -> None:
    """Magnets: two poles a period, torque without current is cogging, psi_t less their linkage.

    A rotor skewed in steps reads the mean of the unskewed one at its steps' angles: exact.
    """
    magnet = shipped("demo_36s4p_magnet")
    feed, current = feed_of("one-and-two"), magnet.rated
    angles = locked_angles(2, 2, 5.0)
    curves = locked_curves(
        magnet.machine, magnet.section, feed, angles, (current,), tolerance="coarse"
    )
    assert curves.poles_in_period == 2
    # Magnets oppose psi_q: turning by a pole pitch changes their sign, so the halves differ.
    half = len(angles) // 2
    assert np.abs(curves.torque[0, :half] - curves.torque[0, half:]).max() > 0.05
    # Psi less the magnets' own over I is an inductance: near the incremental one's mean.
    assert 0.0 < curves.apparent.min() < curves.apparent.max() < 1.2 * curves.bare_slope.max()

    plain = shipped("demo_24s4p_arc")
    design = plain.machine.design
    rotor = design.rotor.model_copy(update={"skew_steps": 2, "skew_angle_deg": 10.0})
    skewed = dataclasses.replace(plain.machine, design=design.model_copy(update={"rotor": rotor}))
    angles = locked_angles(2, 1, 5.0)
    straight, mean = (
        locked_curves(one, plain.section, feed, angles, (8.0,), tolerance="coarse")
        for one in (plain.machine, skewed)
    )
    # Steps stand 2.5 degrees to both sides; half-way angles need their own fields.
    between = tuple(angle + 2.5 * DEGREE for angle in angles)
    shifted = locked_curves(plain.machine, plain.section, feed, between, (8.0,), tolerance="coarse")
    expected = 0.5 * (shifted.torque + np.roll(shifted.torque, 1, axis=1))
    assert mean.torque == pytest.approx(expected, abs=1e-3 * np.abs(straight.torque).max())
