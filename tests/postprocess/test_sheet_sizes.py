"""Sizes printed on the supplier's drawing, read back from both files and measured again."""

import itertools
import re

import numpy as np
import pytest
import shapely
from sheet_jobs import QUICK, job_of, written_sheet
from sheet_reading import (
    MM,
    cavities_by_barrier,
    digits_of,
    end_angle,
    polygon_of,
    table_rows,
    told_by_pdf,
    told_by_svg,
)

from lamwright.geometry.curves import Path as Outline
from lamwright.postprocess.sheet_job import SheetJob

# Their ends are round or run along the rim, so that the farthest point is where an end is measured.
MEASURED = (*QUICK, "mill_48s4p", "ropeway_48s8p", "traction_54s6p", "servo_12s10p")
SAMPLED = 1e-4  # mm, of a distance between polygons instead of arcs
TURNED = 0.002  # degrees, of the farthest of samples on an arc


@pytest.fixture
def written():
    """Files of one drawing, written once."""
    return written_sheet


@pytest.mark.parametrize(
    "name",
    [MEASURED[0], *(pytest.param(name, marks=pytest.mark.slow) for name in MEASURED[1:])],
)
def test_printed_sizes_are_the_outlines(name, written):
    """Every width, thickness, distance and angle, read back from both files, to its last digit.

    The outline is measured by polygons with chords within 1e-8 m of the arcs.
    """
    job = job_of(name)
    pdf, svg = written(name)
    for told in (told_by_svg(svg), told_by_pdf(pdf)):
        _check_diameters(job, [one.text for one in told])
        _check_ribs(job, table_rows(told, "Det.", 7))
        several = len({p for p in re.findall(r"Poles \d", " ".join(o.text for o in told))}) > 1
        _check_barriers(job, told, several)


def _check_diameters(job: SheetJob, texts: list[str]) -> None:
    outer = next(c.path for c in job.contours if c.layer == "OUTER_CONTOUR")
    bore = next(c.path for c in job.contours if c.layer == "BORE")
    sizes = [
        2.0 * MM * polygon_of(outer).hausdorff_distance(shapely.Point(0.0, 0.0)),
        2.0 * MM * polygon_of(bore).exterior.distance(shapely.Point(0.0, 0.0)),
    ]
    printed = [digits_of(text) for text in texts if text.startswith("\u2300")]
    for size in sizes:
        assert any(abs(value - size) < half + SAMPLED for value, half in printed), size


def _check_ribs(job: SheetJob, rows: list[list[str]]) -> None:
    outer = next(c.path for c in job.contours if c.layer == "OUTER_CONTOUR")
    rim = polygon_of(outer, 1j * np.exp(-0.5j * job.section.pole_angle)).exterior
    barriers = cavities_by_barrier(job.section, job.contours, 1)
    assert {k for row in rows for k in _numbers(row[2])} == set(barriers)
    for _, kind, numbers, _, width, *_ in rows:
        value, half = digits_of(width)
        for number in _numbers(numbers):
            cavities = barriers[number]
            if kind == "tangential":
                least = min(cavity.distance(rim) for cavity in cavities)
            else:
                pairs = [(a, b) for k, a in enumerate(cavities) for b in cavities[:k]]
                least = min(a.distance(b) for a, b in pairs)
            assert abs(value - MM * least) < half + SAMPLED, (kind, number)


@pytest.mark.slow
@pytest.mark.parametrize("name", ["blower_36s2p", "spindle_24s2p"])
def test_radial_ribs_stand_where_printed(name, written):
    """Half-way between the cavities on both sides of each upright rib, to the last digit."""
    job = job_of(name)
    rows = table_rows(told_by_pdf(written(name)[0]), "Barrier", 5)
    middles = {}
    for number, cavities in cavities_by_barrier(job.section, job.contours, 1).items():
        spans = sorted((area.bounds[0], area.bounds[2]) for area in cavities)
        middles[number] = [500.0 * (a[1] + b[0]) for a, b in itertools.pairwise(spans)]
    assert sum(int(row[-1]) for row in rows) == job.section.poles * sum(map(len, middles.values()))
    for barrier, off, _, tilt, _ in rows:
        value, half = digits_of(off)
        gaps = [abs(value - abs(middle)) for middle in middles[int(barrier)]]
        assert min(gaps) < half + SAMPLED
        assert tilt == "0"


def _numbers(text: str) -> list[int]:
    return [int(one) for one in text.split(",")]


def _check_barriers(job: SheetJob, told: list, several: bool) -> None:
    rows = table_rows(told, "Poles" if several else "No.", 7 if several else 6)
    rows = [row if several else ["1", *row] for row in rows]
    radius = max(abs(e.start) for c in job.contours for e in c.path.edges)
    for pole in {row[0] for row in rows}:
        first = int(pole.split(",")[0])
        barriers = cavities_by_barrier(job.section, job.contours, first)
        own = [row for row in rows if row[0] == pole]
        assert sorted(int(row[1]) for row in own) == sorted(barriers)
        for _, number, beside, outer, thickness, depth, angle in own:
            cut = _cut(barriers[int(number)], float(beside))
            assert abs(digits_of(outer)[0] - cut[1]) < digits_of(outer)[1] + SAMPLED
            assert abs(digits_of(thickness)[0] - (cut[1] - cut[0])) < (
                digits_of(thickness)[1] + SAMPLED
            )
            value, half = digits_of(depth)
            assert abs(value - (MM * radius - cut[1])) < half + SAMPLED
            ends = _ends(job, int(number), first)
            for printed in angle.split(" / "):
                value, half = digits_of(printed)
                assert any(abs(value - end) < half + TURNED for end in ends), (number, ends)


def _cut(cavities: list[shapely.Polygon], beside: float) -> tuple[float, float]:
    """Lowest and highest place of a barrier on the upright line `beside` mm left of the q axis."""
    x = -beside / MM
    line = shapely.LineString([(x, 0.0), (x, 1.0)])
    parts = [cavity.intersection(line).bounds for cavity in cavities if cavity.intersects(line)]
    return MM * min(b[1] for b in parts), MM * max(b[3] for b in parts)


def _ends(job: SheetJob, barrier: int, pole: int) -> list[float]:
    turn = 1j * np.exp(-1j * (pole - 0.5) * job.section.pole_angle)
    areas = cavities_by_barrier(job.section, job.contours, pole)[barrier]
    edges = []
    for contour in job.contours:
        if contour.layer == "BARRIERS":
            area = polygon_of(contour.path, turn)
            if any(area.equals(one) for one in areas):
                edges += contour.path.edges
    return end_angle(Outline(tuple(edges)), complex(turn))
