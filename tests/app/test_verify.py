"""Every change of a released package is named, whatever of hashes and seal was changed along."""

import shutil
from pathlib import Path

import ezdxf
import pytest
from click.testing import CliRunner
from released import DEMO, demo_package, manifest_of

from lamwright.app.cli import main
from lamwright.app.release import hashes
from lamwright.app.release_manifest import seal_of
from lamwright.app.verify import verify
from lamwright.geometry.curves import area
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.dxf_cut import read_cut
from lamwright.geometry.punch_layers import CUT_LAYERS
from lamwright.postprocess.files import json_text

pytestmark = pytest.mark.xdist_group("release")  # the package is worth several seconds


@pytest.fixture(scope="module")
def package():
    """The demo's package; not to be changed."""
    return demo_package()


@pytest.fixture
def copy(package, tmp_path):
    """The demo's package, to be changed."""
    return Path(shutil.copytree(package, tmp_path / "copy"))


def resealed(folder, change=lambda manifest: None):
    """Change a manifest, and hashes and seal along, as one would who knows how."""
    manifest = manifest_of(folder)
    change(manifest)
    manifest["files"] = {k: v for k, v in hashes(folder).items() if k != "manifest.json"}
    manifest["seal"] = seal_of(manifest)
    (folder / "manifest.json").write_text(json_text(manifest))


def redrawn(path, change):
    """A DXF changed by a general library, and saved."""
    document = ezdxf.readfile(path)
    cut = [e for e in document.modelspace() if e.dxf.layer in CUT_LAYERS]
    change(document.modelspace(), cut)
    document.saveas(path)


def barrier(cut):
    """The first barrier."""
    return next(entity for entity in cut if entity.dxf.layer == "BARRIERS")


def nudged(model, cut):
    """One vertex of a barrier moved by 5 um."""
    points = barrier(cut).get_points()
    points[1] = (points[1][0] + 3e-3, points[1][1] + 4e-3, *points[1][2:])
    barrier(cut).set_points(points)


def doubled(model, cut):
    """A contour twice."""
    model.add_entity(barrier(cut).copy())


def scaled(model, cut):
    """All as in a file read with the wrong unit."""
    for entity in model:
        entity.scale(25.4, 25.4, 25.4)


def mirrored(model, cut):
    """All contours mirrored in the y axis."""
    for entity in cut:
        entity.transform(ezdxf.math.Matrix44.scale(-1.0, 1.0, 1.0))


def test_every_change_of_a_drawing_is_named_though_the_hashes_follow(copy):
    """Point 4: a vertex nudged by 5 um, a missing barrier; each once, with its place."""
    redrawn(copy / "rotor_r2000.dxf", nudged)
    redrawn(copy / "rotor_r2018.dxf", lambda model, cut: model.delete_entity(barrier(cut)))
    resealed(copy)
    nudge, missing = verify(copy).changes
    place = read_cut(copy / "rotor_r2000.dxf").contours
    moved = next(c for c in place if c.layer == "BARRIERS").path.edges[1].start * 1e3
    assert nudge.startswith("rotor_r2000.dxf: a contour on layer BARRIERS is off by 5.00 um at ")
    assert f"({moved.real:.3f}, {moved.imag:.3f}) mm" in nudge
    assert missing.startswith("rotor_r2018.dxf: a contour of ")
    assert " on layer BARRIERS is missing, it starts at (" in missing


def test_doubled_scaled_mirrored_are_named_though_the_hashes_follow(copy, package):
    """Point 4, the others: one line each."""
    redrawn(copy / "rotor_r2000.dxf", doubled)
    redrawn(copy / "rotor_r2018.dxf", mirrored)
    redrawn(copy / "stator_r2018.dxf", scaled)
    resealed(copy)
    twice, mirror, inches = verify(copy).changes
    assert "on layer BARRIERS stands twice, it starts at (" in twice
    assert mirror == (
        "rotor_r2018.dxf: the whole drawing is mirrored: every contour runs backwards"
    )
    assert inches == "stator_r2018.dxf: the whole drawing is scaled by 25.4"


