"""The supplier's drawing: what it prints is what the outline has, and can be read."""

import math
import re
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pypdf
import pytest
from random_designs import random_design
from sheet_jobs import DESIGNS, QUICK, job_of, sheet_of, written_sheet
from sheet_reading import (
    MM,
    POINT,
    polygon_of,
    told_by_pdf,
    told_by_svg,
)

from lamwright.geometry.contours import Contour, lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge
from lamwright.geometry.curves import Path as Outline
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.dxf import write_contours
from lamwright.geometry.errors import DesignError, LamwrightError
from lamwright.geometry.punch_offset import punched
from lamwright.geometry.punch_options import PunchOptions
from lamwright.postprocess.sheet import composed
from lamwright.postprocess.sheet_job import SheetJob, SheetOptions
from lamwright.postprocess.sheet_labels import faults

GALLERY = sorted(path.stem for path in (DESIGNS / "gallery").glob("*.toml"))
RANDOM = 60  # designs among the slow tests


@pytest.fixture
def written():
    """Files of one drawing, written once."""
    return written_sheet


@pytest.mark.parametrize("name", QUICK[:1])
def test_files_say_what_was_composed(name, written):
    """All words of the sheet, and no others, stand in the PDF and in the SVG, where they should."""
    words = sorted(word.text for word in sheet_of(name).picture.words)
    pdf, svg = written(name)
    assert sorted(one.text for one in told_by_svg(svg)) == words
    assert sorted(one.text for one in told_by_pdf(pdf)) == words


@pytest.mark.parametrize("name", QUICK)
def test_no_text_over_lines_or_text(name):
    """No letter's box touches any line or another letter's box, on the whole sheet."""
    assert faults(sheet_of(name).picture) == []


@pytest.mark.slow
@pytest.mark.parametrize("name", [name for name in GALLERY if name not in QUICK])
def test_no_text_over_anything_in_the_gallery(name):
    """The same for all gallery rotors."""
    assert faults(sheet_of(name).picture) == []


def _check_random(count: int) -> None:
    rng = np.random.default_rng(20)
    steel = job_of("demo_24s4p_arc").steel
    for _ in range(count):
        design = random_design(rng)
        section = cross_section(design)
        job = SheetJob(design, section, lamination_contours(section), steel, 64 * "0")
        sheet = composed(job)
        assert faults(sheet.picture) == [], design.rotor
        low, high = sheet.picture.box
        assert min(low.real, low.imag) >= 0.0
        assert high.real <= sheet.paper.width
        assert high.imag <= sheet.paper.height


def test_random_rotors_can_be_read():
    """Random rotors of 1 to 6 barriers find a paper, and no text touches anything."""
    _check_random(3)


@pytest.mark.slow
def test_many_random_rotors_can_be_read():
    """The same seed's first sixty."""
    _check_random(RANDOM)


def test_faults_are_found():
    """The check above is able to fail: a word moved onto another and onto an outline is told."""
    picture = sheet_of(QUICK[0]).picture
    word = next(w for w in picture.words if w.text.startswith("\u2300"))
    other = next(w for w in picture.words if w.text == "RIBS")
    moved = replace(picture, inks=(*picture.inks, replace(word, at=other.at)))
    assert any("RIBS" in fault and word.text in fault for fault in faults(moved))
    outline = max(picture.strokes, key=lambda stroke: len(stroke.edges))
    onto = replace(picture, inks=(*picture.inks, replace(word, at=outline.edges[0].start)))
    assert any("touches a line" in fault for fault in faults(onto))


