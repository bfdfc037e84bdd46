"""Checks of each notch, hole and keyway by itself, in closed form: what drawing it needs.

Least sizes are common practice, no source: widths, diameters and webs no smaller than the sheet is
thick, radii no smaller than half of it, edges no shorter than a tenth (no mesh could follow them).
"""

import math
from dataclasses import dataclass

from .cut_outs import notch_corner
from .design import MachineDesign
from .design_details import HoleDesign, KeywayDesign, NotchDesign
from .detail_places import ON_AXIS_TOL
from .punch_sizes import PunchSizes
from .remedies import Fault
from .rotor import rotor_frame

MM = 1e-3  # m
SLACK = 1e-9  # m, a size is let miss its limit by rounding; far below a punch's 1e-5 m
MOST_OPENING = 0.9  # of the diameter of rim or bore, of a groove's width


@dataclass(frozen=True, slots=True)
class DetailPole(PunchSizes):
    """What a detail has to fit into, and the least sizes, in m and rad."""

    rotor_radius: float
    shaft_radius: float
    half_pitch: float
    poles: int
    sheet: float


def detail_pole(design: MachineDesign) -> DetailPole:
    """The pole of a design that details have to fit into."""
    frame = rotor_frame(design)
    sheet = MM * design.rotor.sheet_thickness_mm
    poles = design.rotor.poles
    return DetailPole(frame.rotor_radius, frame.shaft_radius, frame.q_axis, poles, sheet)


def notch_faults(pole: DetailPole, number: int, notch: NotchDesign) -> list[Fault]:
    """Faults of notch `number`, from 1."""
    table = Sizes(f"rotor.notch[{number}]", pole)
    half, depth = 0.5 * MM * notch.width_mm, MM * notch.depth_mm
    table.least("notch_narrow", "width_mm", 2.0 * half, pole.sheet, "thinner than the sheet")
    if half > 0.5 * MOST_OPENING * 2.0 * pole.rotor_radius:
        text = "wider than the rotor"
        table.short("notch_wide", ("width_mm",), text, half - MOST_OPENING * pole.rotor_radius)
        return table.faults
    reach = math.asin(half / pole.rotor_radius)
    table.within("notch", math.radians(notch.angle_deg), reach, ("angle_deg", "width_mm"))
    fall = _sagitta(pole.rotor_radius, half)
    deep = pole.rotor_radius - depth - pole.shaft_radius
    table.short("notch_deep", ("depth_mm",), f"{left(deep)} to the bore", pole.sheet - deep)
    wall = depth - fall  # height of the wall's end over the bottom
    table.short(
        "notch_shallow",
        ("depth_mm", "width_mm"),
        "the bottom does not lie below the ends of the mouth",
        pole.least_edge - wall,
    )
    if notch.bottom == "round":
        table.unwanted(notch.corner_radius_mm, "corner_radius_mm", "bottom", "flat")
        if wall > half:  # else the bottom is one arc from rim to rim
            _no_stub(table, "notch_wall", ("depth_mm", "width_mm"), wall - half)
        return table.faults
    radius = notch_corner(notch)
    keys: tuple[str, ...] = ("corner_radius_mm", "width_mm", "depth_mm")
    if notch.corner_radius_mm is None:
        keys = ("width_mm", "depth_mm", "corner_radius_mm")
    table.least("notch_corner", keys, radius, pole.least_radius, "a corner too small to punch")
    _no_stub(table, "notch_corner", keys, 2.0 * (half - radius))
    _no_stub(table, "notch_wall", ("corner_radius_mm", "depth_mm"), wall - radius)
    return table.faults


