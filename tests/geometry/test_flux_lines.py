"""Field lines as sides of barriers, against the complex potential and by direct measurement."""

import cmath
import math

import numpy as np
import pytest

from lamwright.geometry.flux_lines import disc_line, hyperbola, natural_vertex, touching

END = cmath.rect(38e-3, math.radians(24.0))
VERTEX = 29e-3


@pytest.mark.parametrize("pairs", [1, 2, 3, 5])
def test_a_disc_line_has_one_flux_and_crosses_the_potential_lines(pairs):
    """Re(z^p - sigma / z^p) is the same at every point; tangents run along the potential's slope.

    Relative rounding of powers up to 10: 1e-12.
    """
    end = cmath.rect(38e-3, math.radians(50.0 / pairs))
    line = disc_line(pairs)(0.9 * abs(end) * math.cos(math.radians(50.0)) ** (1 / pairs), end)
    sigma = line.tau * line.a ** (2 * pairs)
    for parameter in np.linspace(0.0, line.at_radius(abs(end)), 9):
        z, tangent = line.at(parameter)
        flux = (z**pairs - sigma / z**pairs).real
        assert flux == pytest.approx(line.a**pairs * (1.0 - line.tau), rel=1e-12)
        slope = pairs * (z ** (pairs - 1) + sigma / z ** (pairs + 1))  # dw/dz
        # Along the line dw is imaginary: the flux rests, the potential grows.
        assert cmath.phase(slope * tangent) == pytest.approx(0.5 * math.pi, abs=1e-10)
    assert line.at(line.at_radius(abs(end)))[0] == pytest.approx(end, rel=1e-12)


@pytest.mark.parametrize("pairs", [1, 2, 4])
def test_no_flux_enters_the_circle_that_it_runs_around(pairs):
    """The potential's radial slope vanishes on the circle of radius sigma^(1/2p), here 12 mm.

    Central differences over 1e-6 of the radius err by 1e-12 of the potential's own slope.
    """
    circle = 12e-3
    vertex = 25e-3
    tau = (circle / vertex) ** (2 * pairs)
    end = cmath.rect(38e-3, 0.0)
    u = (abs(end) / vertex) ** pairs
    angle = math.acos((1.0 - tau) / (u - tau / u)) / pairs
    line = disc_line(pairs)(vertex, cmath.rect(abs(end), angle))
    assert line.circle_radius == pytest.approx(circle, rel=1e-9)
    sigma = line.tau * line.a ** (2 * pairs)

    def potential(radius, theta):
        z = cmath.rect(radius, theta)
        return (z**pairs - sigma / z**pairs).imag

    step = 1e-6 * circle
    for theta in np.linspace(0.1, 1.5, 8) / pairs:
        slope = potential(circle + step, theta) - potential(circle - step, theta)
        there = potential(2.0 * circle + step, theta) - potential(2.0 * circle - step, theta)
        assert abs(slope) < 1e-6 * abs(there)


@pytest.mark.parametrize("pairs", [1, 2, 4])
def test_from_its_natural_vertex_a_line_runs_round_the_shaft(pairs):
    """The line through the vertex that belongs to a circle runs around that circle; to rounding."""
    end = cmath.rect(38e-3, math.radians(55.0 / pairs))
    line = disc_line(pairs)(natural_vertex(pairs, 12e-3, end), end)
    assert line.circle_radius == pytest.approx(12e-3, rel=1e-8)


def test_a_hyperbola_obeys_its_equation_and_its_asymptotes():
    """x^2/a^2 - y^2/b^2 = 1 on every point; far out it runs along its asymptotes; to rounding."""
    line = hyperbola(VERTEX, END)
    for parameter in np.linspace(0.0, line.at_radius(abs(END)), 7):
        point, _ = line.at(parameter)
        on = (point.real / line.a) ** 2 - (point.imag / line.b) ** 2
        assert on == pytest.approx(1.0, rel=1e-12)
    far, tangent = line.at(18.0)
    assert cmath.phase(far) == pytest.approx(line.asymptote, abs=1e-12)
    assert cmath.phase(tangent) == pytest.approx(line.asymptote, abs=1e-12)


def test_with_four_poles_the_natural_hyperbola_is_the_flux_line_without_shaft():
    """r^2 cos 2 theta = const has the d axes at 45 degrees for asymptotes, and sigma = 0."""
    vertex = abs(END) * math.sqrt(math.cos(2.0 * cmath.phase(END)))
    assert hyperbola(vertex, END).asymptote == pytest.approx(math.pi / 4.0, abs=1e-12)
    assert disc_line(2)(vertex, END).tau == pytest.approx(0.0, abs=1e-14)


@pytest.mark.parametrize("family", [hyperbola, disc_line(2)], ids=["hyperbola", "disc"])
@pytest.mark.parametrize("radius", [2.5e-3, -2.5e-3])
def test_a_side_touches_the_circle_of_the_end(family, radius):
    """The least distance of 20 001 points of the curve to the centre is the radius.

    Points 2e-6 m apart miss it by less than their spacing squared over the radius, 1e-9 m.
    """
    line, touch = touching(family, VERTEX + radius, END, radius)
    last = line.at_radius(1.2 * abs(END))
    gaps = [abs(line.at(t)[0] - END) for t in np.linspace(0.0, last, 20_001)]
    assert min(gaps) == pytest.approx(abs(radius), abs=1e-9)
    assert abs(touch - END) == pytest.approx(abs(radius), rel=1e-13)
    _, tangent = line.at(line.at_radius(abs(touch)))
    assert abs(((touch - END) / tangent).real) < 1e-12


@pytest.mark.parametrize(
    ("family", "vertex", "text"),
    [
        (hyperbola, 36e-3, "no further out"),
        (disc_line(2), 39e-3, "no further out"),
        (disc_line(2), 10e-3, "without a corner"),
    ],
)
def test_a_line_that_does_not_exist_is_an_error(family, vertex, text):
    """What the checks refuse cannot be drawn by mistake."""
    end = cmath.rect(38e-3, math.radians(8.0)) if vertex < 20e-3 else END
    with pytest.raises(ValueError, match=text):
        family(vertex, end)