def test_same_job_same_bytes(tmp_path, written):
    """No clock, no chance: drawn again, in a process with other hashes, both files are the same."""
    name = QUICK[0]
    again = tmp_path / "again.pdf", tmp_path / "again.svg"
    code = (
        "import sys; sys.path[:0] = ['tests', 'typed']\n"
        "from pathlib import Path; from sheet_jobs import job_of\n"
        "from lamwright.postprocess.sheet import drawing_sheet\n"
        f"drawing_sheet(job_of({name!r}), Path({str(again[0])!r}), Path({str(again[1])!r}))"
    )
    here = Path(__file__).parent
    paths = f"{here}:{here.parents[1] / 'tests'}:{here.parents[1] / 'typed'}"
    environment = {"PYTHONPATH": paths, "PYTHONHASHSEED": "7", "HOME": str(tmp_path)}
    subprocess.run([sys.executable, "-c", code], check=True, env=environment)
    assert [path.read_bytes() for path in again] == [p.read_bytes() for p in written(name)]


def test_true_scale_and_true_arcs(written):
    """The page is the paper; the rim is an arc of the rotor's radius times the stated scale."""
    job, sheet = job_of(QUICK[0]), sheet_of(QUICK[0])
    pdf, svg = written(QUICK[0])
    page = pypdf.PdfReader(pdf).pages[0].mediabox
    assert float(page.width) * POINT == pytest.approx(sheet.paper.width, abs=0.01)
    assert float(page.height) * POINT == pytest.approx(sheet.paper.height, abs=0.01)
    text = svg.read_text()
    assert f'width="{sheet.paper.width:g}mm"' in text
    radii = {float(radius) for radius in re.findall(r"A([\d.]+) \1 ", text)}
    for scale in (sheet.whole_scale, sheet.pole_scale):
        drawn = scale * MM * job.section.rotor_radius
        assert min(abs(radius - drawn) for radius in radii) < 1e-4
    assert f"({sheet.pole_scale:g}:1)" in " ".join(one.text for one in told_by_svg(svg))


def test_letters_travel_with_the_files(written):
    """Fonts are embedded in both, text stays text."""
    pdf, svg = written(QUICK[0])
    fonts = pypdf.PdfReader(pdf).pages[0]["/Resources"]["/Font"]
    for font in fonts.values():
        own = font.get_object()
        inner = own.get("/DescendantFonts", [own])[0].get_object()
        assert "/FontFile2" in inner["/FontDescriptor"]
    text = svg.read_text()
    assert text.count("@font-face") == 2  # plain and bold
    assert text.count("<text ") == len(sheet_of(QUICK[0]).picture.words)
    assert "http" not in text.replace("http://www.w3.org/2000/svg", "")


def test_sizes_come_from_the_contours():
    """A lamination cut 1 % larger is told 1 % larger, whatever the design says."""
    job = job_of(QUICK[0])
    larger = tuple(
        Contour(
            c.layer,
            Outline(tuple(Edge(1.01 * e.start, 1.01 * e.end, e.bulge) for e in c.path.edges)),
        )
        for c in job.contours
    )
    texts = {word.text for word in composed(replace(job, contours=larger)).picture.words}
    assert {"\u230082.012", "\u230026.26 H7", "0.606 \u00b10.04", "2.626 \u00b10.04"} <= texts
    assert "\u230081.2" not in texts


def test_a_compensated_outline_is_told_as_cut():
    """Steel 0.02 mm out on all contours: ribs and diameter 0.04 mm larger, bore and air less."""
    job = job_of(QUICK[0])
    cut = punched(job.contours, PunchOptions(tool_offset_mm=0.02))
    sheet = composed(replace(job, contours=cut))
    texts = {word.text for word in sheet.picture.words}
    assert {"\u230081.24", "\u230025.96 H7", "0.64 \u00b10.04", "2.56 \u00b10.04"} <= texts
    assert faults(sheet.picture) == []


