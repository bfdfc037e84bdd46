"""A design in a notebook: the drawing is the section's, text is escaped, faults are told."""

import math
import re
import subprocess
import sys
from html.parser import HTMLParser
from pathlib import Path
from xml.etree import ElementTree

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area, circle
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.notebook import html_table
from lamwright.geometry.pole_svg import path_data, pole_svg
from lamwright.geometry.section import Region

DESIGNS = Path(__file__).parents[2] / "designs"
SHIPPED = [*sorted(DESIGNS.glob("*.toml")), DESIGNS / "gallery" / "servo_12s10p.toml"]
SVG = "{http://www.w3.org/2000/svg}"
NUMBER = r"-?[\d.]+"
COMMAND = re.compile(rf"[MLA]{NUMBER}(?: {NUMBER})*|Z")


def enclosed(data: str) -> float:
    """Area in mm2 of path data, counter-clockwise as seen positive: a reader of our own.

    Arcs by their chord and segment (closed form); the turning sense from the flags, y down.
    """
    total, at, start = 0.0, 0j, 0j
    for command in COMMAND.findall(data):
        numbers = [float(number) for number in re.findall(NUMBER, command)]
        to = start if command == "Z" else complex(numbers[-2], -numbers[-1])
        if command[0] == "M":
            at = start = to
            continue
        total += 0.5 * (at.conjugate() * to).imag
        if command[0] == "A":
            radius, is_falling = numbers[0], numbers[4] == 0.0
            assert numbers[3] == 0.0
            sweep = 2.0 * math.asin(min(1.0, abs(to - at) / (2.0 * radius)))
            total += (1.0 if is_falling else -1.0) * 0.5 * radius**2 * (sweep - math.sin(sweep))
        at = to
    return total


def exact(region: Region) -> float:
    """Area in mm2 of a region, holes left out."""
    return 1e6 * (area(region.outer) + sum(area(hole) for hole in region.holes))


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
def test_the_drawing_is_the_section_to_its_last_digit(path: Path):
    """Every region's area, read back from the SVG. 0.1 um a coordinate is 1e-4 mm along an edge."""
    section = cross_section(read_machine(path).design)
    picture = ElementTree.fromstring(pole_svg(section, "pole"))
    drawn = [shape.get("d") for shape in picture.iter(f"{SVG}path") if shape.get("fill")]
    regions = (*section.stator, *section.rotor)
    assert len(drawn) == len(regions)
    for data, region in zip(drawn, regions, strict=True):
        edges = 1e3 * sum(edge.length for p in (region.outer, *region.holes) for edge in p.edges)
        assert enclosed(data) == pytest.approx(exact(region), abs=1e-4 * edges)
    marks = [shape for shape in picture.iter(f"{SVG}path") if not shape.get("fill")]
    assert len(marks) == len(section.ribs)


def test_every_corner_lies_within_the_picture():
    """The view box holds all of the sector, its arcs bowing beyond their ends included."""
    section = cross_section(read_machine(DESIGNS / "demo_24s4p_arc.toml").design)
    picture = ElementTree.fromstring(pole_svg(section, "pole"))
    left, top, width, height = map(float, picture.get("viewBox").split())
    # Upright, the yoke bows to its full radius above, in the middle.
    assert top < -1e3 * section.stator_outer_radius < top + 0.03 * height
    reach = 1e3 * section.stator_outer_radius * math.sin(0.5 * section.sector_angle)
    assert left < -reach < left + 0.03 * width
    assert top + height == pytest.approx(0.0, abs=0.03 * height)


def test_a_circle_is_four_arcs():
    """The radius is the circle's; y down, so a counter-clockwise arc has sweep flag 0."""
    assert path_data(circle(0j, 2e-3)) == (
        "M2 0A2 2 0 0 0 0 -2A2 2 0 0 0 -2 0A2 2 0 0 0 0 2A2 2 0 0 0 2 0"
    )


class _Tags(HTMLParser):
    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.words: list[str] = []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        assert not [name for name, _ in attrs if name.startswith("on") or name in ("id", "class")]

    def handle_data(self, data):
        self.words.append(data)


HOSTILE = '<script>alert(1)</script>"><img src=x onerror=alert(1)>'


def test_names_and_notes_of_others_are_text():
    """A name with markup adds no element to those of a plain name."""
    machine = read_machine(DESIGNS / "demo_24s4p_arc.toml")
    named = machine.design.model_copy(update={"name": HOSTILE, "note": HOSTILE})
    plain = machine.design.model_copy(update={"name": "plain", "note": "plain"})
    hostile, other = _Tags(named._repr_html_()), _Tags(plain._repr_html_())
    assert hostile.tags == other.tags
    assert HOSTILE in "".join(hostile.words)
    assert _Tags(html_table((HOSTILE,), [(HOSTILE,)])).tags.count("script") == 0


def test_a_design_that_cannot_be_drawn_says_why():
    """Both barriers moved onto each other: the reason stands where the drawing would."""
    design = read_machine(DESIGNS / "demo_24s4p_arc.toml").design
    first, *others = design.rotor.barrier
    deep = first.model_copy(update={"depth_mm": others[0].depth_mm})
    rotor = design.rotor.model_copy(update={"barrier": (deep, *others)})
    shown = design.model_copy(update={"rotor": rotor})._repr_html_()
    assert "cannot be drawn" in shown
    assert re.search(r"rotor\.barrier\[\d\]\.\w+ = [\d.]+: ", shown)
    assert "<svg" not in shown


def test_a_machine_names_its_cards():
    """What `read_machine` gives shows itself too."""
    machine = read_machine(DESIGNS / "demo_36s4p_magnet.toml")
    shown = machine._repr_html_()
    assert machine.design._repr_html_() in shown
    assert all(card.name in shown for card in machine.cards)


def test_a_design_is_shown_without_a_plotting_library():
    """In a new process: neither matplotlib nor the mesher is loaded for it."""
    code = (
        "import sys; from pathlib import Path; from lamwright.geometry import read_machine;"
        f"read_machine(Path({str(SHIPPED[0])!r})).design._repr_html_();"
        "print(*{'matplotlib', 'gmsh', 'scipy'} & set(sys.modules))"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == ""
