"""A supplier's outline held against the design: recognised, laid on it, ribs measured."""

import cmath
import math
import warnings
from pathlib import Path

import numpy as np
import pytest
from draughting import add_edge, mirrored
from supplier_forms import FORMS, drawing_of, edges_mm, write_traced

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge
from lamwright.geometry.design_file import read_design
from lamwright.geometry.errors import OutlineError
from lamwright.geometry.outline_edges import difference
from lamwright.geometry.supplier_fit import fitted_contour
from lamwright.geometry.supplier_outline import supplier_outline
from lamwright.geometry.supplier_samples import samples_of

DESIGNS = Path(__file__).parent.parent.parent / "designs"
UM = 1e-6  # m
RIB_TOL = 3e-6  # m, as issued


def section_of(name="demo_24s4p_arc"):
    return cross_section(read_design(DESIGNS / f"{name}.toml"))


def saved(drawing, folder):
    path = folder / "back.dxf"
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # of the library that writes, about its own versions
        drawing.saveas(path)
    return path


def edges_of(section):
    regions = (*section.rotor, *section.stator)
    return [e for r in regions for path in (r.outer, *r.holes) for e in path.edges]


QUICK = ("splines",)


@pytest.mark.parametrize(
    "form", [f if f in QUICK else pytest.param(f, marks=pytest.mark.slow) for f in FORMS]
)
def test_ten_forms_are_the_design(form, tmp_path):
    """Every rib of every pole within 3 um, every edge of the section likewise.

    But for gaps: each edge is drawn up to 2.5 um off, so a rib's sides up to 5 um together, and
    half as much again for the fit that reconciles them.
    """
    section = section_of()
    found = supplier_outline(section, saved(FORMS[form](section), tmp_path))
    tolerance = 7.5 * UM if form == "gaps" else RIB_TOL
    assert len(found.ribs) == 6 * section.poles
    assert max(abs(rib.difference) for rib in found.ribs) < tolerance
    assert difference(edges_of(found.section), edges_of(section))[0] < tolerance
    assert found.copies == (4 if form == "one_pole" else 1)
    assert found.strays == ()


@pytest.mark.parametrize("kind", ["polyline", pytest.param("spline", marks=pytest.mark.slow)])
def test_noise_of_ten_micrometres_leaves_ribs_to_three(kind, tmp_path):
    """2 000 points a contour, each up to 10 um off along x and y (uniform).

    The error of a rib is 1 um by the fit's own account (standard), 24 ribs are measured.
    """
    section = section_of()
    path = tmp_path / "back.dxf"
    write_traced(section, path, kind)
    found = supplier_outline(section, path)
    assert max(abs(rib.difference) for rib in found.ribs) < RIB_TOL
    assert math.degrees(found.alignment.angle) == pytest.approx(8.0, abs=1e-3)
    assert abs(found.alignment.axis - (0.025 - 0.010j)) < 1.0 * UM
    assert 4.0 * UM < found.noise < 7.0 * UM  # 10 / sqrt(3)


def test_standard_errors_are_true():
    """Errors of a barrier's fit over its own standard errors, 40 noises: mean square near 1.

    40 independent squares scatter by 0.22; normal noise of 10 um.
    """
    contour = lamination_contours(section_of())[2].path.edges
    whole = np.concatenate([[e.point((k + 0.5) / 500) for k in range(500)] for e in contour])
    ratios = []
    for seed in range(40):
        rng = np.random.default_rng(seed)
        noise = rng.standard_normal(whole.size) + 1j * rng.standard_normal(whole.size)
        points = whole + 10.0 * UM * noise
        chords = [
            Edge(complex(a), complex(b)) for a, b in zip(points, np.roll(points, -1), strict=True)
        ]
        fit = fitted_contour(contour, samples_of(chords, 1e-3), 5e-4)
        cap = min(range(len(contour)), key=lambda k: contour[k].radius)
        off = fit.edges[cap].point(0.5) - contour[cap].point(0.5)
        across = (off * (1j * contour[cap].direction(0.5)).conjugate()).real
        ratios.append(across / fit.standard_error(cap, 0.5))
    assert 0.5 < np.mean(np.square(ratios)) < 1.6


