"""Every change of a released package is named, whatever of hashes and seal was changed along."""

import json
import shutil
from pathlib import Path

import ezdxf
import pytest
from click.testing import CliRunner
from released import DEMO, demo_package, manifest_of

from lamwright.app.cli import main
from lamwright.app.release_manifest import promised_figures, seal_of
from lamwright.app.release_record import differences
from lamwright.app.release_stage import hashes
from lamwright.app.verify import verify
from lamwright.app.verify_solved import compared
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.dxf_cut import read_cut
from lamwright.geometry.punch_layers import CUT_LAYERS
from lamwright.postprocess.files import json_text


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


def other_barrier(cut):
    """Another barrier than the first."""
    return [entity for entity in cut if entity.dxf.layer == "BARRIERS"][1]


def figures(manifest):
    """A promise, a mass and a status."""
    manifest["promised"]["torque_nm"]["value"] = 12.0
    manifest["parts"]["rotor"]["stack_mass_kg"] = 1.0
    manifest["status"] = "NOT PASSED"


@pytest.fixture(scope="module")
def altered(package, tmp_path_factory):
    """A package with every change at once, and what is told: a verification is worth a second.

    Drawings and figures change with hashes and seal after them, the rest without.
    """
    folder = Path(shutil.copytree(package, tmp_path_factory.mktemp("altered") / "copy"))
    redrawn(folder / "rotor_r2000.dxf", nudged)
    redrawn(folder / "rotor_r2000.dxf", lambda m, cut: m.add_entity(other_barrier(cut).copy()))
    redrawn(folder / "rotor_r2018.dxf", lambda model, cut: model.delete_entity(barrier(cut)))
    redrawn(folder / "stator_r2000.dxf", mirrored)
    redrawn(folder / "stator_r2018.dxf", scaled)
    resealed(folder, figures)
    manifest = manifest_of(folder)
    manifest["promised"]["saliency_ratio"]["value"] = 5.0
    (folder / "manifest.json").write_text(json_text(manifest))
    (folder / "notes.txt").write_text("by hand")
    (folder / "rotor.svg").unlink()
    step = folder / "rotor_stack.step"
    step.write_text(step.read_text().replace("'rotor_stack'", "'rotor_stock'"))
    changes = verify(folder).changes
    return folder, list(changes)


def test_every_change_of_a_drawing_is_named_though_the_hashes_follow(altered):
    """Point 4: a vertex nudged by 5 um, a doubled and a missing barrier, a mirrored, a scaled."""
    folder, changes = altered
    nudge, twice, missing, mirror, inches = (c for c in changes if ".dxf: " in c)
    place = read_cut(folder / "rotor_r2000.dxf").contours
    moved = next(c for c in place if c.layer == "BARRIERS").path.edges[1].start * 1e3
    assert nudge.startswith("rotor_r2000.dxf: a contour on layer BARRIERS is off by 5.00 um at ")
    assert f"({moved.real:.3f}, {moved.imag:.3f}) mm" in nudge
    assert twice.startswith("rotor_r2000.dxf: a contour of ")
    assert "on layer BARRIERS stands twice, it starts at (" in twice
    assert missing.startswith("rotor_r2018.dxf: a contour of ")
    assert " on layer BARRIERS is missing, it starts at (" in missing
    assert mirror == (
        "stator_r2000.dxf: the whole drawing is mirrored: every contour runs backwards"
    )
    assert inches == "stator_r2018.dxf: the whole drawing is scaled by 25.4"


def test_changed_figures_are_named_though_the_seal_follows(altered):
    """A promise, a mass and a status: each with what it is and what it should be."""
    folder, changes = altered
    assert [c for c in changes if c.startswith("manifest.json: ")] == [
        "manifest.json: the seal does not fit: the manifest was changed",
        "manifest.json: status = 'NOT PASSED': made 'passed'",
        "manifest.json: promised.torque_nm.value = 12.0: made 10.0",
        "manifest.json: promised.saliency_ratio.value = 5.0: made 4.0",
        f"manifest.json: parts.rotor.stack_mass_kg = 1.0: made {_mass(folder)}",
    ]


def _mass(folder):
    surface = manifest_of(folder)["parts"]["rotor"]["sheet_area_mm2"] * 1e-6  # held elsewhere
    machine = read_machine(DEMO)
    volume = surface * 1e-3 * machine.design.stator.stack_length_mm
    return float(f"{volume * 0.97 * machine.rotor_steel.density_kg_per_m3.value:.9g}")


