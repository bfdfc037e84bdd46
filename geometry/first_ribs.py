r"""Widths of the ribs of a first design, in closed form, in SI units.

Load. What hangs outside barrier k pulls along the q axis with F = rho omega^2 times the integral of
x dA over its iron, x along the q axis, per metre of stack; by Green's theorem the integral is that
of x^2/2 dy round it, taken along the exact outline.

Stress. Tangential ribs at +-e from the q axis and radial ribs on it move outward by the same u and
are built in at both ends (derived, beams). With the rib's length l, width w:

    tension N = E w (u sin e) / l,   shear V = E (w / l)^3 (u cos e),   moment M = V l / 2,
    F = 2 (N sin e + V cos e) + E u w_r / l_r,
    stress = K_t (N / w) + K_b (6 M / w^2),   of a radial rib K_r F_r / w_r.

A rib w under a round end of thickness t is w + s^2 / t thick at s beside its middle, so its length
goes with sqrt(t w). The outline is no beam: length and the factors K are fitted, see `RibLaw`.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from .curves import Edge, line, piece
from .design import BarrierDesign
from .half_barrier import half_barrier

PIECES = 24  # of each edge for the integral: error below 1e-3, far below the law's


@dataclass(frozen=True, slots=True)
class RibLaw:
    """Lengths and factors of the ribs' stress.

    Fitted to one rotor whose finite element stress is known (an arc with round ends at 18 000 rpm).
    Of 15 first designs of 40 to 300 mm bore the greatest stress was 0.7 to 1.2 times the law's
    greatest with two pole pairs and more, 1.4 and 1.7 times with one; ribs of outer barriers bear
    more than the law has, as all carriers open together. So the law sizes ribs, and the stress
    solution decides.
    """

    length: float = 1.07  # of a tangential rib, over sqrt(end thickness x rib width)
    tension: float = 1.0  # K_t
    bending: float = 1.0  # K_b
    radial: float = 1.7  # K_r


@dataclass(frozen=True, slots=True)
class RibLoad:
    """What the ribs of one barrier have to bear."""

    force: float  # N per metre of stack, along the q axis
    end: float  # mechanical angle of the tangential ribs from the q axis, rad
    end_thickness: float  # of the barrier at the ribs, m
    thickness: float  # on the q axis, where a radial rib stands, m
    hoop: float  # rho (omega R)^2, Pa: what a free ring at the rim bears


@dataclass(frozen=True, slots=True)
class RibStresses:
    """Greatest stresses in Pa; `radial` is 0 without a radial rib."""

    tangential: float
    radial: float

    @property
    def greatest(self) -> float:
        """The larger of the two."""
        return max(self.tangential, self.radial)


def rib_loads(
    barriers: Sequence[BarrierDesign],
    rotor_radius: float,
    pole_pairs: int,
    density: float,
    speed: float,
) -> tuple[RibLoad, ...]:
    """Loads of the ribs of each barrier.

    Args:
        barriers: of a pole, from the rim inward.
        rotor_radius: in m.
        pole_pairs: of the rotor.
        density: of the sheet in kg/m^3.
        speed: in rad/s.

    Raises:
        ValueError: if a barrier has no outline.
    """
    loads = []
    holes = 0.0  # of the barriers outside
    for barrier in barriers:
        half = half_barrier(barrier, rotor_radius, pole_pairs)
        end = math.radians(barrier.end_angle_deg)
        rim = 0.5 * rotor_radius**3 * (math.sin(end) - math.sin(end) ** 3 / 3.0)
        to_rim = _moment(half.to_rim)
        # Up to the ribs' thinnest place, where the sheet is thought cut.
        on_end, on_rim = half.rib
        cut = (piece(half.end[0], half.end[0].start, on_end), line(on_end, on_rim))
        thickness = 1e-3 * barrier.thickness_mm
        stated = barrier.end_thickness_mm
        loads.append(
            RibLoad(
                force=2.0 * density * speed**2 * (rim - to_rim - _moment(cut) - holes),
                end=end,
                end_thickness=thickness if stated is None else 1e-3 * stated,
                thickness=thickness,
                hoop=density * (speed * rotor_radius) ** 2,
            )
        )
        holes += to_rim + _moment(half.end) - _moment(half.to_shaft)
    return tuple(loads)


def rib_stresses(load: RibLoad, tangential: float, radial: float, law: RibLaw) -> RibStresses:
    """Greatest stresses of the ribs of one barrier.

    Args:
        load: of the barrier.
        tangential: width of each tangential rib in m.
        radial: width of the radial rib in m, 0 for none.
        law: lengths and factors.
    """
    length = law.length * math.sqrt(load.end_thickness * tangential)
    sin, cos = math.sin(load.end), math.cos(load.end)
    slender = tangential / length
    stiffness = 2.0 * (slender * sin**2 + slender**3 * cos**2)  # over E
    radial_stiffness = radial / load.thickness
    moved = load.force / (stiffness + radial_stiffness)  # E u, N/m
    pull = moved * sin / length  # N / w
    bend = 3.0 * moved * cos * tangential / length**2  # 6 M / w^2, M = V l / 2
    beside = law.tension * (pull + load.hoop) + law.bending * bend
    return RibStresses(beside, law.radial * moved / load.thickness if radial else 0.0)


@dataclass(frozen=True, slots=True)
class RibWidths:
    """Widths of the ribs of one barrier in m; `radial` is 0 without a radial rib."""

    tangential: float
    radial: float


STEP = 5e-5  # m, of the widths tried
THICKEST = 1.35  # of the least width; thicker tangential ribs blunt the ends: no source
WIDEST = 10.0  # of the least width: radial rib


def rib_widths(load: RibLoad, least: float, most_stress: float, law: RibLaw) -> RibWidths | None:
    """The ribs with least iron that bear the load; None where none of usual width does.

    Tangential ribs alone as long as they stay within `THICKEST` of the least width, else a radial
    rib on the q axis besides.

    Args:
        load: of the barrier.
        least: width of any rib in m.
        most_stress: that they may reach, in Pa.
        law: of their stress.
    """
    count = round((THICKEST - 1.0) * least / STEP)
    sides = [least + k * STEP for k in range(count + 1)]
    for side in sides:
        if rib_stresses(load, side, 0.0, law).greatest <= most_stress:
            return RibWidths(side, 0.0)
    found: RibWidths | None = None
    for side in sides:
        for k in range(round((WIDEST - 1.0) * least / STEP) + 1):
            middle = least + k * STEP
            if found is not None and 2.0 * side + middle >= 2.0 * found.tangential + found.radial:
                break
            if rib_stresses(load, side, middle, law).greatest <= most_stress:
                found = RibWidths(side, middle)
                break
    return found


def _moment(edges: Sequence[Edge]) -> float:
    """Integral of x^2/2 dy along edges from the q axis outward, in m^3."""
    points = [edges[0].start]
    for edge in edges:
        points += [edge.point((k + 1) / PIECES) for k in range(PIECES)]
    total = 0.0
    for a, b in pairwise(points):
        x2 = (a.real**2 + a.real * b.real + b.real**2) / 3.0
        total += 0.5 * x2 * (b.imag - a.imag)
    return total
