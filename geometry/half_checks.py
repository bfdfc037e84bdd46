"""Checks of one half of a barrier: its values by themselves, and its outline as it is drawn.

What can be said in closed form before drawing is said so: whether the end lies far enough out,
whether bends, arms and noses fit. Everything else is measured on the lines and arcs of the
outline: iron to the d axis, the tightest arc, the shortest edge, the thinnest place of the
barrier, the farthest point from the shaft axis. So what passes has been seen.

Least sizes are common practice, no source: iron and cavities no narrower than the sheet is thick,
radii no smaller than half of it. Edges shorter than a tenth of it are refused because no mesh
could follow them.
"""

import cmath
import functools
import math
from collections.abc import Sequence
from dataclasses import dataclass

from .barrier_sides import FITTED, TO_RIM, TO_SHAFT, Seat, guide_bend, guide_bottom, seat_of
from .corners import is_within
from .curves import Edge
from .design import BarrierDesign
from .distances import distance
from .half_barrier import MOST_KEPT, HalfBarrier, half_barrier
from .mid_lines import (
    MM,
    StraightLegs,
    arc_half,
    arm_angle,
    bend_radius,
    end_fillet_mm,
    end_thickness_mm,
    legs_between,
)
from .punch_sizes import PunchSizes
from .remedies import Fault

SLACK = 1e-9  # m, a size is let miss its limit by rounding; far below a punch's 1e-5 m
SIDES = (TO_SHAFT, TO_RIM)
BENT = ("straight", "vee")
ARC_TIGHT = "the arc's inner side is too tight to punch"


@dataclass(frozen=True, slots=True)
class Pole(PunchSizes):
    """What a barrier has to fit into, and the least sizes, in m."""

    rotor_radius: float
    shaft_radius: float
    pole_pairs: int
    sheet: float


@dataclass(frozen=True, slots=True)
class HalfChecks:
    """Faults of a half, and its outline where it has one."""

    faults: tuple[Fault, ...]
    half: HalfBarrier | None


@functools.lru_cache(maxsize=MOST_KEPT)
def half_checks(pole: Pole, table: str, barrier: BarrierDesign) -> HalfChecks:
    """All faults of the upper half of a barrier, radial ribs apart.

    Args:
        pole: what it has to fit into.
        table: of the barrier as written in a message, `rotor.barrier[1]`.
        barrier: whose half.
    """
    check = _Check(pole, table, barrier, seat_of(barrier, pole.rotor_radius, pole.pole_pairs))
    faults = check.sizes() + check.keys() + check.bore()
    placed = check.placement()
    if placed or check.seat.shaft_vertex <= 0.0 or any(f.code in STOPS for f in faults):
        return HalfChecks((*faults, *placed), None)
    try:
        half = half_barrier(barrier, pole.rotor_radius, pole.pole_pairs)
    except ValueError as error:
        return HalfChecks((*faults, check.undrawn(str(error))), None)
    return HalfChecks((*faults, *check.outline(half)), half)


STOPS = ("rib_inner_thin",)  # faults of a value that leave nothing to draw


