"""One design from file to folder: what is there, that it agrees with itself, who did the work."""

import csv
import json
import math
import subprocess
import sys
from pathlib import Path

import pytest
from report_reading import check_numbers

from lamwright.app import run
from lamwright.app.run import assess
from lamwright.geometry.design_file import read_design
from lamwright.geometry.dxf import read_contours
from lamwright.geometry.errors import DesignError

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
DESIGN = read_design(DEMO)


@pytest.fixture(scope="module")
def assessed(tmp_path_factory):
    """The shipped design, assessed once: its verdict, its folder, and what progress told."""
    folder = tmp_path_factory.mktemp("out")
    told = []
    verdict = assess(DEMO, folder, lambda phase, share: told.append((phase, share)))
    return verdict, folder, told


@pytest.fixture(scope="module")
def record(assessed):
    """The verdict as read back from its file."""
    return json.loads((assessed[1] / "verdict.json").read_text())


@pytest.fixture(scope="module")
def waveform(assessed):
    """The waveform's columns as read back from their file."""
    with (assessed[1] / "torque.csv").open() as file:
        rows = list(csv.DictReader(file))
    return {key: [float(row[key]) for row in rows] for key in rows[0]}


def test_folder_holds_whole_files_only(assessed):
    """Everything promised, nothing hidden or half done."""
    names = {path.name for path in assessed[1].iterdir()}
    assert {"verdict.json", "lamination.dxf", "torque.csv", "ribs.csv"} <= names
    assert not [name for name in names if name.startswith(".")]


def test_report_says_what_the_verdict_says(assessed, record):
    """Every number in its tables is that of the files; `test_report_truth` holds the PDF too."""
    folder = assessed[1]
    page = (folder / "report.html").read_text()
    with (folder / "ribs.csv").open() as file:
        ribs = [{k: _as_number(v) for k, v in row.items()} for row in csv.DictReader(file)]
    seen = check_numbers(page, record, {"ribs": ribs})
    assert {"torque_nm_error", "limits/least_torque_nm", "ribs/5/peak_mpa_error"} <= seen
    assert len(seen) >= 110
    assert DEMO.read_text().splitlines()[0] in page  # the design itself, to repeat it
    assert record["design_hash"] in page
    assert (folder / "report.pdf").read_bytes().startswith(b"%PDF")


def _as_number(text: str) -> float | str:
    try:
        return float(text)
    except ValueError:
        return text


def test_verdict_on_disk_is_the_one_returned(assessed, record):
    """The figures of the value object and of the file are the same numbers."""
    verdict = assessed[0]
    assert record["passes"] == verdict.passes
    assert record["torque_nm"] == verdict.magnetic.torque
    assert record["yield_margin"] == verdict.stress.yield_margin
    assert {o.key: o.holds for o in verdict.outcomes} == {
        key: outcome["holds"] for key, outcome in record["outcomes"].items()
    }


def test_torque_two_ways(record):
    """A8.1: Maxwell stress and linkages agree in the mean; promised 0.5 %, measured 4e-6."""
    assert record["torque_nm"] == pytest.approx(record["torque_linkage_nm"], rel=5e-3)


def test_torque_at_every_position_is_the_slope_of_the_coenergy(waveform):
    """A8.2: within 1 % of the mean at each of 30 positions; measured 0.13 %."""
    mean = sum(waveform["torque_nm"]) / len(waveform["torque_nm"])
    for torque, slope in zip(waveform["torque_nm"], waveform["torque_coenergy_nm"], strict=True):
        assert torque == pytest.approx(slope, abs=0.01 * mean)


def test_verdict_is_made_of_the_waveform(record, waveform):
    """Means of the table are the figures of the verdict; nine digits are in the table."""
    count = len(waveform["torque_nm"])
    assert count == 30
    assert waveform["angle_el_deg"] == pytest.approx([2.0 * k for k in range(count)])
    for key in ("torque_nm", "psi_d_vs", "psi_q_vs"):
        assert record[key] == pytest.approx(sum(waveform[key]) / count, rel=1e-7)
    torque = 3.0 * (record["psi_d_vs"] * record["i_q_a"] - record["psi_q_vs"] * record["i_d_a"])
    assert torque == pytest.approx(record["torque_linkage_nm"], rel=1e-6)
    saliency = record["psi_d_vs"] * record["i_q_a"] / (record["psi_q_vs"] * record["i_d_a"])
    assert saliency == pytest.approx(record["saliency_ratio"], rel=1e-9)


