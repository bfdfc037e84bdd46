"""Changes of a drawing: each is named and placed, and nothing is named where nothing changed."""

import cmath
import math
from dataclasses import replace

import numpy as np
import pytest
from outlines import DESIGNS, plain_design

from lamwright.geometry.contour_changes import Motion, contour_changes
from lamwright.geometry.contour_gaps import curve_gaps, distances
from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge, Path, circle, reversed_path
from lamwright.geometry.design_file import read_design

UM = 1e-6


@pytest.fixture(scope="module")
def plain():
    """Twelve cavities, all poles alike and symmetric."""
    return lamination_contours(cross_section(plain_design()))


@pytest.fixture(scope="module")
def leaning():
    """A rotor whose poles are not symmetric: its mirror image is another one."""
    design = read_design(DESIGNS / "gallery" / "fan_12s4p.toml")
    return lamination_contours(cross_section(design))


def _with_vertex_moved(contours, number, vertex, by):
    edges = list(contours[number].path.edges)
    at, before = edges[vertex], edges[vertex - 1]
    edges[vertex] = replace(at, start=at.start + by)
    edges[vertex - 1] = replace(before, end=before.end + by)
    changed = replace(contours[number], path=Path(tuple(edges)))
    return (*contours[:number], changed, *contours[number + 1 :])


def _restarted(contour, by):
    edges = contour.path.edges
    return replace(contour, path=Path((*edges[by:], *edges[:by])))


def test_the_same_drawing_has_no_change(plain):
    """Nor one in another order, started elsewhere, or moved by half the tolerance."""
    assert contour_changes(plain, plain) == ()
    assert contour_changes(plain, [_restarted(c, 1) for c in reversed(plain)]) == ()
    assert contour_changes(plain, Motion(shift=0.5 * UM).moved(plain)) == ()


def test_every_vertex_moved_by_five_micrometres_is_named_and_placed(plain):
    """All vertices of one pole's cavities, the rim and the bore, in two directions each."""
    numbers = (0, 1, 2, 6, 10)
    for number in numbers:
        ring = number < 2  # a circle moved along itself is the same circle
        for vertex in range(len(plain[number].path.edges)):
            at = plain[number].path.edges[vertex].start
            for by in (5.0 * UM * at / abs(at), 5.0j * UM * at / abs(at)):
                if ring and abs((by / at).real) < 1e-12:
                    continue
                changes = contour_changes(plain, _with_vertex_moved(plain, number, vertex, by))
                assert [change.kind for change in changes] == ["moved"]
                assert abs(changes[0].place - at - by) < 5.1 * UM or ring
                assert "off by 5.0" in changes[0].text or ring


def test_a_missing_a_doubled_and_a_new_contour_are_named(plain):
    """Each with its layer and where it starts."""
    (missing,) = contour_changes(plain, plain[:5] + plain[6:])
    assert missing.kind == "missing"
    assert missing.place == plain[5].path.edges[0].start
    (twice,) = contour_changes(plain, [*plain, _restarted(plain[5], 2)])
    assert (twice.kind, "BARRIERS stands twice" in twice.text) == ("doubled", True)
    hole = replace(plain[5], path=reversed_path(circle(0.018j, 5e-4)))
    (extra,) = contour_changes(plain, [*plain, hole])
    assert extra.kind == "extra"


def test_a_moved_layer_and_a_reversed_contour_are_named(plain):
    """A cavity on the layer of holes, and one that runs the other way."""
    other = (*plain[:5], replace(plain[5], layer="HOLES"), *plain[6:])
    assert [c.kind for c in contour_changes(plain, other)] == ["layer"]
    other = (*plain[:5], replace(plain[5], path=reversed_path(plain[5].path)), *plain[6:])
    assert [c.kind for c in contour_changes(plain, other)] == ["reversed"]


@pytest.mark.parametrize("scale", [1.0 / 25.4, 0.999, 1.0001, 25.4])
def test_a_scaled_drawing_is_told_as_one_change(plain, leaning, scale):
    """Inches, and a scale that moves the rim by 4 um."""
    for contours in (plain, leaning):
        (change,) = contour_changes(contours, Motion(scale=scale).moved(contours))
        assert change.kind == "scaled"
        assert float(change.text.split()[-1]) == pytest.approx(scale, rel=1e-6)


def test_a_mirrored_drawing_is_told_as_one_change(plain, leaning):
    """Symmetric poles lie where they lay and run backwards; others come to lie elsewhere."""
    mirror = Motion(is_mirrored=True)
    assert [c.kind for c in contour_changes(plain, mirror.moved(plain))] == ["mirrored"]
    kinds = {c.kind for c in contour_changes(leaning, mirror.moved(leaning))}
    assert "mirrored" in kinds
    assert kinds <= {"mirrored", "reversed", "turned"}


def test_a_turned_and_a_shifted_drawing_are_told(plain):
    """Three degrees, and a tenth of a millimetre."""
    turn = contour_changes(plain, Motion(angle=math.radians(3.0)).moved(plain))
    assert [c.kind for c in turn] == ["turned"]
    assert "3.000000 degrees" in turn[0].text
    shift = contour_changes(plain, Motion(shift=1e-4 - 5e-5j).moved(plain))
    assert [c.kind for c in shift] == ["shifted"]
    assert "(0.100, -0.050) mm" in shift[0].text


def test_a_split_edge_is_no_change_and_a_dented_one_is(plain):
    """A vertex more on a line or an arc keeps the curve; one 2 um beside it does not."""
    contour = plain[4]
    for k, edge in enumerate(contour.path.edges):
        for dent, is_same in ((0.0, True), (2.0 * UM, False)):
            middle = edge.point(0.5) + 1j * dent * edge.direction(0.5)
            half = math.tan(edge.sweep / 8.0)
            halves = (Edge(edge.start, middle, half), Edge(middle, edge.end, half))
            edges = (*contour.path.edges[:k], *halves, *contour.path.edges[k + 1 :])
            other = (*plain[:4], replace(contour, path=Path(edges)), *plain[5:])
            assert (contour_changes(plain, other) == ()) is is_same


def test_distances_to_edges_by_dense_points():
    """Against the nearest of 20 001 points of each edge; their spacing bounds the difference."""
    rng = np.random.default_rng(5)
    share = np.linspace(0.0, 1.0, 20_001)
    for bulge in (0.0, 0.3, -0.9, 1.0, 3.0, -20.0):
        a, b = (complex(*rng.normal(size=2)) for _ in range(2))
        edge = Edge(a, b, bulge)
        points = rng.normal(size=40) + 1j * rng.normal(size=40)
        dense = np.array([edge.point(s) for s in share.tolist()])
        near = np.min(np.abs(points[:, None] - dense), axis=1)
        assert np.max(np.abs(distances(points, [edge]) - near)) < edge.length / 20_000


def test_curves_apart_by_a_known_distance():
    """Two circles about one point: the difference of their radii, everywhere."""
    gaps = curve_gaps(circle(0.1 + 0.2j, 1.0), circle(0.1 + 0.2j, 1.25))
    assert [gap for gap, _ in gaps] == pytest.approx([0.25] * len(gaps))
    assert cmath.isclose(gaps[0][1], 1.35 + 0.2j)
