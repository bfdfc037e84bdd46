"""The cross-section: named regions of one pole, bounded by exact lines and arcs.

Both parts cover one pole, the sector from angle 0 to pi / pole_pairs, in metres, points as
complex numbers x + iy about the shaft axis. The rotor's frame has its d axis along angle 0 and
the q axis at pi / (2 pole_pairs); the stator's frame has the middle of a tooth at angle 0.
The two parts meet on the turning circle in the middle of the air gap.

Regions tile their sector without overlap: two regions that touch have the same edge (start, end
and bulge, possibly reversed) in their paths, so a mesher needs no boolean operation.
"""

from dataclasses import dataclass
from typing import Literal

from .curves import Path, Point

Material = Literal["rotor_steel", "stator_steel", "air", "copper", "shaft", "magnet"]


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


@dataclass(frozen=True, slots=True)
class CrossSection:
    """One pole of rotor and stator, ready for meshing, drawing and DXF (SI units).

    Region names. Rotor: `rotor_iron`, `barrier_<k>` or, where radial ribs cut barrier k into
    cavities, `barrier_<k>_<letter>`; `magnet_<k>` or, for a pair, `magnet_<k>_<letter>`, each a
    hole of its cavity; `shaft` (inside the bore); `gap_rotor` (rim to turning circle). Stator:
    `gap_stator` (turning circle to bore), `opening_<s>` and `wedge_<s>` (air between bore and
    copper), `slot_<s>_layer_<l>` (copper; layer 0 at the slot bottom), `stator_iron`.
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

    @property
    def gap(self) -> float:
        """Radial air gap in m."""
        return self.stator_bore_radius - self.rotor_radius

    @property
    def circle_radius(self) -> float:
        """Radius of the turning circle, the middle of the gap, in m."""
        return 0.5 * (self.stator_bore_radius + self.rotor_radius)
