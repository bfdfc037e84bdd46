"""What the stress field means for each rib: mean tension, peak, margin, yield speed, growth.

Of a rib's section, the line between its ends, with the normal n and the length w:
    mean tension  sigma_m = 1/w int sigma_nn ds,  mean shear = 1/w int sigma_nt ds,
    bending       sigma_b = 6/w^2 int sigma_nn s ds, s from the middle towards the end,
from the force and the moment that the section carries (see solver.rib_loads); sigma_b is the
stress at the end of a straight beam under that moment (beam theory, derived). All stress of a
rotor with a free bore grows with the square of the speed, so the rib yields on average at
omega sqrt(yield / sigma_m).
The peak is the largest von Mises stress of the rib's zone (see solver.rib_zones).
"""

import math
from dataclasses import dataclass, field

import numpy as np

from lamwright.geometry.cut_outs import across, turned_edges
from lamwright.geometry.section import CrossSection, Region, Rib, rotor_cell, rotor_iron
from lamwright.solver.locate import values_at
from lamwright.solver.rib_zones import zone_of_node
from lamwright.solver.types import FloatArray, StressSolution


def _unit(label: str, unit: str) -> dict[str, str]:
    return {"label": label, "unit": unit}


@dataclass(frozen=True, slots=True)
class RibStress:
    """One rib at the speed of its report."""

    rib: Rib
    mean_tension: float = field(metadata=_unit("mean tension", "Pa"))
    mean_shear: float = field(metadata=_unit("mean shear", "Pa"))
    bending: float = field(metadata=_unit("bending", "Pa"))  # at `rib.end`, minus at `rib.start`
    peak: float = field(metadata=_unit("peak von Mises", "Pa"))
    peak_at: complex = field(metadata=_unit("place of the peak", "m"))
    yield_margin: float = field(metadata=_unit("yield margin", "1"))  # yield / peak
    mean_yield_speed: float = field(metadata=_unit("mean yield speed", "rad/s"))


@dataclass(frozen=True, slots=True)
class RibReport:
    """All ribs of the rotor's own period and the lamination as a whole, at one speed.

    The period is one pole where all are alike.
    """

    speed: float = field(metadata=_unit("speed", "rad/s"))
    yield_strength: float = field(metadata=_unit("yield strength", "Pa"))
    ribs: tuple[RibStress, ...]
    peak: float = field(metadata=_unit("peak von Mises", "Pa"))
    peak_error: float = field(metadata=_unit("error of the peak", "Pa"))
    peak_at: complex = field(metadata=_unit("place of the peak", "m"))
    yield_margin: float = field(metadata=_unit("yield margin", "1"))
    growth_d: float = field(metadata=_unit("rim growth on the d axis", "m"))
    growth_q: float = field(metadata=_unit("rim growth on the q axis", "m"))
    growth_max: float = field(metadata=_unit("largest rim growth", "m"))
    gap_left: float = field(metadata=_unit("air gap left", "m"))  # after spin growth alone


def rib_report(solution: StressSolution, section: CrossSection, yield_strength: float) -> RibReport:
    """The ribs of `section` under the stress `solution`, against `yield_strength` in Pa."""
    section = rotor_cell(section)
    zone = zone_of_node(section, solution.mesh)
    place = solution.mesh.nodes[:, 0] + 1j * solution.mesh.nodes[:, 1]
    ribs = []
    for k, rib in enumerate(section.ribs):
        members = np.flatnonzero(zone == k)
        node = int(members[np.argmax(solution.von_mises[members])])
        ribs.append(_rib_stress(solution, k, rib, node, yield_strength))
    top = int(np.argmax(solution.von_mises))
    growth_d, growth_q, growth_max = rim_growth(solution, section)
    return RibReport(
        speed=solution.speed,
        yield_strength=yield_strength,
        ribs=tuple(ribs),
        peak=solution.peak,
        peak_error=solution.peak_error,
        peak_at=complex(place[top]),
        yield_margin=_margin(yield_strength, solution.peak),
        growth_d=growth_d,
        growth_q=growth_q,
        growth_max=growth_max,
        gap_left=section.gap - growth_max,
    )


def _rib_stress(
    solution: StressSolution, number: int, rib: Rib, node: int, yield_strength: float
) -> RibStress:
    mean, shear, bending = section_stress(rib, solution.rib_loads[number])
    peak = float(solution.von_mises[node])
    speed = solution.speed * math.sqrt(yield_strength / mean) if mean > 0.0 else math.inf
    return RibStress(
        rib=rib,
        mean_tension=mean,
        mean_shear=shear,
        bending=bending,
        peak=peak,
        peak_at=complex(*solution.mesh.nodes[node]),
        yield_margin=_margin(yield_strength, peak),
        mean_yield_speed=speed,
    )


def _margin(yield_strength: float, peak: float) -> float:
    """Yield strength over the peak; infinite where nothing is loaded."""
    return yield_strength / peak if peak > 0.0 else math.inf


def section_stress(rib: Rib, load: FloatArray) -> tuple[float, float, float]:
    """Mean tension, mean shear and bending in Pa on a rib's section from its load (3,).

    The normal is the line's direction turned by -90 degrees; the shear is positive along the
    line, on the side that the normal leaves.
    """
    along = (rib.end - rib.start) / rib.width
    force = complex(load[0], load[1])
    tension, shear = (force * (-1j * along).conjugate()).real, (force * along.conjugate()).real
    # int sigma_nn s ds: a pull along the normal at s > 0 turns clockwise, so the sign.
    moment = -float(load[2])
    return tension / rib.width, shear / rib.width, 6.0 * moment / rib.width**2


def rim_growth(solution: StressSolution, section: CrossSection) -> tuple[float, float, float]:
    """Radial growth in m of the rim on the d axis and on the q axis, and what the gap loses.

    On an axis the outermost iron counts, the bottom of a notch where there is one; of unlike poles
    the largest of each axis. The gap loses what the farthest point of the spinning rotor stands out
    beyond the rotor's radius at rest.
    """
    section = rotor_cell(section)
    radius = np.hypot(solution.mesh.nodes[:, 0], solution.mesh.nodes[:, 1])
    outward = np.sum(solution.displacement * solution.mesh.nodes, axis=1) / radius
    rim = np.array(
        [
            _outermost(iron, (k + share) * section.pole_angle)
            for k, iron in enumerate(rotor_iron(section))
            for share in (0.0, 0.5)
        ]
    )
    on_axes = values_at(solution.mesh, outward[:, None], np.column_stack([rim.real, rim.imag]))[
        :, 0
    ]
    farthest = float((radius + outward).max())
    growth_d, growth_q = float(on_axes[::2].max()), float(on_axes[1::2].max())
    return growth_d, growth_q, farthest - section.rotor_radius


def _outermost(iron: Region, angle: float) -> complex:
    """The rotor iron's farthest point in m on the ray at `angle` rad."""
    found = across(turned_edges(iron.outer.edges, -angle), 0.0)
    assert found is not None  # the iron reaches from side to side
    return complex(found[1].real * np.exp(1j * angle))
