"""The supplier's DXF: read back by this tool, by the library alone and group by group."""

import cmath
import functools
import os
import subprocess
import sys
from pathlib import Path as FilePath

import ezdxf
import pytest
from outlines import DESIGNS, polygon

from lamwright.geometry.contours import Contour, compare_contours, lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area, circle
from lamwright.geometry.design_file import read_design
from lamwright.geometry.dxf_release import (
    FORMS,
    NOTE_LAYERS,
    DxfForm,
    bounding_box,
    read_release,
    write_release,
)
from lamwright.geometry.errors import DesignError
from lamwright.geometry.punch_layers import (
    CUT_LAYERS,
    in_order,
    rotor_lamination,
    stator_lamination,
)
from lamwright.geometry.section import CrossSection

MM = 1e-3  # m
TEXTS = ("Invented demo", "sheet 0.5 mm, 100% of it %%u ^I \u00e4")
NAMES = (
    "demo_36s4p_magnet",
    "gallery/compressor_24s4p",
    "gallery/spindle_24s2p",
)


@functools.cache
def section(name: str) -> CrossSection:
    return cross_section(read_design(DESIGNS / f"{name}.toml"))


def groups(path: FilePath) -> list[tuple[int, str]]:
    """The file as pairs of group code and value, read without any library."""
    rows = path.read_text(encoding="ascii").splitlines()
    return [(int(code), value) for code, value in zip(rows[::2], rows[1::2], strict=True)]


@pytest.mark.parametrize("form", FORMS)
@pytest.mark.parametrize("name", NAMES)
def test_what_is_written_is_read_back_exactly(name, form: DxfForm, tmp_path):
    """To 1e-12 m, rotor and stator, in the form asked for, without a word of the audit."""
    for part, contours in (
        ("rotor", rotor_lamination(section(name))),
        ("stator", stator_lamination(section(name))),
    ):
        path = tmp_path / f"{part}.dxf"
        write_release(contours, path, form, TEXTS, 0.4)
        again = read_release(path)
        assert [c.layer for c in again] == [c.layer for c in contours]
        assert compare_contours(contours, again) < 1e-12
        document = ezdxf.readfile(path)
        assert document.dxfversion == {"R2000": "AC1015", "R2018": "AC1032"}[form]
        auditor = document.audit()
        assert not auditor.errors
        assert not auditor.fixes


def test_the_header_says_millimetres_and_where_the_drawing_lies(tmp_path):
    """Group by group: $INSUNITS 4, $MEASUREMENT 1, extents around all that is drawn."""
    contours = rotor_lamination(section("demo_24s4p_arc"))
    for form in FORMS:
        path = tmp_path / "rotor.dxf"
        write_release(contours, path, form, TEXTS)
        pairs = groups(path)
        assert pairs[pairs.index((9, "$INSUNITS")) + 1] == (70, "4")
        assert pairs[pairs.index((9, "$MEASUREMENT")) + 1] == (70, "1")
        at = pairs.index((9, "$EXTMAX"))
        corner = bounding_box(contours)[1]
        assert float(pairs[at + 1][1]) > corner.real / MM
        assert float(pairs[at + 2][1]) > corner.imag / MM


def test_notes_are_off_the_cut_layers_and_contours_are_closed_with_true_arcs(tmp_path):
    """By the library alone: polylines on cut layers, lines and texts on the other two, no more."""
    path = tmp_path / "rotor.dxf"
    contours = rotor_lamination(section("demo_36s4p_magnet"))
    write_release(contours, path, "R2018", TEXTS, 0.4)
    kinds: dict[str, set[str]] = {}
    for entity in ezdxf.readfile(path).modelspace():
        kinds.setdefault(entity.dxf.layer, set()).add(entity.dxftype())
        if entity.dxf.layer in CUT_LAYERS:
            assert entity.closed
            assert any(bulge for *_, bulge in entity.get_points("xyb"))
    cut = {layer: kind for layer, kind in kinds.items() if layer in CUT_LAYERS}
    assert set(cut) == {"MAGNET_POCKETS", "BORE", "OUTER_CONTOUR"}
    assert set().union(*cut.values()) == {"LWPOLYLINE"}
    assert {layer: kinds[layer] for layer in NOTE_LAYERS} == {"DATUM": {"LINE"}, "TEXT": {"TEXT"}}
    texts = [e.dxf.text for e in ezdxf.readfile(path).modelspace().query("TEXT")]
    assert texts == ["Invented demo", "sheet 0.5 mm, 100% of it % %u I ?"]


@pytest.mark.parametrize("name", NAMES)
def test_layers_say_what_each_contour_is(name):
    """Keyways and magnets of the design are on layers of their own, in numbers it states."""
    design, of = read_design(DESIGNS / f"{name}.toml"), section(name)
    layers = [c.layer for c in rotor_lamination(of)]
    assert layers.count("OUTER_CONTOUR") == 1
    has_keyway = design.rotor.keyway is not None
    assert (layers.count("KEYWAY"), layers.count("BORE")) == (has_keyway, not has_keyway)
    plain = [c.layer for c in lamination_contours(of)]
    assert layers.count("BARRIERS") + layers.count("MAGNET_POCKETS") == plain.count("BARRIERS")
    with_magnet = [b for b in design.rotor.barrier if b.magnet is not None]
    assert bool(with_magnet) == ("MAGNET_POCKETS" in layers)
    closed = design.stator.slot_mouth == "closed"
    slots = [c.layer for c in stator_lamination(of)]
    assert slots.count("SLOTS") == (design.stator.slots if closed else 1)
    assert slots.count("BORE") == closed


