"""Details of the rotor in the section's picture: each named once, at a point of itself."""

from pathlib import Path

import pytest
import shapely
from matplotlib.figure import Figure

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_details import ContourDesign, HoleDesign, KeywayDesign, NotchDesign
from lamwright.geometry.design_file import read_design, read_machine
from lamwright.geometry.section import CrossSection, base_name
from lamwright.postprocess.figures import stress_figure
from lamwright.postprocess.figures_details import detail_callouts, unlike_poles
from lamwright.postprocess.figures_section import draw_section
from lamwright.postprocess.figures_style import Style, sampled, upright
from lamwright.postprocess.ribs import rib_report
from lamwright.solver.rotor_stress import rotor_stress

DESIGN = read_design(Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml")
DETAILS = {
    "notch": (
        NotchDesign(angle_deg=45.0, width_mm=3.0, depth_mm=1.2),
        NotchDesign(angle_deg=0.0, width_mm=2.4, depth_mm=1.0, bottom="flat"),
    ),
    "hole": (
        HoleDesign(place_radius_mm=25.0, angle_deg=45.0, diameter_mm=4.0, material="rivet"),
        HoleDesign(place_radius_mm=16.6, angle_deg=23.0, diameter_mm=2.4, span_deg=8.0),
    ),
}
KEY = {"width_mm": 4.0, "depth_mm": 2.0}
NAMES = {"notch 1": "notch_1", "notch 2": "notch_2", "rivet 1": "hole_1", "hole 2": "hole_2"}


def section_of(**details: object) -> CrossSection:
    """The demonstration machine with details."""
    rotor = DESIGN.rotor.model_copy(update=details)
    return cross_section(DESIGN.model_copy(update={"rotor": rotor}))


@pytest.mark.parametrize(("key", "word"), [("steel", "key"), ("air", "keyway")])
@pytest.mark.parametrize("count", [1, 2, 4])
def test_each_detail_is_named_once_at_a_point_of_itself(count: int, key: str, word: str) -> None:
    """Whatever period the keyways make; the anchor lies inside the region of that name."""
    keyway = KeywayDesign.model_validate({**KEY, "count": count, "key": key})
    section = section_of(**DETAILS, keyway=keyway)
    turn = upright(section)
    found = detail_callouts(section, turn)
    assert sorted(c.text for c in found) == sorted([*NAMES, word])
    for callout in found:
        stem = NAMES.get(callout.text, "key_1")
        inside = [
            region.name
            for region in section.rotor
            if base_name(region.name).startswith(stem) and _holds(region, callout.anchor / turn)
        ]
        assert len(inside) == 1


def _holds(region, point: complex) -> bool:
    outline = sampled(region.outer)
    polygon = shapely.Polygon([(p.real, p.imag) for p in outline])
    return polygon.contains(shapely.Point(point.real, point.imag))


@pytest.mark.parametrize("notches", [(), DETAILS["notch"]])
@pytest.mark.parametrize(
    ("contour", "gap"),
    [
        (ContourDesign(kind="eccentric", q_axis_gap_mm=0.7), "0.70"),
        (ContourDesign(kind="step", step_mm=0.3, end_angle_deg=12.0, step_radius_mm=2.0), "0.70"),
        (None, None),
    ],
)
def test_the_gap_on_the_q_axis_is_named_where_it_is_another(contour, gap, notches) -> None:
    """As stated (0.4 mm and the step's 0.3 mm), whether a notch's mouth lies there or not."""
    section = section_of(contour=contour, notch=notches)
    texts = [c.text for c in detail_callouts(section, upright(section)) if "gap" in c.text]
    assert texts == ([f"gap on the q axis, {gap} mm"] if gap else [])


def test_poles_with_keyways_are_not_named_apart() -> None:
    """Of four poles that differ in their keyway alone one is named; unlike barriers make two."""
    one = section_of(keyway=KeywayDesign(count=1, **KEY))
    assert (one.sector_poles, unlike_poles(one)) == (4, [1])
    deeper = DESIGN.rotor.barrier[2].model_copy(update={"depth_mm": 19.0})
    others = (*DESIGN.rotor.barrier[:2], deeper)
    two = section_of(keyway=KeywayDesign(count=1, **KEY), alternate_barrier=others)
    assert (two.sector_poles, unlike_poles(two)) == (4, [1, 2])


@pytest.mark.parametrize("count", [1, 2, 4])
def test_no_name_lies_upon_another_or_upon_the_letters_of_an_axis(count: int) -> None:
    """Boxes of all texts in the picture of a rotor with every detail, pairwise apart."""
    section = section_of(**DETAILS, keyway=KeywayDesign(count=count, **KEY))
    figure = Figure(figsize=(11.0, 6.6))
    ax = figure.add_axes((0.01, 0.02, 0.74, 0.91))
    draw_section(ax, section, Style())
    figure.canvas.draw()
    boxes = [text.get_window_extent() for text in ax.texts if text.get_text()]
    assert len(boxes) > 20
    met = [(a, b) for k, a in enumerate(boxes) for b in boxes[:k] if a.overlaps(b)]
    assert not met


def test_thirty_ribs_of_six_poles_are_named_by_the_most_stressed_of_each() -> None:
    """One keyway in six poles: all names would not fit; five ribs of a pole, the greatest in red.

    The report holds all thirty, and the value written is the greatest of them.
    """
    machine = read_machine(Path(__file__).parents[2] / "designs" / "demo_36s6p_arc.toml")
    rotor = machine.design.rotor.model_copy(update={"keyway": KeywayDesign(count=1, **KEY)})
    section = cross_section(machine.design.model_copy(update={"rotor": rotor}))
    solution = rotor_stress(section, machine.rotor_steel, 600.0)
    report = rib_report(solution, section, 350e6)
    assert len(report.ribs) == 30
    texts = stress_figure("", section, solution, report, Style()).axes[0].texts
    names = [text.get_text() for text in texts if " rib " in text.get_text()]
    assert len(names) == 5
    most = max(row.peak for row in report.ribs) / 1e6
    (red,) = [
        t.get_text() for t in texts if t.get_fontweight() == "bold" and " rib " in t.get_text()
    ]
    assert red.endswith(f"{most:.1f} MPa")
