"""What the reader of a verdict on a rotor with rivets or keys should be wary of."""

import cmath
import math
from collections.abc import Iterator

from lamwright.geometry.curves import area
from lamwright.geometry.design import SteelCard
from lamwright.geometry.section import CrossSection, Region

MPA = 1e6  # Pa


def detail_cautions(section: CrossSection, card: SteelCard, speed: float) -> tuple[str, ...]:
    """All cautions about rivets and keys, one line each.

    Args:
        section: the machine.
        card: the rotor's steel; rivets are taken to be as heavy.
        speed: overspeed in rad/s.
    """
    return (*_of_rivets(section, card.density_kg_per_m3.value, speed), *_of_keys(section))


def _of_rivets(section: CrossSection, density: float, speed: float) -> Iterator[str]:
    rivets = [region for region in section.rotor if region.material == "rivet"]
    if rivets:
        most = max(rivet_pressure(rivet, density, speed) for rivet in rivets) / MPA
        yield (
            "the load of the rivets is not in the stress, nor what they hold: as heavy as the"
            f" sheet, they press on their holes by up to about {most:.2g} MPa at overspeed"
        )


def _of_keys(section: CrossSection) -> Iterator[str]:
    if any(region.material == "key" for region in section.rotor):
        yield "neither the keys' own load nor the torque that they carry is in the stress"


def rivet_pressure(rivet: Region, density: float, speed: float) -> float:
    """Mean pressure in Pa of a loose rivet on its hole, over the hole's width.

    p = rho A r omega^2 / w, derived: centrifugal load of the rivet over its projected width.

    Args:
        rivet: its region, or the half of it beside a side of the sector.
        density: in kg/m3.
        speed: in rad/s.
    """
    points = [edge.point(share) for edge in rivet.outer.edges for share in (0.0, 0.5)]
    turns = [cmath.phase(point / points[0]) for point in points]
    along = points[0] * cmath.exp(0.5j * (min(turns) + max(turns)))
    for edge in rivet.outer.edges:
        if edge.is_line:  # half a rivet: the side is its middle line
            along = edge.point(0.5)
    across = [(point / along).imag * abs(along) for point in points]
    reach = 0.5 * (min(map(abs, points)) + max(map(abs, points)))
    load = density * area(rivet.outer) * reach * speed**2  # N per m of stack
    width = max(across) - min(across)
    return load / width if width > 0.0 else math.inf