def test_currents_are_the_rated_ones(record):
    """The operating point lies on the circle of rated current, between 45 and 75 el degrees.

    A saturated machine's best angle is above the linear machine's 45 (A7).
    """
    duty = DESIGN.duty
    current = math.hypot(record["i_d_a"], record["i_q_a"])
    assert current == pytest.approx(duty.rated_current_a, rel=1e-12)
    assert 45.0 < record["current_angle_deg"] < 75.0
    overspeed = duty.overspeed_factor * duty.maximum_speed_rpm
    assert record["speed_overspeed_rpm"] == pytest.approx(overspeed, rel=1e-12)


def test_stress_figures_agree_with_the_ribs(assessed, record):
    """The greatest of the ribs' table is the verdict's; margin = yield / greatest stress."""
    with (assessed[1] / "ribs.csv").open() as file:
        peaks = [float(row["peak_mpa"]) for row in csv.DictReader(file)]
    assert len(peaks) == 2 * len(DESIGN.rotor.barrier)  # one at each end, none radial
    assert max(peaks) == pytest.approx(record["rib_stress_peak_mpa"], rel=1e-5)
    assert record["lamination_stress_peak_mpa"] >= record["rib_stress_peak_mpa"]
    assert record["yield_margin"] == pytest.approx(
        record["yield_strength_mpa"] / record["lamination_stress_peak_mpa"], rel=1e-9
    )
    assert record["rib_stress_peak_mpa_error"] < 0.02 * record["rib_stress_peak_mpa"]


def test_outline_is_the_one_analysed(assessed, record):
    """Read back: area and cut length to 1e-6, vertices to 1 um; 1 rim, 1 bore, barriers x poles."""
    assert record["dxf_area_difference_relative"] < 1e-6
    assert record["dxf_perimeter_difference_relative"] < 1e-6
    assert record["dxf_vertex_difference_um"] < 1.0
    layers = [contour.layer for contour in read_contours(assessed[1] / record["outline_dxf"])]
    counts = {layer: layers.count(layer) for layer in layers}
    barriers = len(DESIGN.rotor.barrier) * DESIGN.rotor.poles  # none has a radial rib
    assert counts == {"OUTER_CONTOUR": 1, "BORE": 1, "BARRIERS": barriers}


def test_progress_only_goes_forward(assessed):
    """Shares rise from 0 towards 1, every phase once and in order."""
    told = assessed[2]
    shares = [share for _, share in told]
    assert shares == sorted(shares)
    assert shares[0] >= 0.0
    assert shares[-1] <= 1.0
    phases = list(dict.fromkeys(phase for phase, _ in told))
    assert [phase for phase, _ in told] == sorted((p for p, _ in told), key=phases.index)


def test_times_add_up(assessed):
    """The phases of this process fill the total but for a tenth: nothing long goes untold."""
    times = {time.phase: time.seconds for time in assessed[0].times}
    total = times.pop("total")
    own = sum(seconds for phase, seconds in times.items() if not phase.startswith("meanwhile"))
    assert 0.9 * total <= own <= total


def test_a_design_that_cannot_be_drawn_leaves_no_folder(tmp_path):
    """Refused before anything is started or made."""
    path = tmp_path / "broken.toml"
    path.write_text("name = 1")
    with pytest.raises(DesignError, match=r"broken\.toml"):
        assess(path, tmp_path / "out")
    assert not (tmp_path / "out").exists()


@pytest.mark.slow  # assesses once more, on one core
def test_figures_do_not_depend_on_who_does_the_work(record, tmp_path, monkeypatch):
    """Alone or with a worker: the same figures; BLAS threads may change the last digits."""
    monkeypatch.setattr(run, "spare_cores", lambda: 0)
    assess(DEMO, tmp_path)
    alone = json.loads((tmp_path / "verdict.json").read_text())
    numbers = [key for key, value in record.items() if isinstance(value, float)]
    assert len(numbers) > 25
    rounding = {"newton_residual_greatest"}
    for key in set(numbers) - rounding:
        assert alone[key] == pytest.approx(record[key], rel=1e-7, abs=1e-9), key
    assert alone["newton_steps"] == record["newton_steps"]


def test_the_door_gives_functions_whatever_was_imported_before():
    """A module named as a function of the door would take its place once it is loaded."""
    import lamwright.app
    import lamwright.app.run  # loads every module of the room that a run needs

    for name in lamwright.app.__all__:
        assert callable(getattr(lamwright.app, name)), name


def test_the_first_process_starts_before_anything_heavy_is_imported():
    """Else what writes the DXF is not loaded beside the imports of the command itself."""
    code = (
        "import sys\n"
        "from lamwright.app import run\n"
        "def told():\n"
        "    print(sorted({'numpy', 'scipy', 'pydantic'} & set(sys.modules)))\n"
        "    raise SystemExit\n"
        "run.early_outliner = told\n"
        "from lamwright.app.cli import main\n"
        f"main(['assess', {str(DEMO)!r}, '--out', 'nowhere'])\n"
    )
    told = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert told.stdout == "[]\n"