@dataclass(frozen=True, slots=True)
class _Check:
    pole: Pole
    table: str
    barrier: BarrierDesign
    seat: Seat

    def fault(
        self, code: str, keys: Sequence[str], text: str, lack: float, remedy: str | None = None
    ) -> Fault:
        return Fault(code, tuple(f"{self.table}.{key}" for key in keys), text, lack, remedy)

    def short(self, code: str, keys: Sequence[str], text: str, lack: float) -> list[Fault]:
        """The fault, if anything is missing."""
        return [self.fault(code, keys, text, lack)] if lack > SLACK else []

    def sizes(self) -> list[Fault]:
        """Single values below what can be punched."""
        barrier, half, sheet = self.barrier, self.pole.least_radius, self.pole.sheet
        least = [
            ("tangential_rib_thin", "tangential_rib_mm", barrier.tangential_rib_mm, sheet),
            ("barrier_thin", "thickness_mm", barrier.thickness_mm, sheet),
        ]
        if barrier.end_thickness_mm is not None:
            least.append(("end_thin", "end_thickness_mm", barrier.end_thickness_mm, sheet))
        if barrier.shape in BENT:
            least.append(("bend_tight", "bend_radius_mm", bend_radius(barrier) / MM, half))
        if barrier.end_shape != "round":
            least.append(("end_fillet_small", "end_fillet_mm", end_fillet_mm(barrier), half))
        faults = []
        for code, key, value, limit in least:
            what = "than the sheet" if limit == sheet else "than half the sheet"
            text = f"thinner {what} ({self.pole.sheet / MM:g} mm)"
            faults += self.short(code, (key,), text, limit - MM * value)
        inner = barrier.tangential_rib_inner_mm
        if inner is not None:
            text = f"thinner than the rib's other end ({barrier.tangential_rib_mm:g})"
            lack = MM * (barrier.tangential_rib_mm - inner)
            keys = ("tangential_rib_inner_mm", "tangential_rib_mm")
            faults += self.short("rib_inner_thin", keys, text, lack)
        return faults

    def keys(self) -> list[Fault]:
        """Keys that belong to another shape or end."""
        barrier = self.barrier
        homes = (
            ("straight_only", "arm_angle_deg", "shape", ("straight",)),
            ("straight_only", "bend_radius_mm", "shape", BENT),
            ("end_fillet_only", "end_fillet_mm", "end_shape", ("flat", "square")),
            ("flat_only", "tangential_rib_inner_mm", "end_shape", ("flat",)),
        )
        faults = []
        for code, key, kind, choices in homes:
            if getattr(barrier, key) is not None and getattr(barrier, kind) not in choices:
                names = " or ".join(f'"{choice}"' for choice in choices)
                remedy = f"remove it, or set {kind} = {names}"
                noun = "barrier" if kind == "shape" else "end"
                text = f"only a {' or '.join(choices)} {noun} has it"
                faults.append(self.fault(code, (key,), text, 1.0, remedy))
        return faults

    def bore(self) -> list[Fault]:
        """Iron to the bore on the q axis."""
        iron = self.seat.shaft_vertex - self.pole.shaft_radius
        text = f"{left(iron)} to the bore"
        return self.short("bore_close", ("depth_mm", "thickness_mm"), text, self.pole.sheet - iron)

    def placement(self) -> list[Fault]:
        """What can be said of the outline before it is drawn."""
        barrier, pole, seat = self.barrier, self.pole, self.seat
        beyond = math.radians(barrier.end_angle_deg) - 0.5 * math.pi / pole.pole_pairs
        if beyond >= 0.0:
            text = f"not within half the pole pitch ({90.0 / pole.pole_pairs:g})"
            return [self.fault("end_beyond", ("end_angle_deg",), text, beyond + SLACK)]
        bottom = max(guide_bottom(barrier, seat, side) for side in SIDES)
        if barrier.shape in FITTED:
            bottom = seat.rim_vertex - seat.half
        rise = seat.cap.real - bottom
        text = "the ends lie no further out than the bottom on the q axis"
        if barrier.end_shape == "round":
            text = "the round ends lie no further out than the bottom on the q axis"
        keys = ["depth_mm", "end_angle_deg", "thickness_mm", "tangential_rib_mm"]
        keys += self._end_keys()
        flat = self.short("barrier_flat", keys, text, pole.least_edge - rise)
        if flat or barrier.shape not in ("arc", "straight"):
            return flat
        return self._legs() if barrier.shape == "straight" else self._inner_arc()

    def _inner_arc(self) -> list[Fault]:
        """An arc whose rim's side has no radius left; a small one is found on the outline."""
        bottom = guide_bottom(self.barrier, self.seat, TO_RIM)
        inner = arc_half(bottom, self.seat.cap).radius - self.seat.half
        if inner > SLACK:
            return []
        return self.short("arc_tight", self._arc_keys(), ARC_TIGHT, self.pole.least_radius - inner)

    def _arc_keys(self) -> list[str]:
        return ["thickness_mm", "depth_mm", "end_angle_deg", *self._end_keys()]

    def _legs(self) -> list[Fault]:
        barrier, edge = self.barrier, self.pole.least_edge
        angle = arm_angle(barrier, self.pole.pole_pairs)
        legs = [self._side_legs(side, angle) for side in SIDES]
        keys = ["arm_angle_deg", "bend_radius_mm", "end_angle_deg", "depth_mm", "thickness_mm"]
        keys += self._end_keys()
        text = "the arms and their bends leave no straight bottom"
        lack = 0.5 * edge - min(one.bottom_left for one in legs)
        faults = self.short("bottom_gone", keys, text, lack)
        lack = edge - min(one.arm_left for one in legs)
        faults += self.short("arm_gone", keys, "the bends leave no straight arm", lack)
        text = "the arms hardly turn from the bottom"
        bend = edge - bend_radius(barrier) * legs[0].turn
        return faults + self.short("bend_flat", keys, text, bend)

    def _side_legs(self, side: float, angle: float) -> StraightLegs:
        bottom = guide_bottom(self.barrier, self.seat, side)
        return legs_between(bottom, self.seat.cap, angle, guide_bend(self.barrier, side))

    def _end_keys(self) -> list[str]:
        return ["end_thickness_mm"] if self.barrier.end_thickness_mm is not None else []

    def undrawn(self, reason: str) -> Fault:
        """The fault of a barrier that cannot be drawn, for which closed forms found no cause."""
        barrier = self.barrier
        keys = ["depth_mm", "end_angle_deg", "thickness_mm", *self._end_keys()]
        if barrier.shape == "vee":
            keys.append("bend_radius_mm")
        if barrier.end_shape != "round":
            keys[:0] = ["end_fillet_mm"] if end_fillet_mm(barrier) > 0.0 else []
        if barrier.tangential_rib_inner_mm is not None:
            keys.insert(0, "tangential_rib_inner_mm")
        return self.fault("no_outline", keys, reason, self.pole.least_edge)

    def outline(self, half: HalfBarrier) -> list[Fault]:
        """What is measured on the outline."""
        faults = self._d_axis(half) + self._tight(half) + self._own_ends(half)
        edges = (*half.to_shaft, *half.to_rim, *half.end)
        keys = ["thickness_mm", "depth_mm", "end_angle_deg", *self._end_keys()]
        if not (faults or self._is_parallel()):
            thin = distance(half.to_shaft, half.to_rim, self.pole.sheet)
            text = f"the barrier is only {thin / MM:.3g} mm thick at its thinnest"
            faults += self.short("barrier_pinched", keys, text, self.pole.sheet - thin)
        reach = max(farthest(edge) for edge in edges)
        text = "a side of the barrier comes nearer to the rim than its end"
        faults += self.short("side_out", keys, text, reach - self.seat.reach)
        if self.barrier.end_shape != "round":
            keys.insert(0, "end_fillet_mm")
        across = (half.to_shaft[0].length, half.to_rim[0].length)  # half of an edge each
        whole = [*half.to_shaft[1:], *half.to_rim[1:], *half.end]
        shortest = min(*(2.0 * length for length in across), *(edge.length for edge in whole))
        text = f"an edge of its outline is only {shortest / MM:.3g} mm long"
        if not faults:
            faults += self.short("edge_short", keys, text, self.pole.least_edge - shortest)
        return faults

    def _is_parallel(self) -> bool:
        """Whether both sides are parallels of one line, so the thickness is the stated one."""
        alike = end_thickness_mm(self.barrier) == self.barrier.thickness_mm
        return alike and self.barrier.shape not in FITTED

    def _d_axis(self, half: HalfBarrier) -> list[Fault]:
        side = cmath.exp(0.5j * math.pi / self.pole.pole_pairs)
        iron = min(_clearance(edge, side) for edge in (*half.to_shaft, *half.end))
        keys = ["end_angle_deg", "depth_mm", "thickness_mm", "tangential_rib_mm"]
        if self.barrier.shape == "straight":
            keys.insert(1, "arm_angle_deg")
        text = f"{left(iron)} to the d axis"
        return self.short("side_close", keys + self._end_keys(), text, self.pole.sheet - iron)

    def _tight(self, half: HalfBarrier) -> list[Fault]:
        """The tightest arc of a side that no key states."""
        if self.barrier.shape in BENT:
            return []
        tight = min(edge.radius for edge in (*half.to_shaft, *half.to_rim))
        length = 2.0 * sum(edge.length for edge in half.to_rim)
        lack = max(self.pole.least_radius - tight, self.pole.least_edge - length)
        return self.short("arc_tight", self._arc_keys(), ARC_TIGHT, lack)

    def _own_ends(self, half: HalfBarrier) -> list[Fault]:
        """Iron between the two ends of a barrier that turns back towards the q axis."""
        if half.to_rim[-1].direction(1.0).imag >= 0.0:
            return []
        iron = 2.0 * min(_clearance(edge, -1.0 + 0j) for edge in half.end)
        keys = ["end_angle_deg", "thickness_mm", "depth_mm", "tangential_rib_mm"]
        text = f"{left(iron)} between the barrier's own ends"
        return self.short("ends_close", keys + self._end_keys(), text, self.pole.sheet - iron)


def left(iron: float) -> str:
    """How much iron is left, in words."""
    return f"only {iron / MM:.3g} mm of iron" if iron > SLACK else "no iron"


def farthest(edge: Edge) -> float:
    """Largest distance of an edge from the shaft axis in m."""
    ends = max(abs(edge.start), abs(edge.end))
    if edge.is_line:
        return ends
    reach = abs(edge.centre) + edge.radius
    if reach <= ends or edge.centre == 0.0:
        return ends
    out = reach * edge.centre / abs(edge.centre)
    return reach if is_within(edge, out) else ends


def _clearance(edge: Edge, side: complex) -> float:
    """Least distance of an edge to the line through the shaft axis along `side`, on its right."""
    points = [edge.start, edge.end]
    if not edge.is_line:
        extreme = edge.centre + edge.radius * 1j * side
        if is_within(edge, extreme):
            points.append(extreme)
    return min((point.conjugate() * side).imag for point in points)
