"""Names of notches, holes, rivets, keyways and of a gap that is not even, for the section."""

from __future__ import annotations

import cmath
import re

import numpy as np

from lamwright.geometry.section import CrossSection, Region, base_name, pole_of

from .figures_labels import Callout
from .figures_style import MM, ComplexArray, sampled

DETAIL = re.compile(r"(notch|hole|key)_(\d+)(?:_right|_left)?")
SAME_PLACE = 1e-9  # m, of points of like poles
KEY_NAMES = {"key": "key", "air": "keyway"}  # by what lies in the groove


def detail_callouts(section: CrossSection, turn: complex) -> list[Callout]:
    """A name for each detail of an upright section's rotor, the right one of two.

    Args:
        section: a sector of the rotor; details of its first pole are named where there are any.
        turn: unit vector along its first d axis, as drawn.

    Returns:
        Names with anchors in m, as those of the rotor's other parts.
    """
    best: dict[tuple[str, str], tuple[int, float, Callout]] = {}
    for region in section.rotor:
        match = DETAIL.fullmatch(base_name(region.name))
        if match is None:
            continue
        at = _middle(sampled(region.outer) * turn)
        rank = pole_of(region.name), -at.real
        key = match[1], match[2]
        if key not in best or rank < best[key][:2]:
            best[key] = (*rank, Callout(_name(region, match[2]), at, "right"))
    return [callout for _, _, callout in best.values()] + _gap_callouts(section, turn)


def _name(region: Region, number: str) -> str:
    kind = base_name(region.name).split("_")[0]
    if kind == "key":
        return KEY_NAMES["air" if region.material == "air" else "key"]
    return f"{'rivet' if region.material == 'rivet' else kind} {number}"


def _middle(outline: ComplexArray) -> complex:
    """Half-way along the radius and round the shaft axis, of an outline (n,): inside a slot too."""
    first = complex(outline[0])
    turned = np.angle(outline / first)
    radius = 0.5 * (abs(outline).min() + abs(outline).max())
    return complex(radius * first / abs(first)) * cmath.exp(
        0.5j * float(turned.min() + turned.max())
    )


def _gap_callouts(section: CrossSection, turn: complex) -> list[Callout]:
    """Where the rim is no circle, the gap on the q axis, where it is widest."""
    ring = [r for r in section.rotor if r.name == "rim_air"]
    if not ring:
        return []
    # The arc of the rim across the q axis, or a notch's mouth there, has its middle on the axis.
    low = min(abs(edge.point(share)) for edge in ring[0].outer.edges for share in (0.0, 0.5))
    bore = section.stator_bore_radius
    at = 0.5 * (low + bore) * turn * cmath.exp(0.5j * section.pole_angle)
    return [Callout(f"gap on the q axis, {MM * (bore - low):.2f} mm", at, "right")]


def unlike_poles(cell: CrossSection) -> list[int]:
    """Poles of a period with barriers unlike those of every pole before; keyways do not count."""
    seen: list[ComplexArray] = []
    named = []
    for pole in range(1, cell.sector_poles + 1):
        back = cmath.exp(-1j * (pole - 1) * cell.pole_angle)
        points = [
            edge.start * back
            for region in cell.rotor
            if pole_of(region.name) == pole and base_name(region.name).startswith("barrier_")
            for edge in region.outer.edges
        ]
        own = np.array(points, dtype=np.complex128)
        if not any(own.size == one.size and np.allclose(own, one, 0.0, SAME_PLACE) for one in seen):
            seen.append(own)
            named.append(pole)
    return named
