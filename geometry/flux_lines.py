"""Sides of barriers along field lines: hyperbolas about the shaft axis, and a disc's flux lines.

All is written in the q axis's frame (shaft axis at 0, q axis along +x), for the upper half; every
curve starts at its vertex on the q axis, at a right angle to it. p is the number of pole pairs.

Hyperbola: x = a cosh s, y = b sinh s. Its asymptotes pass through the shaft axis at the angle
atan(b / a) to the q axis. Where that is half the pole pitch, 90 deg / p, they are the d axes of
the pole; a vertex closer to the rim makes them close up, one further from it spreads them.
With four poles and asymptotes on the d axes, b = a, it is the field line r^2 cos 2 theta = const
of a rotor without shaft.

Flux line of a solid disc: iron of infinite permeability magnetised along the d axes by a
sinusoidal potential carries the field w(z) = z^p - sigma / z^p, z = x + iy. Its real part, the
flux, is constant on the lines
    (r^p - sigma / r^p) cos p theta = const,
straight d axes and a circle of radius sigma^(1/2p) among them: the flux runs around that circle.
Its imaginary part, the potential (r^p + sigma / r^p) sin p theta, has the radial slope
p (r^p - sigma / r^p) sin(p theta) / r, zero on the circle: no flux enters. Where the circle is the
shaft, the line is that of the solid rotor with its shaft; sigma = 0 is the rotor without shaft,
negative sigma one whose middle draws the flux in. With u = (r / a)^p, a the vertex and
tau = sigma / a^(2p),
    (u - tau / u) cos p theta = 1 - tau,   -1 < tau < 1.

A barrier states the vertex (`depth_mm`, `thickness_mm`) and the end; b or sigma follow, in closed
form for a curve through a point. A side has to touch the circle of radius half the end's thickness
about the end's centre: the direction of the point of contact is found by secants.

Source: derived (complex potential of a multipole and its image in a circle).
"""

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

from .curves import Point

MOST_STEPS = 40
DIRECTION_TOL = 1e-14  # rad; a half circle of 10 mm radius then errs by 1e-16 m


class FieldLine(Protocol):
    """A curve from its vertex on the q axis outward, run through by a growing parameter."""

    def at(self, parameter: float) -> tuple[Point, complex]:
        """Point in m and unit tangent; the vertex has parameter 0."""

    def normal(self, point: Point) -> complex:
        """Unit normal towards the rim at a point on the curve."""

    def at_radius(self, radius: float) -> float:
        """Parameter where the curve lies at `radius` m from the shaft axis."""


Family = Callable[[float, Point], FieldLine]  # vertex on the q axis and a point to pass through


@dataclass(frozen=True, slots=True)
class Hyperbola:
    """The branch x = a cosh s, y = b sinh s."""

    a: float  # m
    b: float  # m

    @property
    def asymptote(self) -> float:
        """Angle of the asymptotes to the q axis in rad."""
        return math.atan2(self.b, self.a)

    def at(self, parameter: float) -> tuple[Point, complex]:
        """Point and unit tangent at s."""
        c, s = math.cosh(parameter), math.sinh(parameter)
        tangent = complex(self.a * s, self.b * c)
        return complex(self.a * c, self.b * s), tangent / abs(tangent)

    def normal(self, point: Point) -> complex:
        """Unit normal towards the rim: the gradient of x^2/a^2 - y^2/b^2."""
        gradient = complex(point.real / self.a**2, -point.imag / self.b**2)
        return gradient / abs(gradient)

    def at_radius(self, radius: float) -> float:
        """Parameter s from r^2 = a^2 + (a^2 + b^2) sinh^2 s."""
        along = (radius - self.a) * (radius + self.a)
        return math.asinh(math.sqrt(along / (self.a**2 + self.b**2)))