def test_plain_changes_are_named_and_nothing_else(altered):
    """One file less, one more, one byte of a STEP; with drawings and figures that is all."""
    _, changes = altered
    assert [c for c in changes if ".dxf: " not in c and not c.startswith("manifest.json: ")] == [
        "rotor.svg: missing",
        "rotor_stack.step: changed, its hash is not the manifest's",
        "notes.txt: not of this package",
        "rotor_stack.step: not the design's solids, though of their volume",
    ]


@pytest.mark.slow
def test_changes_of_one_kind_at_a_time_are_named_alone(copy):
    """A drawing doubled; a figure with its seal; the others are in the quick test, together."""
    redrawn(copy / "rotor_r2000.dxf", doubled)
    redrawn(copy / "rotor_r2018.dxf", mirrored)
    resealed(copy, figures)
    status, torque, mass, twice, mirror = verify(copy).changes
    assert "status" in status
    assert "torque_nm" in torque
    assert "stack_mass_kg" in mass
    assert "on layer BARRIERS stands twice, it starts at (" in twice
    assert mirror == (
        "rotor_r2018.dxf: the whole drawing is mirrored: every contour runs backwards"
    )


@pytest.mark.slow
def test_another_design_in_the_package_is_named(copy):
    """Its hash, its figures, its outline and its solids."""
    design = copy / "source" / DEMO.name
    text = design.read_text().replace("tangential_rib_mm = 0.6", "tangential_rib_mm = 0.61")
    design.write_text(text)
    changes = verify(copy).changes
    assert changes[0] == "source/demo_24s4p_arc.toml: changed, its hash is not the manifest's"
    rest = "\n".join(changes)
    assert "manifest.json: design_hash = " in rest
    assert "rotor_r2000.dxf: a contour on layer BARRIERS is off by " in rest
    assert "rotor_stack.step: " in rest


def forged(folder, change):
    """A promise changed in the verdict and all that follows from it: no hash and no seal tells."""
    path = folder / "verdict.json"
    verdict = json.loads(path.read_text())
    change(verdict)
    path.write_text(json_text(verdict))

    def follow(manifest):
        manifest["promised"] = promised_figures(verdict)

    resealed(folder, follow)


@pytest.mark.slow
def test_a_promise_forged_everywhere_is_named_by_solving_again(tmp_path):
    """By hashes, seal and design it is whole; the field does not give it. Before, it does."""
    folder = tmp_path / "out"
    args = ["release", str(DEMO), "--out", str(folder), "--tolerance", "coarse"]
    assert CliRunner().invoke(main, args).exit_code == 0
    plain = CliRunner().invoke(main, ["verify", str(folder), "--solve"])
    assert (plain.exit_code, plain.stdout.count("nothing was changed")) == (0, 1)

    def better(verdict):
        verdict["torque_nm"] *= 1.001
        verdict["outcomes"]["least_torque_nm"]["value"] = verdict["torque_nm"]
        verdict["rib_stress_peak_mpa_error"] *= 0.5

    forged(folder, better)
    assert verify(folder).changes == ()
    torque, error, outcome = verify(folder, solve=True).changes
    assert torque.startswith("verdict.json: torque_nm = ")
    assert error.startswith("verdict.json: rib_stress_peak_mpa_error = ")
    assert outcome.startswith("verdict.json: outcomes.least_torque_nm.value = ")
    assert all(line.endswith(", when solved again") for line in (torque, error, outcome))


def test_figures_solved_again_agree_but_for_the_last_digits():
    """Other processors: 6e-10 of a figure, 1.1e-5 of an error measured; steps may differ."""
    stated = {
        **{"torque_nm": 10.0, "torque_nm_error": 1e-3, "newton_steps": 90, "version": "1"},
        "torque_harmonics": [
            {"order_el": 6, "amplitude_nm": 0.5, "phase_deg": 10.0},
            {"order_el": 12, "amplitude_nm": 1e-9, "phase_deg": 10.0},
        ],
    }
    again = json.loads(json.dumps(stated))
    again |= {"torque_nm": 10.0 * (1 + 1e-9), "torque_nm_error": 1.0001e-3, "newton_steps": 91}
    again["torque_harmonics"][1]["phase_deg"] = -170.0
    assert differences(*compared(stated, again | {"version": "2"})) == []
    assert differences(*compared(stated | {"torque_nm": 10.0001}, again)) == [
        f"torque_nm = 10.0001: made {again['torque_nm']!r}"
    ]
    assert len(differences(*compared(stated | {"torque_nm_error": 0.9e-3}, again))) == 1
    again["torque_harmonics"][0]["amplitude_nm"] = 0.5001
    assert differences(*compared(stated, again)) == [
        "torque_harmonics[1].amplitude_nm = 0.5: made 0.5001",
        "torque_harmonics[2].phase_deg = 10.0: made -170.0",
    ]


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
