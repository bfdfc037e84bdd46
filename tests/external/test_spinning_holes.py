"""Spinning discs with a ring of holes.

Source: check values C9: finite elements of order 5 on curved elements, full circle, two meshes
agree to the digits given; E 210 GPa, nu 0.3, rho 7650 kg/m^3, 18 000 rpm. Solved here as one
sector with coupled sides, the hole in its middle. Tolerance 1 % on stress, 0.1 % on growth as
stated there.
"""

import cmath
import math

import pytest

from lamwright.geometry.curves import Path, arc, turned
from lamwright.geometry.section import Region
from tests.plates import MPA, fine_arcs, round_hole, sector, spun


@pytest.mark.parametrize(
    ("rim", "bore", "count", "ring", "hole", "inner", "outer", "at_bore", "growth"),
    [
        (50, 15, 4, 32, 5, 92.337, 72.51, 62.02, 4.04766),
        (50, 15, 8, 32, 5, 79.462, 65.55, 61.40, 4.63402),
        (50, 0, 4, 30, 6, 51.443, 47.450, 28.381, 3.18582),
        (50, 10, 8, 40, 4, 52.200, 47.564, 56.59, 3.35114),
    ],
)
def test_ring_of_holes(rim, bore, count, ring, hole, inner, outer, at_bore, growth):
    """Hoop at the hole's inner and outer point and at the bore or centre, growth of the rim.

    The largest stress at the hole is that of its inner point in all four.
    """
    angle = 2.0 * math.pi / count
    ray = cmath.exp(0.5j * angle)
    rim, bore, ring, hole = (1e-3 * value for value in (rim, bore, ring, hole))
    # The half circles of the hole meet on its ray, and the rim has a node there.
    path = round_hole(complex(ring), hole)
    region = sector(bore, rim, angle, [turned(path, cmath.phase(ray))])
    field = spun(_split(region, ray), angle, fine_arcs(hole / 12.0, 2.5e-3, max(hole, bore)))
    centre = ring * ray
    found = [field.polar((ring + side * hole) * ray, centre)[1] / MPA for side in (-1, 1)]
    assert found == pytest.approx([inner, outer], rel=1e-2)
    assert found[0] > found[1]
    assert field.polar(bore * ray)[1] / MPA == pytest.approx(at_bore, rel=1e-2)
    assert field.outward(rim * ray) * 1e6 == pytest.approx(growth, rel=1e-3)


def _split(region: Region, ray: complex) -> Region:
    """The region with its arcs about the origin split on the ray, so that nodes lie there."""
    edges = []
    for edge in region.outer.edges:
        if edge.is_line:
            edges.append(edge)
        else:
            middle, ccw = edge.radius * ray, edge.bulge > 0.0
            edges += [arc(edge.start, middle, 0j, ccw=ccw), arc(middle, edge.end, 0j, ccw=ccw)]
    return Region(region.name, region.material, Path(tuple(edges)), region.holes)
