"""Whether a rotor is its own mirror image in the q axis of its first pole.

Compared are the circles and straight lines that its outlines lie on, not where these are cut: a
circle by its centre and radius, a line by its foot as seen from the shaft axis. Sides of the
sector, lines through the axis, count for nothing.
"""

import cmath
import math

import numpy as np

from .curves import Edge
from .section import CrossSection

SAME = 1e-7  # m, far below a punch's 1e-5


def is_mirrored(section: CrossSection) -> bool:
    """Whether the rotor's outlines mirror in the first pole's q axis.

    Then coenergy is even in i_d, since the mirrored field is the field with i_d reversed; without
    magnets also in i_q, as steel has no sign. Source: derived.
    """
    edges = [
        edge
        for region in section.rotor
        for path in (region.outer, *region.holes)
        for edge in path.edges
    ]
    supports = [_support(edge) for edge in edges]
    q_axis = cmath.exp(0.5j * section.pole_angle)
    own = [_place(section, at, radius) for at, radius in supports]
    image = [_place(section, (at / q_axis).conjugate() * q_axis, radius) for at, radius in supports]
    distances = np.linalg.norm(np.array(own)[:, None] - np.array(image), axis=-1)
    return bool(np.all(distances.min(axis=1) <= SAME))


def _support(edge: Edge) -> tuple[complex, float]:
    """Centre and radius of an arc; foot of a line, and 0."""
    if not edge.is_line:
        return edge.centre, edge.radius
    along = edge.direction(0.0)
    foot = edge.start - along * (edge.start / along).real
    return foot, 0.0


def _place(section: CrossSection, at: complex, radius: float) -> tuple[float, float, float]:
    """Where a support is, alike for those that are a turn by a sector apart."""
    folded = cmath.rect(abs(at), cmath.phase(at) * 2.0 * math.pi / section.sector_angle)
    return folded.real, folded.imag, radius
