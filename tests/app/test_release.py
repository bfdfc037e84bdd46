"""The supplier's package: whole, true to the design, and the same bytes each time.

The promise is invented, so that no field need be solved; the slow tests assess the design.
"""

import dataclasses
import shutil
import subprocess
import sys
from pathlib import Path

import invented_verdict as invented
import pytest
from click.testing import CliRunner
from released import (
    DEMO,
    DESIGNS,
    MAGNETIC,
    demo_package,
    demo_verdict,
    manifest_of,
    wishes,
    write_verdict,
)

from lamwright.app.cli import main
from lamwright.app.release import ReleaseWishes, release
from lamwright.app.release_manifest import FIGURE_OF_LIMIT
from lamwright.app.release_record import Order
from lamwright.app.release_stage import hashes
from lamwright.app.verify import verify
from lamwright.geometry.curves import area
from lamwright.geometry.design_file import design_hash, read_machine
from lamwright.geometry.dxf_cut import read_cut
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.punch_options import PunchOptions
from lamwright.postprocess.verdict import judged


@pytest.fixture(scope="module")
def verdict():
    """A verdict of the demo."""
    return demo_verdict()


@pytest.fixture(scope="module")
def package():
    """The demo's package; not to be changed."""
    return demo_package()


@pytest.fixture
def copy(package, tmp_path):
    """The demo's package, to be changed."""
    return Path(shutil.copytree(package, tmp_path / "copy"))


def test_a_package_is_whole_and_verifies(package):
    """Everything asked for is there, and nothing is named as changed."""
    names = {name for name in hashes(package)}
    assert names == {
        *("manifest.json", "verdict.json", "rotor.pdf", "rotor.svg"),
        *("stator.pdf", "stator.svg"),
        *(f"{part}_{form}.dxf" for part in ("rotor", "stator") for form in ("r2000", "r2018")),
        *(
            f"{part}_{what}.step"
            for part in ("rotor", "stator")
            for what in ("lamination", "stack")
        ),
        *("source/demo_24s4p_arc.toml", "source/steel/demo_050.toml"),
    }
    report = verify(package)
    assert report.changes == ()
    assert report.notes == ()
    assert (report.status, report.files) == ("passed", len(names) - 1)


def test_the_copies_read_as_the_same_design(package):
    """The package needs no file outside it."""
    machine = read_machine(package / manifest_of(package)["design_file"])
    found = design_hash(machine.design, machine.cards)
    assert found == manifest_of(package)["design_hash"]


def test_figures_follow_from_the_dxf_alone(package):
    """Area, cut length, mass and box read back from the R2000 files, by their definitions."""
    manifest = manifest_of(package)
    machine = read_machine(DEMO)
    length = machine.design.stator.stack_length_mm
    for name, steel in (("rotor", machine.rotor_steel), ("stator", machine.stator_steel)):
        part = manifest["parts"][name]
        contours = read_cut(package / f"{name}_r2000.dxf").contours
        surface = 1e6 * sum(area(c.path) for c in contours)
        cut = 1e3 * sum(edge.length for c in contours for edge in c.path.edges)
        assert part["sheet_area_mm2"] == pytest.approx(surface, rel=1e-8)
        assert part["cut_length_mm"] == pytest.approx(cut, rel=1e-8)
        mass = 1e-9 * surface * length * 0.97 * steel.density_kg_per_m3.value
        assert part["stack_mass_kg"] == pytest.approx(mass, rel=1e-8)
        assert part["contours"] == len(contours)
    stator = manifest["parts"]["stator"]
    half = 0.5 * machine.design.stator.outer_diameter_mm
    assert stator["bounding_box_mm"] == pytest.approx([-half, -half, half, half])
    layout = manifest["nesting"]["layouts"][0]
    used = sum(part["sheet_area_mm2"] for part in manifest["parts"].values())
    share = 1.0 - used / layout["strip_area_per_blank_mm2"]
    assert layout["scrap_percent"] == pytest.approx(100.0 * share, rel=1e-8)


def test_a_promise_has_its_error_and_unit(package):
    """As the verdict states them; an error that is not known is null."""
    promised = manifest_of(package)["promised"]
    assert promised["torque_nm"] == {
        "value": MAGNETIC.torque,
        "error": 0.04,
        "unit": "N m",
        "is_estimate": False,
    }
    assert promised["power_factor"]["error"] is None
    assert promised["power_factor"]["is_estimate"] is True


@pytest.mark.slow
def test_the_same_bytes_again_and_in_another_process_and_folder(package, verdict, tmp_path):
    """Point 8: every file, from a copy of the design elsewhere too."""
    shutil.copytree(DESIGNS / "steel", tmp_path / "elsewhere" / "steel")
    design = Path(shutil.copy(DEMO, tmp_path / "elsewhere"))
    code = "from lamwright.app.cli import main; main()"
    line = [sys.executable, "-c", code, "release", design, "--out", tmp_path / "other"]
    line += ["--verdict", verdict, "--strip-width", "300", "--strip-edge", "3"]
    done = subprocess.run([str(a) for a in line], capture_output=True, text=True, check=False)
    assert (done.returncode, "Traceback" in done.stderr) == (0, False)
    assert hashes(tmp_path / "other") == hashes(package)


