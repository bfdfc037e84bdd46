"""A rim cut into arcs is one circle unless its points deny it; an even rib has its mean width."""

import cmath
import math
from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge
from lamwright.geometry.design_file import read_design
from lamwright.geometry.supplier_circle import as_circle
from lamwright.geometry.supplier_fit import fitted_contour
from lamwright.geometry.supplier_ideal import ideal_outline
from lamwright.geometry.supplier_ribs import measured_ribs
from lamwright.geometry.supplier_samples import Samples

DESIGNS = Path(__file__).parent.parent.parent / "designs"
UM = 1e-6  # m
COUNT = 2000


def noisy(points, seed):
    rng = np.random.default_rng(seed)
    noise = rng.uniform(-1, 1, points.size) + 1j * rng.uniform(-1, 1, points.size)
    return Samples(points + 10.0 * UM * noise, np.zeros(points.size, dtype=bool), 1e-4)


def fitted(designed, samples):
    fit = fitted_contour(designed, samples, 5e-4)
    return fit, as_circle(designed, fit, samples)


@pytest.mark.parametrize("number", [0, 1])
def test_one_circle_is_surer_than_its_arcs(number):
    """Of 20 noises: errors as told, s sqrt(1 + 2) / sqrt(n) at a place, and far below the arcs'.

    The noise is told by the median, of even noise up to 1.28 times too large.
    """
    designed = (
        ideal_outline(cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml")))
        .contours[number]
        .path.edges
    )
    radius = abs(designed[0].start)
    at = radius * np.exp(2j * math.pi * (np.arange(COUNT) + 0.5) / COUNT)
    ratios, arcs = [], []
    for seed in range(20):
        fit, whole = fitted(designed, noisy(at, seed))
        assert whole is not fit
        error = whole.standard_error(3, 0.0)
        assert 0.95 < error / (10.0 * UM / math.sqrt(3.0) * math.sqrt(3.0 / COUNT)) < 1.3
        ratios.append((abs(whole.edges[3].start) - radius) / error)
        arcs.append(fit.standard_error(3, 0.0))
    assert 0.3 < np.mean(np.square(ratios)) < 1.6
    assert min(arcs) > 2.0 * error


def test_an_oval_rim_stays_oval():
    """Of 15 um along x and y: ten times what the arcs' noise leaves unknown."""
    designed = (
        ideal_outline(cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml")))
        .contours[0]
        .path.edges
    )
    angle = 2.0 * math.pi * (np.arange(COUNT) + 0.5) / COUNT
    at = (abs(designed[0].start) + 15.0 * UM * np.cos(2.0 * angle)) * np.exp(1j * angle)
    fit, whole = fitted(designed, noisy(at, 1))
    assert whole is fit


def test_a_taper_that_shows_is_measured_at_its_thin_end():
    """A radial rib's sides exact: even, its width; tilted by 20 um, the least of it."""
    ideal = ideal_outline(cross_section(read_design(DESIGNS / "demo_36s4p_straight.toml")))
    exact = [fitted_contour(c.path.edges, _on(c.path.edges), 5e-4) for c in ideal.contours]
    ribs = {(rib.pole, rib.name): rib for rib in measured_ribs(ideal, exact)}
    radial = next(rib for rib in ribs.values() if rib.name.startswith("radial") and rib.pole == 1)
    assert radial.difference == pytest.approx(0.0, abs=1e-9)
    contour = min(
        range(len(ideal.contours)),
        key=lambda c: min(abs(e.point(0.5) - radial.start) for e in ideal.contours[c].path.edges),
    )
    edges = ideal.contours[contour].path.edges
    middle = sum(e.start for e in edges) / len(edges)
    turn = cmath.exp(1j * 2e-3)  # of the whole cavity about its middle
    turned = [
        Edge(middle + turn * (e.start - middle), middle + turn * (e.end - middle), e.bulge)
        for e in edges
    ]
    exact[contour] = fitted_contour(edges, _on(turned), 5e-4)
    found = next(
        rib for rib in measured_ribs(ideal, exact) if (rib.pole, rib.name) == (1, radial.name)
    )
    gaps = [abs(found.end - found.start), found.width]
    assert gaps[0] == pytest.approx(gaps[1], abs=1e-12)
    assert abs(found.start - radial.start) > 0.2e-3  # no longer at the middle


def _on(edges):
    points = np.array([e.point((k + 0.5) / 60) for e in edges for k in range(60)])
    return Samples(points, np.zeros(points.size, dtype=bool), 1e-4)
