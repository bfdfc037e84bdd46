"""The stator's drawing: what it prints is what the outline has, and can be read."""

import re
from dataclasses import replace
from pathlib import Path as FilePath

import numpy as np
import pytest
import shapely
from sheet_jobs import DESIGNS, stator_job_of
from sheet_reading import LEVEL, MM, Told, digits_of, polygon_of, told_by_pdf, told_by_svg

from lamwright.geometry.contours import Contour
from lamwright.geometry.curves import Edge, Path
from lamwright.geometry.errors import DesignError, LamwrightError
from lamwright.postprocess.sheet import drawing_sheet
from lamwright.postprocess.sheet_job import SheetJob
from lamwright.postprocess.sheet_labels import faults
from lamwright.postprocess.sheet_stator import composed_stator

SAMPLED = 1e-4  # mm, of polygons instead of arcs
DEMO = "demo_24s4p_arc"
# Semi-closed, of two poles and large, closed, open, open with many slots, semi-closed and large.
KINDS = ("blower_36s2p", "spindle_24s2p", "servo_12s10p", "direct_144s16p", "hoist_60s10p")
GALLERY = sorted(path.stem for path in (DESIGNS / "gallery").glob("*.toml"))


def slots_of(job: SheetJob) -> tuple[shapely.Polygon, list[shapely.Polygon]]:
    """The bore's disc, and all slots as areas outside it, from the x axis on, in m."""
    paths = [polygon_of(c.path) for c in job.contours if c.layer == "SLOTS"]
    bores = [c.path for c in job.contours if c.layer == "BORE"]
    if bores:
        return polygon_of(bores[0]), sorted(paths, key=_turn)
    whole = next(c.path for c in job.contours if c.layer == "SLOTS")
    radius = min(abs(e.start) for e in whole.edges)
    right, left = complex(radius), complex(-radius)
    bore = polygon_of(Path((Edge(right, left, 1.0), Edge(left, right, 1.0))))
    found = [g for g in paths[0].difference(bore.buffer(2e-8)).geoms if g.area > 1e-9]
    return bore, sorted(found, key=_turn)


def _turn(area: shapely.Polygon) -> float:
    return float(np.arctan2(area.centroid.y, area.centroid.x) % (2.0 * np.pi))


def _upright(area: shapely.Polygon, count: int) -> np.ndarray:
    """Corners of the first slot as x + iy, its middle along +y."""
    xy = np.array(area.exterior.coords)
    return (xy[:, 0] + 1j * xy[:, 1]) * 1j * np.exp(-1j * np.pi / count)


def expected_sizes(
    job: SheetJob, bore: shapely.Polygon, slots: list[shapely.Polygon]
) -> dict[str, float]:
    """Sizes in mm of the polygons, by the table's words."""
    radius = bore.exterior.distance(shapely.Point(0.0, 0.0))
    outer = next(polygon_of(c.path) for c in job.contours if c.layer == "OUTER_CONTOUR")
    points = _upright(slots[0], len(slots))
    middle = shapely.LineString([(0.0, radius), (0.0, 2.0 * radius)])
    cut = shapely.Polygon(np.column_stack([points.real, points.imag])).intersection(middle)
    sizes = {
        "Slots, equally spaced": len(slots),
        "Slot pitch, exact": 360.0 / len(slots),
        "Slot, greatest width": MM * (points.real.max() - points.real.min()),
        "Slot depth on its middle, from bore": MM * (cut.bounds[3] - radius),
        "Tooth, least width": MM * slots[0].distance(slots[1]),
        "Yoke behind a slot, least": MM * outer.exterior.distance(slots[0]),
    }
    at_bore = points[np.abs(points) < radius + 1e-7]
    if any(c.layer == "BORE" for c in job.contours):
        sizes["Bridge at the bore, least"] = MM * slots[0].distance(bore)
    else:
        sizes["Slot opening at the bore"] = MM * (at_bore.real.max() - at_bore.real.min())
    return sizes


@pytest.mark.parametrize(
    "name", [DEMO, *(pytest.param(name, marks=pytest.mark.slow) for name in KINDS)]
)
def test_printed_sizes_are_the_outlines(name, tmp_path):
    """Every size, read back from both files, to its last digit; diameters with their fits too.

    The outline is measured by polygons with chords within 1e-8 m of the arcs.
    """
    job = stator_job_of(name)
    pdf, svg = tmp_path / "stator.pdf", tmp_path / "stator.svg"
    sheet = drawing_sheet(job, pdf, svg)
    words = sorted(word.text for word in sheet.picture.words)
    bore, slots = slots_of(job)
    sizes = expected_sizes(job, bore, slots)
    outer = max(abs(e.start) for c in job.contours for e in c.path.edges)
    inner = bore.exterior.distance(shapely.Point(0.0, 0.0))
    for told in (told_by_svg(svg), told_by_pdf(pdf)):
        assert sorted(one.text for one in told) == words
        rows = _rows(told)
        assert sizes.keys() <= rows.keys()
        for label, size in sizes.items():
            value, half = digits_of(rows[label])
            assert abs(value - size) < half + SAMPLED, label
        if "Straight lip, depth" in rows:
            _check_lip(inner, slots, rows)
        diameters = sorted(digits_of(t.text)[0] for t in told if t.text.startswith("\u2300"))
        assert diameters == pytest.approx([2.0 * MM * inner, 2.0 * MM * outer], abs=1e-3)
        # Every size of the table that has limits stands at a view too.
        for label in sizes.keys() - {"Slots, equally spaced", "Slot pitch, exact"}:
            assert sum(one.text == rows[label] for one in told) > 1, label
    _check_scale(job, svg, sheet.whole_scale, sheet.pole_scale)


