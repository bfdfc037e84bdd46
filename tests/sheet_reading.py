"""A drawing's text read back from its PDF and SVG, and the outline measured by other means."""

import cmath
import math
import re
from dataclasses import dataclass
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pypdf
import shapely

from lamwright.geometry.contours import Contour
from lamwright.geometry.curves import Path as Outline
from lamwright.geometry.section import CrossSection, base_name, pole_of
from lamwright.postprocess.sheet_font import CAP_SHARE, width_of

MM = 1e3  # mm per m
POINT = 25.4 / 72.0  # mm
SAG = 1e-8  # m between an arc and its chord
LEVEL = 0.3  # mm, texts whose base lines differ less stand in one row
JOINED = 0.3  # mm between letters of one text
SVG = "{http://www.w3.org/2000/svg}"


@dataclass(frozen=True, slots=True)
class Told:
    """A text and where it begins on the paper, mm from the lower left."""

    text: str
    x: float
    y: float


def told_by_svg(path: Path) -> list[Told]:
    """All text elements of an SVG."""
    root = ElementTree.parse(path).getroot()
    height = float(root.attrib["viewBox"].split()[3])
    return [
        Told(str(one.text), float(one.attrib["x"]), height - float(one.attrib["y"]))
        for one in root.iter(f"{SVG}text")
    ]


def told_by_pdf(path: Path) -> list[Told]:
    """All texts that a PDF shows; letters of different subsets of the font are joined again."""
    found: list[Told] = []
    ends: list[float] = []

    def visit(text: str, own: list[float], place: list[float], _: object, size: float) -> None:
        x = (place[4] * own[0] + place[5] * own[2] + own[4]) * POINT
        y = (place[4] * own[1] + place[5] * own[3] + own[5]) * POINT
        text = text.strip()  # the library guesses spaces before some
        if not text:
            return
        end = x + width_of(text, size * POINT * CAP_SHARE)
        if found and abs(y - found[-1].y) < 0.01 and abs(x - ends[-1]) < JOINED:
            found[-1] = Told(found[-1].text + text, found[-1].x, y)
            ends[-1] = end
        else:
            found.append(Told(text, x, y))
            ends.append(end)

    pypdf.PdfReader(path).pages[0].extract_text(visitor_text=visit)
    return found


def table_rows(told: list[Told], first: str, count: int) -> list[list[str]]:
    """Rows of a table of `count` columns whose head begins with `first`, from above."""
    head = next(one for one in told if one.text == first)
    line = sorted((o for o in told if abs(o.y - head.y) < LEVEL), key=lambda o: o.x)
    start = next(k for k, one in enumerate(line) if one.text == first)
    left, right = line[start].x - 5.0, line[start + count - 1].x + 20.0
    rows, y = [], head.y
    while True:
        below = [o for o in told if left < o.x < right and -6.0 < o.y - y < -LEVEL]
        if not below:
            return rows
        y = max(o.y for o in below)
        row = sorted((o for o in below if abs(o.y - y) < LEVEL), key=lambda o: o.x)[:count]
        if len(row) < count:
            return rows
        rows.append([one.text for one in row])


def digits_of(text: str) -> tuple[float, float]:
    """The first number of a text, and half a unit of its last digit."""
    found = re.search(r"\d+(?:\.(\d+))?", text)
    assert found is not None, text
    return float(found.group()), 0.5 * 10.0 ** -len(found.group(1) or "")


def points_of(path: Outline) -> np.ndarray:
    """Points (n,) on an outline, its chords no further than `SAG` from their arcs."""
    found: list[complex] = []
    for edge in path.edges:
        step = math.inf if edge.is_line else math.sqrt(8.0 * SAG / edge.radius)
        count = 1 if edge.is_line else math.ceil(abs(edge.sweep) / step)
        found += [edge.point(k / count) for k in range(count)]
    return np.array(found)


def polygon_of(path: Outline, turn: complex = 1.0) -> shapely.Polygon:
    """The area inside an outline, turned, in m."""
    points = points_of(path) * turn
    return shapely.Polygon(np.column_stack([points.real, points.imag]))


def cavities_by_barrier(
    section: CrossSection, contours: tuple[Contour, ...], pole: int
) -> dict[int, list[shapely.Polygon]]:
    """Areas of a pole's cavities (from 1), its q axis up, by the barrier they belong to."""
    turn = 1j * cmath.exp(-1j * (pole - 0.5) * section.pole_angle)
    known: list[tuple[int, shapely.Polygon]] = []
    for region in section.rotor:
        name = base_name(region.name)
        if pole_of(region.name) == pole and name.startswith("barrier_"):
            known.append((int(name.split("_")[1]), polygon_of(region.outer, turn)))
    found: dict[int, list[shapely.Polygon]] = {}
    for contour in contours:
        if contour.layer != "BARRIERS":
            continue
        area = polygon_of(contour.path, turn)
        for number, other in known:
            if area.intersection(other).area > 0.5 * other.area:
                found.setdefault(number, []).append(area)
                break
    return found


def end_angle(path: Outline, turn: complex) -> list[float]:
    """Angles in degrees off the upright axis where an outline is farthest from the shaft axis."""
    shares = np.linspace(0.0, 1.0, 4001)
    points = np.concatenate(
        [
            edge.start + shares * (edge.end - edge.start)
            if edge.is_line
            else edge.centre + (edge.start - edge.centre) * np.exp(1j * shares * edge.sweep)
            for edge in path.edges
        ]
    )
    angles = np.degrees(np.angle(1j / (points * turn)))
    found = []
    for half in (angles > 0.0, angles < 0.0):
        reach = np.abs(points[half])
        farthest = angles[half][reach > reach.max() - 1e-10]
        found.append(abs(0.5 * float(farthest.max() + farthest.min())))
    return found