def hole_faults(pole: DetailPole, number: int, hole: HoleDesign) -> list[Fault]:
    """Faults of hole `number`, from 1."""
    table = Sizes(f"rotor.hole[{number}]", pole)
    radius, place = 0.5 * MM * hole.diameter_mm, MM * hole.place_radius_mm
    table.least("hole_small", "diameter_mm", 2.0 * radius, pole.sheet, "smaller than the sheet")
    keys: tuple[str, ...] = ("place_radius_mm", "diameter_mm")
    web = pole.rotor_radius - place - radius
    table.short("hole_rim", keys, f"{left(web)} to the rim", pole.sheet - web)
    web = place - radius - pole.shaft_radius
    table.short("hole_bore", keys, f"{left(web)} to the bore", pole.sheet - web)
    half_span = 0.5 * math.radians(hole.span_deg or 0.0)
    if place > radius:
        reach = half_span + math.asin(radius / place)
        names = ("angle_deg", "diameter_mm")
        keys = ("angle_deg", "span_deg", "diameter_mm") if hole.span_deg else names
        table.within("hole", math.radians(hole.angle_deg), reach, keys)
    if hole.span_deg:
        near = 2.0 * half_span * (place - radius)  # length of the slot's shorter side
        text = "the slot is hardly longer than its ends"
        table.short("slot_short", ("span_deg",), text, 2.0 * pole.least_edge - near)
    table.unwanted(
        None if hole.material == "rivet" else hole.relative_permeability,
        "relative_permeability",
        "material",
        "rivet",
    )
    return table.faults


def keyway_faults(pole: DetailPole, keyway: KeywayDesign) -> list[Fault]:
    """Faults of the keyway."""
    table = Sizes("rotor.keyway", pole)
    half, depth = 0.5 * MM * keyway.width_mm, MM * keyway.depth_mm
    radius = MM * keyway.corner_radius_mm
    _count_fault(table, keyway)
    table.least("key_narrow", "width_mm", 2.0 * half, pole.sheet, "thinner than the sheet")
    table.least(
        "key_corner", "corner_radius_mm", radius, pole.least_radius, "a corner too small to punch"
    )
    if half > MOST_OPENING * pole.shaft_radius:
        text = "wider than the bore"
        table.short("key_wide", ("width_mm",), text, half - MOST_OPENING * pole.shaft_radius)
        return table.faults
    deep = pole.rotor_radius - pole.shaft_radius - depth
    table.short("key_deep", ("depth_mm",), f"{left(deep)} to the rim", pole.sheet - deep)
    table.unwanted(
        None if keyway.key == "steel" else keyway.key_relative_permeability,
        "key_relative_permeability",
        "key",
        "steel",
    )
    wide = _head(table, keyway) if keyway.kind == "dog_bone" else _plain(table, keyway)
    angle, reach = math.radians(keyway.angle_deg), math.asin(min(1.0, half / pole.shaft_radius))
    top = pole.shaft_radius + depth
    reach = max(reach, math.atan2(wide, top - MM * (keyway.head_depth_mm or keyway.depth_mm)))
    table.within("key", angle, reach, ("angle_deg", "width_mm"), has_mirror=False)
    return table.faults


def _plain(table: "Sizes", keyway: KeywayDesign) -> float:
    half, radius = 0.5 * MM * keyway.width_mm, MM * keyway.corner_radius_mm
    for name in ("head_width_mm", "head_depth_mm"):
        table.unwanted(getattr(keyway, name), name, "kind", "dog_bone")
    _no_stub(table, "key_corner", ("corner_radius_mm", "width_mm"), 2.0 * (half - radius))
    wall = MM * keyway.depth_mm + _sagitta(table.pole.shaft_radius, half) - radius
    _no_stub(table, "key_wall", ("depth_mm", "corner_radius_mm"), wall)
    return half


def _head(table: "Sizes", keyway: KeywayDesign) -> float:
    half, radius = 0.5 * MM * keyway.width_mm, MM * keyway.corner_radius_mm
    for name in ("head_width_mm", "head_depth_mm"):
        if getattr(keyway, name) is None:
            text = f"a dog-bone key needs {name}"
            table.short("head_missing", ("kind",), text, 1.0, f"add {name}")
    if keyway.head_width_mm is None or keyway.head_depth_mm is None:
        return half
    wide, head = 0.5 * MM * keyway.head_width_mm, MM * keyway.head_depth_mm
    keys: tuple[str, ...] = ("head_width_mm", "corner_radius_mm", "width_mm")
    _no_stub(table, "head_narrow", keys, wide - half - 2.0 * radius)
    keys = ("head_depth_mm", "corner_radius_mm")
    _no_stub(table, "head_flat", keys, head - 2.0 * radius)
    neck = MM * keyway.depth_mm - head - radius + _sagitta(table.pole.shaft_radius, half)
    keys = ("depth_mm", "head_depth_mm", "corner_radius_mm")
    _no_stub(table, "key_wall", keys, neck)
    return wide


