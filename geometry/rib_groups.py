"""Ribs whose widths one key of the design file states, and that therefore move together.

The tangential ribs of a barrier are one group, both halves and both sides of a tapering one; a
clockwise half with a width of its own is another. The radial ribs of a barrier are one group.
Source: derived from the keys.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from .design import BarrierDesign, MachineDesign
from .remedies import value_of, with_value
from .section import Rib, base_name, pole_of

STEP_MM = 1e-3  # widths are stated to a micrometre, a tenth of what any punch holds
ROUNDING = 1e-6  # of a step


@dataclass(frozen=True, slots=True)
class RibGroup:
    """Ribs that move together; where several keys state them, in proportion."""

    keys: tuple[str, ...]  # as in messages, the governing one first
    kind: Literal["tangential", "radial"]
    barrier: int  # from 1 at the rim
    is_alternate: bool = False  # of every second pole
    sides: tuple[str, ...] = ()  # of tangential ribs

    @property
    def label(self) -> str:
        """As a table writes it: `tangential 2`, `radial 3 alternate`."""
        half = f" {self.sides[0]}" if len(self.sides) == 1 else ""
        return f"{self.kind} {self.barrier}{half}{' alternate' if self.is_alternate else ''}"

    def least_mm(self, design: MachineDesign) -> float:
        """The least width that the keys state."""
        return min(value_of(design, key) for key in self.keys)


def rib_groups(design: MachineDesign) -> tuple[RibGroup, ...]:
    """All groups of a design whose rotor is stated by tables, from the rim inward."""
    rotor = design.rotor
    return tuple(
        group
        for is_alternate, table in enumerate((rotor.barrier, rotor.alternate_barrier))
        for number, barrier in enumerate(table, start=1)
        for group in _groups_of(number, barrier, bool(is_alternate))
    )


def members(design: MachineDesign, group: RibGroup, ribs: Sequence[Rib]) -> tuple[int, ...]:
    """Which of the ribs belong to a group, by their numbers."""
    has_others = bool(design.rotor.alternate_barrier)

    def is_member(rib: Rib) -> bool:
        if (rib.kind, rib.barrier) != (group.kind, group.barrier):
            return False
        if (has_others and pole_of(rib.name) % 2 == 0) != group.is_alternate:
            return False
        return group.kind == "radial" or base_name(rib.name).rpartition("_")[2] in group.sides

    return tuple(k for k, rib in enumerate(ribs) if is_member(rib))


def with_least(design: MachineDesign, group: RibGroup, least_mm: float) -> MachineDesign:
    """The design with a group's least width changed, its other widths in proportion.

    Widths are rounded up to whole micrometres.
    """
    before = {key: value_of(design, key) for key in group.keys}
    scale = least_mm / min(before.values())
    for key, value in before.items():
        design = with_value(design, key, rounded_up(value * scale))
    return design


def rounded_up(width_mm: float) -> float:
    """The next whole micrometre, in mm."""
    return round(math.ceil(width_mm / STEP_MM - ROUNDING) * STEP_MM, 6)


def _groups_of(number: int, barrier: BarrierDesign, is_alternate: bool) -> list[RibGroup]:
    table = f"rotor.{'alternate_' if is_alternate else ''}barrier[{number}]"
    other = barrier.other_half
    own = [f"{table}.tangential_rib_mm"]
    if barrier.tangential_rib_inner_mm is not None:
        own.append(f"{table}.tangential_rib_inner_mm")
    unlike: list[str] = []
    if other is not None:
        names = ("tangential_rib_mm", "tangential_rib_inner_mm")
        unlike = [f"{table}.other_half.{name}" for name in names if getattr(other, name)]
    # A half that takes one of its two widths from the first half cannot move by itself.
    is_own = len(unlike) == len(own) and bool(other and other.tangential_rib_mm)
    found = []
    if is_own:
        found.append(RibGroup(tuple(own), "tangential", number, is_alternate, ("left",)))
        found.append(RibGroup(tuple(unlike), "tangential", number, is_alternate, ("right",)))
    else:
        keys, both = (*own, *unlike), ("left", "right")
        found.append(RibGroup(keys, "tangential", number, is_alternate, both))
    if barrier.radial_ribs:
        keys = (f"{table}.radial_rib_mm",)
        found.append(RibGroup(keys, "radial", number, is_alternate))
    return found