@pytest.mark.slow
def test_a_design_that_fails_is_refused_or_marked(tmp_path):
    """No package without a word; with it, every sheet says NOT PASSED, and exit code 1."""
    bad = dataclasses.replace(MAGNETIC, torque=8.0)
    path = write_verdict(DEMO, tmp_path / "verdict.json", bad)
    args = ["release", str(DEMO), "--out", str(tmp_path / "out"), "--verdict", str(path)]
    refused = CliRunner().invoke(main, args)
    assert (refused.exit_code, refused.stdout) == (2, "")
    assert "fails limits.least_torque_nm; nothing was released" in refused.stderr.splitlines()[-1]
    assert list((tmp_path / "out").iterdir()) == []
    marked = CliRunner().invoke(main, [*args, "--despite-limits"])
    assert marked.exit_code == 1
    manifest = manifest_of(tmp_path / "out")
    assert manifest["status"] == "NOT PASSED"
    assert manifest["limits_missed"] == ["least_torque_nm"]
    assert manifest["cautions"][0].startswith("NOT PASSED: ")
    drawing = (tmp_path / "out" / "rotor.svg").read_text()
    assert "NOT PASSED: the design fails" in drawing
    assert "NOT FOR RUNNING ROTORS." in drawing
    assert verify(tmp_path / "out").changes == ()


def test_limits_are_those_the_verdict_judges():
    """The table of limits and figures is the verdict's own."""
    outcomes = judged(invented.LIMITS, invented.MAGNETIC, invented.STRESS)
    assert {o.key: o.figure.key for o in outcomes} == FIGURE_OF_LIMIT
    assert all(o.is_least is o.key.startswith("least_") for o in outcomes)


BAD = [
    (("--verdict", "{none}"), "no such file or directory; accepted the verdict.json of an assess"),
    (("--verdict", "{text}"), "not JSON; accepted the verdict.json of an assess"),
    (("--verdict", "{other}"), "design_hash: of another design; assess"),
    (
        ("--strip-width", "90"),
        "narrower than a blank of 140 mm and its edges; accepted 144",
    ),
    (("--strip-width", "nan"), "--strip-width nan: out of range; accepted 1 to 3000"),
    (("--date", "2026-02-30"), "--date 2026-02-30: not a date; accepted as 2026-01-31"),
    (("--tool-offset", "5"), "tool_offset_mm = 5: outside its range; accepted -1 to 1"),
    (
        ("--grinding-allowance", "0.9", "--strip-width", "300"),
        "grinding_allowance_mm: the rotor's blank of 82.1 mm does not come out of the stator's "
        "bore of 82; accepted a smaller allowance, or no --strip-width",
    ),
    (("--magnet-clearance", "0.1"), "magnet_clearance_mm = 0.1: "),
    (("--remark", "a\nb"), "--remark: no line of text"),
]


@pytest.mark.parametrize(("options", "fault"), BAD, ids=[f"{a[0]} {a[1]!r}" for a, _ in BAD])
def test_bad_input_is_one_line(options, fault, tmp_path):
    """Exit 2, what and what would do on stderr, and no package."""
    (tmp_path / "text.json").write_text("none")
    other = write_verdict(DESIGNS / "demo_36s6p_arc.toml", tmp_path / "other.json")
    places = {"none": tmp_path / "none.json", "text": tmp_path / "text.json", "other": other}
    args = [option.format(**places) for option in options]
    out = tmp_path / "out"
    result = CliRunner().invoke(main, ["release", str(DEMO), "--out", str(out), *args])
    assert result.exit_code == 2
    lines = [line for line in result.stderr.splitlines() if not line.startswith("more: ")]
    lines = [line for line in lines if " %  " not in line]
    assert len(lines) == 1
    assert fault in lines[0]
    assert not out.exists() or list(out.iterdir()) == []


def test_a_folder_that_holds_something_else_is_left_alone(tmp_path, verdict):
    """Nothing is written beside a user's file; an earlier package is replaced."""
    (tmp_path / "letter.txt").write_text("mine")
    with pytest.raises(LamwrightError, match=r"holds letter\.txt, which is of no package"):
        release(DEMO, tmp_path, wishes(verdict))
    assert [path.name for path in tmp_path.iterdir()] == ["letter.txt"]


@pytest.mark.slow
def test_another_package_in_the_same_folder_leaves_nothing_of_the_first(copy, tmp_path):
    """Files of the earlier package that the new one has not are gone."""
    design = DESIGNS / "demo_36s6p_arc.toml"
    path = write_verdict(design, tmp_path / "verdict.json")
    release(design, copy, wishes(path, despite_limits=True))
    assert "source/demo_24s4p_arc.toml" not in hashes(copy)
    assert verify(copy).changes == ()


@pytest.mark.slow
def test_allowances_are_in_the_dxf_and_a_card_by_its_place_is_refused(tmp_path, verdict):
    """The tool's path holds the offset; area and solids are the sheet's. A disk's place stays."""
    order = Order(PunchOptions(tool_offset_mm=0.02, grinding_allowance_mm=0.1))
    release(DEMO, tmp_path / "out", ReleaseWishes(order, verdict))
    manifest = manifest_of(tmp_path / "out")
    diameter = read_machine(DEMO).design.stator.bore_diameter_mm - 2.0 * 0.4
    box = manifest["parts"]["rotor"]["bounding_box_mm"]
    assert box[2] - box[0] == pytest.approx(diameter + 0.1)
    contours = read_cut(tmp_path / "out" / "rotor_r2018.dxf").contours
    rim = next(c for c in contours if c.layer == "OUTER_CONTOUR")
    assert 2e3 * abs(rim.path.edges[0].start) == pytest.approx(diameter + 0.1 + 0.04)
    assert verify(tmp_path / "out").changes == ()
    card = DESIGNS / "steel" / "demo_050.toml"
    design = tmp_path / "absolute.toml"
    design.write_text(DEMO.read_text().replace("steel/demo_050.toml", card.as_posix()))
    with pytest.raises(LamwrightError, match="a place on this disk cannot be sent along"):
        release(design, tmp_path / "none", wishes(verdict))