def _rows(told: list[Told]) -> dict[str, str]:
    """The text right beside each text that has one within a table's width."""
    found = {}
    for one in told:
        beside = [o for o in told if abs(o.y - one.y) < LEVEL and 0.0 < o.x - one.x < 90.0]
        if beside:
            found[one.text] = min(beside, key=lambda o: o.x).text
    return found


def _check_lip(radius: float, slots: list[shapely.Polygon], rows: dict[str, str]) -> None:
    """The slot is as wide as its mouth to the lip's end, and wider beyond."""
    points = _upright(slots[0], len(slots))
    area = shapely.Polygon(np.column_stack([points.real, points.imag]))
    lip, opening = (
        digits_of(rows[k])[0] for k in ("Straight lip, depth", "Slot opening at the bore")
    )
    side = 0.5 * opening / MM
    foot = np.sqrt(radius**2 - side**2)

    def width(height: float) -> float:
        level = shapely.LineString([(-0.1, height), (0.1, height)])
        return MM * area.intersection(level).length

    assert width(foot + (lip - 0.002) / MM) == pytest.approx(opening, abs=2e-3)
    assert width(foot + (lip + 0.02) / MM) > opening + 5e-3


def _check_scale(job: SheetJob, svg: FilePath, *scales: float) -> None:
    """The outer rim is an arc of its radius times each view's scale."""
    radii = {float(radius) for radius in re.findall(r"A([\d.]+) \1 ", svg.read_text())}
    outer = max(abs(e.start) for c in job.contours for e in c.path.edges)
    for scale in scales:
        assert min(abs(radius - scale * MM * outer) for radius in radii) < 1e-4


@pytest.mark.parametrize(
    "name", [DEMO, *(pytest.param(name, marks=pytest.mark.slow) for name in GALLERY)]
)
def test_no_text_over_lines_or_text(name):
    """No letter's box touches any line or another letter's box, and all is on the paper."""
    sheet = composed_stator(stator_job_of(name))
    assert faults(sheet.picture) == []
    low, high = sheet.picture.box
    assert min(low.real, low.imag) >= 0.0
    assert high.real <= sheet.paper.width
    assert high.imag <= sheet.paper.height


def test_sizes_come_from_the_contours():
    """A lamination cut 1 % larger is told 1 % larger, whatever the design says."""
    job = stator_job_of(DEMO)
    larger = tuple(
        Contour(
            c.layer, Path(tuple(Edge(1.01 * e.start, 1.01 * e.end, e.bulge) for e in c.path.edges))
        )
        for c in job.contours
    )
    texts = {word.text for word in composed_stator(replace(job, contours=larger)).picture.words}
    assert {"\u2300141.4", "\u230082.82 H8", "2.424 \u00b10.04", "5.454 \u00b10.04"} <= texts


def test_the_sheet_says_whose_it_is():
    """Title block, fits as asked, material, stack, cautions; nothing of the rotor."""
    job = stator_job_of(DEMO)
    asked = replace(
        job.options, revision="B", title="Disc", stator_bore_fit="H7", stator_outer_fit="h8",
        rib_tolerance_mm=0.01, burr_side="near", burr_mm=0.03,
    )  # fmt: skip
    words = [word.text for word in composed_stator(replace(job, options=asked)).picture.words]
    whole = " ".join(words)
    for text in ("Disc, stator", "B", job.design_hash, job.steel.name, "0.5 mm", "4711"):
        assert text in words
    assert {"\u230082 H7", "+0.035", "\u2300140 h8", "\u22120.063"} <= set(words)
    for part in ("the side seen", "0.03 mm at most", "the bore makes the air gap", "INVENTED"):
        assert part in whole
    # Of ribs alone: teeth and slots keep both their cuts' limit.
    assert "5.40 \u00b10.04" in words
    assert "Skew" not in words
    assert "barrier" not in whole
    plain = " ".join(word.text for word in composed_stator(job).picture.words)
    assert "Fit of the outer diameter and its run-out to datum A: not given" in plain


def test_what_cannot_be_drawn_is_refused():
    """One line with what is accepted."""
    job = stator_job_of(DEMO)
    with pytest.raises(DesignError, match=r"fit 'Q7': no tolerance class"):
        composed_stator(replace(job, options=replace(job.options, stator_bore_fit="Q7")))
    large = stator_job_of("hoist_60s10p")
    with pytest.raises(LamwrightError, match="stator drawing: not all views fit on A4"):
        composed_stator(replace(large, options=replace(large.options, paper="A4")))