def test_a_moved_barrier_and_a_worn_rim_are_measured(tmp_path):
    """One barrier of pole 3 moved outward by 40 um, its ribs are thinner by that (small angles)."""
    section = section_of()
    drawing = drawing_of([])
    for number, contour in enumerate(lamination_contours(section)):
        shift = 0j
        if number == 2 + 2 * 3:  # contours: rim, bore, then three barriers a pole
            middle = sum(e.start for e in contour.path.edges)
            shift = 40e-3 * middle / abs(middle)
        for e in contour.path.edges:
            add_edge(
                drawing.modelspace(), Edge(1e3 * e.start + shift, 1e3 * e.end + shift, e.bulge)
            )
    found = supplier_outline(section, saved(drawing, tmp_path))
    changed = [rib for rib in found.ribs if abs(rib.difference) > 1.0 * UM]
    assert {rib.pole for rib in changed} == {3}
    assert len(changed) == 2
    for rib in changed:
        outward = cmath.phase(rib.start) - 2.5 * section.pole_angle
        expected = -40.0 * UM * math.cos(outward % (2.0 * math.pi))
        assert rib.difference == pytest.approx(expected, abs=1.0 * UM)
    assert found.poles_analysed == (3,)
    assert abs(found.worst[0].deviation) == pytest.approx(40.0 * UM, abs=1.0 * UM)
    assert found.worst[0].text.startswith("pole 3, ")


@pytest.mark.parametrize("change", [15.0 * UM, pytest.param(-150.0 * UM, marks=pytest.mark.slow)])
def test_another_rim_is_another_gap(change, tmp_path):
    """Rim out or in all round: the section's rotor has that radius, and the parts still meet."""
    section = section_of()
    share = 1.0 + change / section.rotor_radius
    edges = [
        Edge(e.start * share, e.end * share, e.bulge) if abs(abs(e.start) - 40.6) < 1e-6 else e
        for e in edges_mm(section)
    ]
    found = supplier_outline(section, saved(drawing_of(edges), tmp_path))
    assert found.section.rotor_radius == pytest.approx(0.0406 + change, abs=0.1 * UM)
    assert found.rim is not None
    assert found.rim.radius - found.rim.designed == pytest.approx(change, abs=0.1 * UM)
    assert all(r.difference == pytest.approx(change, abs=0.1 * UM) for r in found.ribs)
    radii = [
        {round(abs(p), 12) for r in part for e in r.outer.edges for p in (e.start, e.end)}
        for part in (found.section.rotor, found.section.stator)
    ]
    assert round(found.section.circle_radius, 12) in radii[0] & radii[1]


def refused(drawing, folder, text, name="demo_24s4p_arc", **options):
    with pytest.raises(OutlineError, match=text) as caught:
        supplier_outline(section_of(name), saved(drawing, folder), **options)
    assert "\n" not in str(caught.value)


def test_what_is_not_the_design_is_refused_in_one_line(tmp_path):
    """A barrier missing, a hole more, another size, wrong unit, another design."""
    section = section_of()
    edges = edges_mm(section)
    contours = lamination_contours(section)
    barrier = {1e3 * e.start for e in contours[5].path.edges}
    few = [e for e in edges if e.start not in barrier]
    refused(drawing_of(few), tmp_path, "of the design's outline are not drawn, first at pole 2")
    more = drawing_of(edges)
    more.modelspace().add_circle((18.0, 0.0), 1.0)
    refused(more, tmp_path, "something is drawn in the steel at .* where the design has nothing")
    half = [Edge(0.9 * e.start, 0.9 * e.end, e.bulge) for e in edges]
    refused(drawing_of(half), tmp_path, "design's outline are not drawn|no circle of the design")
    refused(drawing_of(edges, 1), tmp_path, r"2062 x 2062 mm .* --outline-unit-mm 1 if")
    refused(drawing_of(edges_mm(section_of("demo_36s6p_arc"))), tmp_path, "144 x 144 mm")


def test_a_mirror_image_is_refused_where_it_can_be_told(tmp_path):
    """The design with unlike halves."""
    edges = [mirrored(e) for e in edges_mm(section_of("gallery/lift_27s6p"))]
    refused(drawing_of(edges), tmp_path, "mirror image", "gallery/lift_27s6p")


@pytest.mark.slow
def test_of_its_own_mirror_image_either_side_is_told(tmp_path):
    """The demo's."""
    section = section_of()
    found = supplier_outline(
        section, saved(drawing_of([mirrored(e) for e in edges_mm(section)]), tmp_path)
    )
    assert found.alignment.is_either