def test_changed_figures_are_named_though_the_seal_follows(copy):
    """A promise, a mass and a status: each with what it is and what it should be."""

    def change(manifest):
        manifest["promised"]["torque_nm"]["value"] = 12.0
        manifest["parts"]["rotor"]["stack_mass_kg"] = 1.0
        manifest["status"] = "NOT PASSED"

    resealed(copy, change)
    assert list(verify(copy).changes) == [
        "manifest.json: status = 'NOT PASSED': made 'passed'",
        "manifest.json: promised.torque_nm.value = 12.0: made 10.0",
        f"manifest.json: parts.rotor.stack_mass_kg = 1.0: made {_mass(copy)}",
    ]


def _mass(folder):
    contours = read_cut(folder / "rotor_r2000.dxf").contours
    machine = read_machine(DEMO)
    volume = sum(area(c.path) for c in contours) * 1e-3 * machine.design.stator.stack_length_mm
    return float(f"{volume * 0.97 * machine.rotor_steel.density_kg_per_m3.value:.9g}")


def test_plain_changes_are_named(copy):
    """A figure without its seal, a file more, one less, one byte of a STEP, another design."""
    manifest = manifest_of(copy)
    manifest["promised"]["saliency_ratio"]["value"] = 5.0
    (copy / "manifest.json").write_text(json_text(manifest))
    (copy / "notes.txt").write_text("by hand")
    (copy / "rotor.svg").unlink()
    step = copy / "rotor_stack.step"
    step.write_text(step.read_text().replace("'rotor_stack'", "'rotor_stock'"))
    design = copy / "source" / DEMO.name
    design.write_text(
        design.read_text().replace("tangential_rib_mm = 0.6", "tangential_rib_mm = 0.61")
    )
    changes = verify(copy).changes
    assert changes[:5] == (
        "manifest.json: the seal does not fit: the manifest was changed",
        "rotor.svg: missing",
        "rotor_stack.step: changed, its hash is not the manifest's",
        "source/demo_24s4p_arc.toml: changed, its hash is not the manifest's",
        "notes.txt: not of this package",
    )
    rest = "\n".join(changes[5:])
    assert "manifest.json: design_hash = " in rest
    assert "manifest.json: promised.saliency_ratio.value = 5.0: made 4.0" in rest
    assert "rotor_r2000.dxf: a contour on layer BARRIERS is off by " in rest
    assert "rotor_stack.step: " in rest


@pytest.mark.slow
def test_damaged_and_altered_solids_are_named_though_the_hashes_follow(copy):
    """Read apart: some damaged files end the process that reads them."""
    cut = copy / "rotor_lamination.step"
    cut.write_text(cut.read_text()[:40_000])
    longer = copy / "stator_stack.step"
    high = f"{read_machine(DEMO).design.stator.stack_length_mm:g}."
    longer.write_text(longer.read_text().replace(f",{high})", f",{float(high) + 1.0:g}.)"))
    named = copy / "rotor_stack.step"
    named.write_text(named.read_text().replace("'rotor_stack'", "'rotor_stock'"))
    resealed(copy)
    unreadable, renamed, thick = verify(copy).changes
    assert unreadable == "rotor_lamination.step: cannot be read as solids"
    assert renamed == ("rotor_stack.step: not the design's solids, though of their volume")
    assert thick.startswith("stator_stack.step: ")


def test_what_is_no_package_is_one_line(tmp_path):
    """No folder, no manifest, a manifest of something else."""
    for text, fault in (
        (None, "no such file or directory; accepted the folder of a release"),
        ("{", "not JSON; accepted the folder of a release"),
        ("[]", "no JSON object; accepted the folder of a release"),
        ('{"form": 7}', "form = 7: not known; accepted 1"),
    ):
        if text is not None:
            (tmp_path / "manifest.json").write_text(text)
        result = CliRunner().invoke(main, ["verify", str(tmp_path)])
        lines = [line for line in result.stderr.splitlines() if " %  " not in line]
        assert (result.exit_code, len(lines)) == (2, 1)
        assert lines[0].endswith(fault)


def test_a_manifest_of_nonsense_is_told_as_changed(copy):
    """Any value in any place: lines, never a traceback."""
    for key in manifest_of(copy):
        for value in (None, 3, "x", [], {"a": 1}, ["../../x"], {"../x": "y"}):
            if key == "form":
                continue
            manifest = {**manifest_of(copy), key: value}
            broken = copy / "broken"
            broken.mkdir(exist_ok=True)
            (broken / "manifest.json").write_text(json_text(manifest))
            assert verify(broken).changes
