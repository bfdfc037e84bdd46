"""`compare`: what differs between designs, drawings and folders, in keys, geometry and figures."""

import json
from pathlib import Path

import pytest
from click.testing import CliRunner
from supplier_forms import FORMS, drawing_of, edges_mm

from lamwright.app.cli import main
from lamwright.app.compare import compare
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_design
from lamwright.geometry.dxf import write_lamination

DESIGNS = Path(__file__).parent.parent.parent / "designs"
DEMO = DESIGNS / "demo_24s4p_arc.toml"


def run(*words):
    return CliRunner().invoke(main, ["compare", *map(str, words)])


@pytest.fixture
def variant(tmp_path):
    """The demo with its first rib 0.1 mm thicker."""
    (tmp_path / "steel").symlink_to(DESIGNS / "steel")
    path = tmp_path / "variant.toml"
    text = DEMO.read_text()
    assert "tangential_rib_mm = 0.6" in text
    path.write_text(text.replace("tangential_rib_mm = 0.6", "tangential_rib_mm = 0.7", 1))
    return path


def test_a_thicker_rib_is_named_in_keys_ribs_and_outline(variant, tmp_path):
    """One key, two ribs 0.1 mm wider, the outline 0.1 mm off there; the picture is drawn."""
    out, file = tmp_path / "seen", tmp_path / "c.json"
    told = run(DEMO, variant, "--json", file, "--out", out)
    assert told.exit_code == 0
    record = json.loads(file.read_text())
    assert not record["same"]
    assert record["keys"] == [{"key": "rotor.barrier[1].tangential_rib_mm", "a": 0.6, "b": 0.7}]
    wider = [r for r in record["geometry"]["ribs"] if abs(r["b_mm"] - r["a_mm"]) > 1e-6]
    assert {r["rib"] for r in wider} == {"p1 tangential_1_right", "p1 tangential_1_left"}
    assert all(r["b_mm"] - r["a_mm"] == pytest.approx(0.1, abs=1e-6) for r in wider)
    # The end of the barrier draws back along the barrier, which leans on the rim.
    assert 99.0 < record["geometry"]["largest_deviation_um"] < 300.0
    assert record["geometry"]["has_partner_everywhere"]
    assert "rotor.barrier[1].tangential_rib_mm" in told.output
    assert (out / "compare.png").stat().st_size > 20_000


def test_a_design_is_itself_and_its_drawing():
    """Nothing differs from itself."""
    assert compare(DEMO, DEMO).is_same
    assert "nothing differs" in run(DEMO, DEMO).output


def test_a_design_and_a_drawing_are_laid_on_each_other(tmp_path):
    """Turned and moved: no deviation over 1 nm; of another design it is refused in one line."""
    section = cross_section(read_design(DEMO))
    back = tmp_path / "back.dxf"
    FORMS["rotated"](section).saveas(back)
    report = compare(DEMO, back)
    assert report.found is not None
    assert report.largest[0] < 1e-9
    assert len(report.ribs) == 24
    told = run(DESIGNS / "demo_36s6p_arc.toml", back)
    assert told.exit_code == 2
    assert told.output.count("\n") == 1


def test_a_contour_drawn_twice_is_named(tmp_path):
    """Though the shape is the design's: a machine would cut it twice."""
    edges = edges_mm(cross_section(read_design(DEMO)))
    drawing_of([*edges, *edges[:3]]).saveas(tmp_path / "twice.dxf")
    report = compare(DEMO, tmp_path / "twice.dxf")
    assert not report.is_same
    assert report.changes[0].startswith("3 lines and arcs of the drawing stand twice, the first at")
    drawing_of(edges).saveas(tmp_path / "once.dxf")
    assert compare(DEMO, tmp_path / "once.dxf").is_same


def test_two_drawings_are_compared_about_their_axes(tmp_path):
    """A drawing shifted is the same; one of another design has parts without a partner."""
    paths = []
    for name in ("demo_24s4p_arc", "demo_36s4p_straight"):
        paths.append(tmp_path / f"{name}.dxf")
        write_lamination(cross_section(read_design(DESIGNS / f"{name}.toml")), paths[-1])
    assert compare(paths[0], paths[0]).is_same
    report = compare(*paths)
    assert report.gaps is not None
    assert report.gaps.is_beyond
    assert not report.is_same


def test_figures_of_folders_are_judged_by_their_error_bars(tmp_path):
    """Torque 10 +- 0.02 against 10.03 +- 0.02 is within, against 10.05 beyond; one is missing."""
    for name, torque in (("a", 10.0), ("b", 10.03), ("c", 10.05)):
        (tmp_path / name).mkdir()
        record = {"torque_nm": torque, "torque_nm_error": 0.02, "power_factor": 0.7}
        if name == "c":
            del record["power_factor"]
        (tmp_path / name / "verdict.json").write_text(json.dumps(record))
    near = {one.key: one for one in compare(tmp_path / "a", tmp_path / "b").figures}
    assert near["torque_nm"].is_beyond is False
    assert near["torque_nm"].differs
    assert not near["power_factor"].differs
    far = {one.key: one for one in compare(tmp_path / "a", tmp_path / "c").figures}
    assert far["torque_nm"].is_beyond is True
    assert far["power_factor"].differs
    assert far["power_factor"].is_beyond is None
    told = run(tmp_path / "a", tmp_path / "c")
    assert told.exit_code == 0
    assert "beyond" in told.output


BAD = {
    "nowhere": "no such file or folder; accepted a design file",
    "empty": "no verdict.json there; accepted a design file",
    "broken": "not JSON; accepted what lamwright has written",
    "text.dxf": "not a readable DXF file",
    "bad.toml": "bad.toml",
}


@pytest.mark.parametrize("name", BAD)
def test_bad_input_is_refused_in_one_line(name, tmp_path):
    """Exit 2, the path and what would do."""
    (tmp_path / "empty").mkdir()
    (tmp_path / "broken").mkdir()
    (tmp_path / "broken" / "verdict.json").write_text("{")
    (tmp_path / "text.dxf").write_text("drawn on sheet 3\n")
    (tmp_path / "bad.toml").write_text("[stator\n")
    told = run(DEMO, tmp_path / name)
    assert told.exit_code == 2
    assert BAD[name] in told.output
    assert told.output.count("\n") == 1