@pytest.mark.slow
def test_a_rotor_from_a_drawing_is_drawn(tmp_path):
    """A user's DXF with holes below the barriers: ribs are ribs, nothing is written over."""
    name = "winder_72s12p"
    write_contours(job_of(name).contours, tmp_path / "rotor.dxf")
    text = (DESIGNS / "gallery" / f"{name}.toml").read_text()
    tables = re.split(r"(?m)^(?=\[)", text)
    text = "".join(t for t in tables if not re.match(r"\[\[?rotor\.", t))
    text = re.sub(r"(?m)^(gap_mm|shaft_diameter_mm) = .*\n", "", text)
    text = text.replace("[rotor]\n", '[rotor]\noutline_dxf = "rotor.dxf"\n')
    path = tmp_path / "rotor.toml"
    path.write_text(text.replace('"../steel/', f'"{DESIGNS}/steel/'))
    machine = read_machine(path)
    section = cross_section(machine.design)
    contours = lamination_contours(section)
    sheet = composed(SheetJob(machine.design, section, contours, machine.rotor_steel, 64 * "0"))
    assert faults(sheet.picture) == []
    widths = {w.text for w in sheet.picture.words if "\u00b10.04" in w.text}
    assert {"0.70 \u00b10.04", "1.00 \u00b10.04"} <= widths
    assert sheet.pole_scale >= 1.0


def test_wishes_are_on_the_sheet():
    """Title block, fits with their limits, tolerances and notes are as asked."""
    options = SheetOptions(
        owner="Works Ltd", part_number="P-1", title="Disc", revision="C", date="2031-01-02",
        creator="A. B.", approved_by="C. D.", status="released", bore_fit="G6", outer_fit="h8",
        general_tolerance="f", rib_tolerance_mm=0.03, burr_side="far", burr_mm=0.02,
        rolling_direction="along q1", remarks=("ground after stacking",),
    )  # fmt: skip
    job = replace(job_of(QUICK[0]), options=options)
    texts = [word.text for word in composed(job).picture.words]
    whole = " ".join(texts)
    for part in ("Works Ltd", "P-1", "Disc", "C", "2031-01-02", "A. B.", "C. D.", "released"):
        assert part in texts
    assert {"\u230026 G6", "+0.02", "+0.007", "\u230081.2 h8", "\u22120.054"} <= set(texts)
    for part in ("ISO 2768-f", "0.60 \u00b10.03", "the side not seen", "0.02 mm at most"):
        assert part in whole
    for part in ("along q1", "ground after stacking", "INVENTED", "ROTORS BURST", job.design_hash):
        assert part in whole


def test_what_is_not_said_is_not_guessed():
    """Owner and date stay blank, burr and rolling direction are told as not given."""
    whole = " ".join(word.text for word in sheet_of(QUICK[0]).picture.words)
    assert "Burr side: not given" in whole
    assert "Rolling direction: not given" in whole
    assert re.search(r"20\d\d-\d\d", whole) is None


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"bore_fit": "Q7"}, r"fit 'Q7': no tolerance class; accepted a letter of d e f"),
        ({"paper": "A5"}, r"paper 'A5': not known; accepted A4, A3, A2"),
    ],
)
def test_unknown_wishes_are_refused(options, message):
    """One line with what is accepted."""
    with pytest.raises(DesignError, match=message):
        composed(replace(job_of(QUICK[0]), options=SheetOptions(**options)))


def test_a_paper_too_small_is_refused():
    """Ten poles with all tables do not go on A4, and the message says what to do."""
    with pytest.raises(LamwrightError, match="not all views fit on A4; ask for a larger paper"):
        composed(replace(job_of(QUICK[1]), options=SheetOptions(paper="A4")))


def test_mass_is_area_times_thickness():
    """Closed form on polygons: area of the sheet, times thickness and density."""
    job = job_of(QUICK[0])
    rim = next(c for c in job.contours if c.layer == "OUTER_CONTOUR")
    area = polygon_of(rim.path).area - sum(
        polygon_of(c.path).area for c in job.contours if c is not rim
    )
    density, stack = job.steel.density_kg_per_m3.value, 0.1 * 0.97
    texts = [word.text for word in sheet_of(QUICK[0]).picture.words]
    mass = float(texts[texts.index("Steel of the stack, kg") + _offset(texts)])
    assert mass == pytest.approx(area * stack * density, rel=2e-4)
    assert math.isfinite(mass)


def _offset(texts: list[str]) -> int:
    """From an item of the stack's table to its value: columns are written one after the other."""
    return texts.index("Value") - texts.index("Item")