@dataclass(frozen=True, slots=True)
class DiscLine:
    """The flux line (u - tau / u) cos p theta = 1 - tau with u = (r / a)^p.

    Its parameter is the potential s = (u + tau / u) sin p theta: with v = (z / a)^p the line is
    v - tau / v = 1 - tau + i s, which is solved for v.
    """

    a: float  # m
    tau: float
    pole_pairs: int

    @property
    def circle_radius(self) -> float:
        """Radius in m of the circle that the flux runs around; negative where it is drawn in."""
        size: float = abs(self.tau) ** (0.5 / self.pole_pairs)
        return math.copysign(self.a * size, self.tau)

    def at(self, parameter: float) -> tuple[Point, complex]:
        """Point and unit tangent at s."""
        level = complex(1.0 - self.tau, parameter)
        v = 0.5 * (level + cmath.sqrt(level**2 + 4.0 * self.tau))
        u, theta = abs(v), cmath.phase(v) / self.pole_pairs
        point = cmath.rect(self.a * u ** (1.0 / self.pole_pairs), theta)
        return point, 1j * self._normal(u, theta)

    def normal(self, point: Point) -> complex:
        """Unit normal towards the rim: the gradient of the flux function."""
        return self._normal((abs(point) / self.a) ** self.pole_pairs, cmath.phase(point))

    def at_radius(self, radius: float) -> float:
        """Parameter from cos p theta = (1 - tau) / (u - tau / u)."""
        u = (radius / self.a) ** self.pole_pairs
        cosine = (1.0 - self.tau) / (u - self.tau / u)
        return (u + self.tau / u) * math.sqrt((1.0 - cosine) * (1.0 + cosine))

    def _normal(self, u: float, theta: float) -> complex:
        angle = self.pole_pairs * theta
        radial = (u + self.tau / u) * math.cos(angle)
        across = -(u - self.tau / u) * math.sin(angle)
        gradient = complex(radial, across)
        return gradient / abs(gradient) * cmath.exp(1j * theta)


def hyperbola(vertex: float, point: Point) -> Hyperbola:
    """The hyperbola about the shaft axis with its vertex on the q axis through a point.

    Raises:
        ValueError: if the point lies no further out along the q axis than the vertex.
    """
    if point.real <= vertex or point.imag <= 0.0:
        raise ValueError("the end lies no further out than the vertex of its side")
    # b^2 = y^2 / (x^2 / a^2 - 1)
    ahead = math.sqrt((point.real - vertex) * (point.real + vertex))
    return Hyperbola(vertex, point.imag * vertex / ahead)


def disc_line(pole_pairs: int) -> Family:
    """The family of a disc's flux lines for a number of pole pairs."""

    def through(vertex: float, point: Point) -> DiscLine:
        u, angle = (abs(point) / vertex) ** pole_pairs, pole_pairs * cmath.phase(point)
        c = math.cos(angle)
        if not 0.0 < angle < 0.5 * math.pi or u <= 1.0:
            raise ValueError("the end lies no further out than the vertex of its side")
        if c * (u + 1.0 / u) >= 2.0:
            raise ValueError("no flux line without a corner runs from the vertex to the end")
        # u c - tau c / u = 1 - tau
        return DiscLine(vertex, (1.0 - u * c) / (1.0 - c / u), pole_pairs)

    return through


def natural_vertex(pole_pairs: int, circle_radius: float, point: Point) -> float:
    """Where the flux line through a point crosses the q axis, in m from the shaft axis.

    Args:
        pole_pairs: of the rotor.
        circle_radius: of the circle that the flux runs around in m: the shaft's, or 0.
        point: in m, between q and d axis.
    """
    r, theta = abs(point), cmath.phase(point)
    sigma = circle_radius ** (2 * pole_pairs)
    level = (r**pole_pairs - sigma / r**pole_pairs) * math.cos(pole_pairs * theta)
    # a^p - sigma / a^p = level
    power = 0.5 * (level + math.sqrt(level**2 + 4.0 * sigma))
    vertex: float = power ** (1.0 / pole_pairs)
    return vertex


def touching(
    family: Family, vertex: float, centre: Point, radius: float
) -> tuple[FieldLine, Point]:
    """The curve of a family from a vertex that touches a circle, and where.

    Args:
        family: one curve for each vertex and point.
        vertex: distance from the shaft axis in m.
        centre: of the circle, in m.
        radius: signed: positive where the circle lies on the shaft's side of the curve.

    Raises:
        ValueError: if there is none.
    """

    def off(direction: float) -> float:
        """Angle from the circle's ray to the normal of the curve through its end."""
        point = centre + cmath.rect(radius, direction)
        return cmath.phase(family(vertex, point).normal(point) * cmath.rect(1.0, -direction))

    before = cmath.phase(family(vertex, centre).normal(centre))
    gap_before = off(before)
    now = before + gap_before  # the normal hardly changes along the circle
    for _ in range(MOST_STEPS):
        gap = off(now)
        if abs(gap) <= DIRECTION_TOL or gap == gap_before:
            break
        before, gap_before, now = now, gap, now - gap * (now - before) / (gap - gap_before)
    if abs(off(now)) > 10.0 * DIRECTION_TOL:
        raise ValueError("no side touches the end")
    point = centre + cmath.rect(radius, now)
    return family(vertex, point), point