def _count_fault(table: "Sizes", keyway: KeywayDesign) -> None:
    poles = table.pole.poles
    if poles % keyway.count == 0:
        return
    text = f"{keyway.count} keyways do not stand alike on {poles} poles"
    fits = [str(count) for count in range(1, poles + 1) if poles % count == 0]
    table.short("key_count", ("count",), text, 1.0, f"accepted {', '.join(fits[:-1])} or {poles}")


def _no_stub(table: "Sizes", code: str, keys: tuple[str, ...], length: float) -> None:
    """A straight edge that has to be there: a round that just fits would leave none to move."""
    least = table.pole.least_edge
    if length <= 0.0:
        table.short(code, keys, "the round does not fit", least - length)
    else:
        text = f"leaves a straight edge of only {length / MM:.3g} mm"
        table.short(code, keys, text, least - length)


def _sagitta(radius: float, half: float) -> float:
    """How far a circle falls from the middle of a mouth to its ends, in m."""
    return radius - math.sqrt(radius**2 - half**2)


def left(iron: float) -> str:
    """What is left of a web, in words."""
    return f"only {iron / MM:.3g} mm of iron" if iron > SLACK else "no iron"


class Sizes:
    """The faults of one table of the design as they are found."""

    def __init__(self, table: str, pole: DetailPole) -> None:
        """Begin with none; `table` as in a message."""
        self.table, self.pole = table, pole
        self.faults: list[Fault] = []

    def short(
        self, code: str, names: tuple[str, ...], text: str, lack: float, remedy: str | None = None
    ) -> None:
        """Note the fault, if anything is missing."""
        if lack > SLACK:
            keys = tuple(f"{self.table}.{name}" for name in names)
            self.faults.append(Fault(code, keys, text, lack, remedy))

    def least(
        self, code: str, names: str | tuple[str, ...], value: float, limit: float, what: str
    ) -> None:
        """Note a value in m below its limit."""
        keys = (names,) if isinstance(names, str) else names
        text = f"{what} ({self.pole.sheet / MM:g} mm)" if "sheet" in what else what
        self.short(code, keys, text, limit - value)

    def within(
        self,
        kind: str,
        angle: float,
        reach: float,
        names: tuple[str, ...],
        *,
        has_mirror: bool = True,
    ) -> None:
        """Note a detail that leaves its half pole without standing on the d or the q axis."""
        limit = self.pole.half_pitch
        if angle - limit > ON_AXIS_TOL:
            text = f"beyond half the pole pitch ({math.degrees(limit):g})"
            self.short(f"{kind}_beyond", names, text, angle - limit)
        elif limit - angle > ON_AXIS_TOL and angle + reach > limit:
            text = f"crosses the d axis without standing on it ({math.degrees(limit):g})"
            self.short(f"{kind}_side", names, text, angle + reach - limit + SLACK)
        elif abs(limit - angle) <= ON_AXIS_TOL and reach > limit:
            text = "reaches from the d axis to the q axis"
            self.short(f"{kind}_side", names[1:], text, reach - limit)
        elif has_mirror and angle > ON_AXIS_TOL and angle < reach:
            text = "crosses the q axis without standing on it (0)"
            self.short(f"{kind}_axis", names, text, reach - angle)
        elif angle <= ON_AXIS_TOL and reach > limit:
            self.short(f"{kind}_side", names[1:], "reaches the d axis", reach - limit)

    def unwanted(self, value: object, name: str, key: str, choice: str) -> None:
        """Note a key that only another choice has."""
        if value is not None:
            text, remedy = f'only {key} = "{choice}" has it', f"remove it, or set {key} to that"
            self.short(f"{name}_alone", (name,), text, 1.0, remedy)