def test_direction_order_and_starts_are_the_same_everywhere():
    """Outer counter-clockwise and last, all else clockwise; each pole's contours start alike."""
    for name in NAMES:
        of = section(name)
        contours = rotor_lamination(of)
        assert contours[-1].layer == "OUTER_CONTOUR"
        assert area(contours[-1].path) > 0.0
        assert all(area(c.path) < 0.0 for c in contours[:-1])
        turn = cmath.exp(1j * of.pole_angle * of.rotor_period)
        starts = [
            c.path.edges[0].start for c in contours if c.layer in ("BARRIERS", "MAGNET_POCKETS")
        ]
        for start in starts:
            assert min(abs(start * turn - other) for other in starts) < 1e-9
        # The same contours in another order and from other starts end up the same.
        mixed = [_started_elsewhere(c) for c in reversed(lamination_contours(of))]
        plain = [c.path.edges[0].start for c in in_order(mixed)]
        sorted_ones = [c.path.edges[0].start for c in in_order(lamination_contours(of))]
        assert plain == sorted_ones


def _started_elsewhere(contour: Contour) -> Contour:
    edges = contour.path.edges
    return Contour(contour.layer, type(contour.path)((*edges[1:], edges[0])))


def test_stator_sheets_have_the_area_of_their_regions():
    """The sheet as one contour and the sector's iron as regions are made apart: areas are equal."""
    for name in NAMES:
        of = section(name)
        (iron,) = (r for r in of.stator if r.name == "stator_iron")
        regions = (area(iron.outer) + sum(area(h) for h in iron.holes)) * of.sectors
        sheet = sum(area(c.path) for c in stator_lamination(of))
        assert sheet == pytest.approx(regions, rel=1e-10)


def test_the_bounding_box_is_that_of_the_arcs():
    """Exactly the circle's; of a lamination that of a fine polygon."""
    low, high = bounding_box([Contour("BORE", circle(1 * MM + 2j * MM, 3 * MM))])
    assert (low, high) == (pytest.approx(-2 * MM - 1j * MM), pytest.approx(4 * MM + 5j * MM))
    contours = rotor_lamination(section("gallery/compressor_24s4p"))
    low, high = bounding_box(contours)
    bounds = polygon(contours[-1].path).bounds
    assert [low.real, low.imag, high.real, high.imag] == pytest.approx(bounds, abs=2e-7)


def test_every_process_writes_the_same_bytes(tmp_path):
    """With other hashes of text, which change the order of sets, the bytes are the same."""
    code = (
        "import sys; from pathlib import Path\n"
        "from lamwright.geometry.cross_section import cross_section\n"
        "from lamwright.geometry.design_file import read_design\n"
        "from lamwright.geometry.dxf_release import write_release\n"
        "from lamwright.geometry.punch_layers import rotor_lamination\n"
        "contours = rotor_lamination(cross_section(read_design(Path(sys.argv[1]))))\n"
        "for form in ('R2000', 'R2018'):\n"
        "    write_release(contours, Path(sys.argv[2], form), form, ['a', 'b'], 0.4)\n"
    )
    design = DESIGNS / "demo_24s4p_arc.toml"
    (tmp_path / "other").mkdir()
    command = [sys.executable, "-c", code, str(design), str(tmp_path / "other")]
    # This process has a seed of its own, by chance unless it was told one.
    seed = "2" if os.environ.get("PYTHONHASHSEED") == "1" else "1"
    subprocess.run(command, check=True, env={**os.environ, "PYTHONHASHSEED": seed})
    contours = rotor_lamination(cross_section(read_design(design)))
    for form in FORMS:
        write_release(contours, tmp_path / form, form, ["a", "b"], 0.4)
        written = (tmp_path / form).read_bytes()
        assert written == (tmp_path / "other" / form).read_bytes()
        assert b"\r" not in written


@pytest.mark.parametrize(
    ("change", "text"),
    [
        (lambda m: m.add_circle((0, 0), 1, dxfattribs={"layer": "BORE"}), "CIRCLE on layer BORE"),
        (lambda m: m.add_line((0, 0), (1, 1)), "LINE on layer 0; accepted HOLES"),
        (
            lambda m: m.add_circle((0, 0), 1, dxfattribs={"layer": "DATUM"}),
            "CIRCLE on layer DATUM; accepted LINE and TEXT",
        ),
    ],
)
def test_what_no_release_holds_is_refused(change, text, tmp_path):
    """A release is read strictly: an entity that was added is named with its layer."""
    path = tmp_path / "rotor.dxf"
    write_release(rotor_lamination(section("demo_24s4p_arc")), path, "R2000")
    document = ezdxf.readfile(path)
    change(document.modelspace())
    document.saveas(path)
    with pytest.raises(DesignError, match=text):
        read_release(path)


def test_a_layer_that_is_not_cut_is_refused(tmp_path):
    """A contour on a layer of notes would never be cut."""
    contour = Contour("TEXT", circle(0j, MM))
    with pytest.raises(DesignError, match="layer TEXT is not one to be cut; accepted HOLES"):
        write_release([contour], tmp_path / "a.dxf", "R2000")
    assert not (tmp_path / "a.dxf").exists()
