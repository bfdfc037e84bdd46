"""The cross-section: named regions of a sector of whole poles, bounded by exact lines and arcs.

Both parts cover the sector from angle 0 to sector_poles * pi / pole_pairs, one pole where the
winding allows it, the whole circle at the most, in metres, points as complex numbers x + iy about
the shaft axis. The rotor's frame has its d axis along angle 0 and the q axis at
pi / (2 pole_pairs); the stator's frame has the middle of a tooth at angle 0. The two parts meet on
the turning circle in the middle of the air gap.

Regions tile their sector without overlap: two regions that touch have the same edge (start, end
and bulge, possibly reversed; to rounding of a turn) in their paths, so a mesher needs no boolean
operation. The rotor is cut at the sides of every pole. Of a whole circle, both sides are the same
line.
"""

import math
import re
from dataclasses import dataclass, replace
from typing import Literal

from .curves import Path, Point

Material = Literal[
    "rotor_steel", "stator_steel", "air", "copper", "shaft", "magnet", "rivet", "key"
]


@dataclass(frozen=True, slots=True)
class Region:
    """An area of one material: a counter-clockwise outer path and clockwise holes.

    `magnetisation` is the unit vector along a magnet's remanence, x + iy, and 0 for all else; it
    turns with the region, and changes sign from pole to pole.
    """

    name: str
    material: Material
    outer: Path
    holes: tuple[Path, ...] = ()
    magnetisation: complex = 0j
    # Of materials that are neither steel sheet nor shaft.
    relative_permeability: float = 1.0


@dataclass(frozen=True, slots=True)
class Rib:
    """A bridge of rotor steel at its thinnest place, between points `start` and `end` (m).

    `barrier` counts from 1 at the rim inward, as in the design file; `name` is unique.
    """

    name: str
    kind: Literal["tangential", "radial"]
    barrier: int
    start: Point
    end: Point

    @property
    def width(self) -> float:
        """Least width in m."""
        return abs(self.end - self.start)


_POLE_PREFIX = re.compile(r"p\d+_")


def pole_name(name: str, pole: int) -> str:
    """Name of a region or rib of the sector's pole number `pole`, from 1; the first has none."""
    return name if pole == 1 else f"p{pole}_{name}"


def base_name(name: str) -> str:
    """The name without its pole."""
    return _POLE_PREFIX.sub("", name, count=1) if _POLE_PREFIX.match(name) else name


def pole_of(name: str) -> int:
    """The pole, from 1, that a rotor's region or rib belongs to."""
    found = _POLE_PREFIX.match(name)
    return int(found.group()[1:-1]) if found else 1


@dataclass(frozen=True, slots=True)
class CrossSection:
    """A sector of rotor and stator, ready for meshing, drawing and DXF (SI units).

    Region names. Rotor: `rotor_iron`, `barrier_<k>` or, where radial ribs cut barrier k into
    cavities, `barrier_<k>_<letter>`; `magnet_<k>` or, for a pair, `magnet_<k>_<letter>`, each a
    hole of its cavity; `notch_<k>`, `hole_<k>` and `key_<k>`, with `_right` and `_left` where
    there are two in a pole or halves beside its sides; `shaft` (inside the bore); `gap_rotor`
    (rim to turning circle) and, where the rim is no circle, `rim_air` between the two; from the
    second pole on with `p<pole>_` before them, ribs likewise. Stator: `gap_stator` (turning circle
    to bore), `opening_<s>` and `wedge_<s>` (air between bore and copper), `slot_<s>_layer_<l>`
    (copper; layer 0 at the slot bottom, of tooth coils the clockwise half of the slot),
    `stator_iron`.
    """

    pole_pairs: int
    stack_length: float
    rotor_radius: float
    shaft_radius: float
    stator_bore_radius: float
    stator_outer_radius: float
    slots: int
    rotor: tuple[Region, ...]
    stator: tuple[Region, ...]
    ribs: tuple[Rib, ...]
    sector_poles: int = 1  # that the regions cover
    rotor_period: int = 1  # poles after which the rotor repeats; sector_poles is a multiple
    ring_radius: float | None = None  # inner circle of `gap_rotor` where the rim is no circle
    bridge: float = 0.0  # iron between the bore and closed slots, m; 0 where slots have mouths

    @property
    def poles(self) -> int:
        """Poles of the machine."""
        return 2 * self.pole_pairs

    @property
    def pole_angle(self) -> float:
        """Angle of one pole in rad."""
        return math.pi / self.pole_pairs

    @property
    def sector_angle(self) -> float:
        """Angle of the sector in rad."""
        return self.sector_poles * math.pi / self.pole_pairs

    @property
    def sectors(self) -> int:
        """Sectors of the whole machine."""
        return self.poles // self.sector_poles

    @property
    def is_full_circle(self) -> bool:
        """Whether the sector is the whole machine, whose two sides are one line."""
        return self.sectors == 1

    @property
    def sector_slots(self) -> int:
        """Slots of the sector."""
        return self.slots * self.sector_poles // self.poles

    @property
    def gap(self) -> float:
        """Radial air gap in m."""
        return self.stator_bore_radius - self.rotor_radius

    @property
    def gap_ring_radius(self) -> float:
        """Radius in m of the inner circle of `gap_rotor`: the rotor's own if that is round."""
        return self.rotor_radius if self.ring_radius is None else self.ring_radius

    @property
    def circle_radius(self) -> float:
        """Radius of the turning circle, the middle of the ring of even thickness, in m."""
        return 0.5 * (self.stator_bore_radius + self.gap_ring_radius)


def rotor_cell(section: CrossSection) -> CrossSection:
    """The smallest sector of the rotor alone, its own period; the stator's regions are left out.

    A section whose sector is the rotor's period is returned as it is.
    """
    period = section.rotor_period
    if section.sector_poles == period:
        return section
    return replace(
        section,
        rotor=tuple(r for r in section.rotor if pole_of(r.name) <= period),
        stator=(),
        ribs=tuple(r for r in section.ribs if pole_of(r.name) <= period),
        sector_poles=period,
    )


def rotor_iron(section: CrossSection) -> tuple[Region, ...]:
    """The iron of the sector's poles, one region a pole."""
    return tuple(r for r in section.rotor if base_name(r.name) == "rotor_iron")
