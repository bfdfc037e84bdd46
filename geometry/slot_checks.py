"""Checks of the stator: whether its slots can be drawn, punched and wound.

Least sizes of punched parts are common practice, no source: a web of iron or a slot opening is no
narrower than the sheet is thick, a radius or a lip no smaller than half of it. Edges shorter than
a tenth of the sheet's thickness are refused because no mesh could follow them.
"""

import math

from .design import MachineDesign
from .design_slots import idle_slot_keys
from .errors import GeometryError, OutlineError
from .outline_report import StatorOutline
from .remedies import Fault
from .slot_dimensions import SlotDimensions, slot_dimensions
from .slot_outline import slot_copper_area

MM = 1e-3  # m
SLACK = 1e-9  # m, a size is let miss its limit by rounding; far below a punch's 1e-5 m
MOST_FILL = 0.75  # bare copper in the copper region; common practice, no source


def stator_faults(design: MachineDesign) -> list[Fault]:
    """What keeps the stator from being drawn, punched or wound; lacks in m (fill: m^2)."""
    if design.stator.outline is not None:
        return _drawn_faults(design, design.stator.outline)
    dims = slot_dimensions(design)
    faults = _single_sizes(design) + _slot_faults(design, dims) + _corner_faults(design, dims)
    if faults:
        return faults
    try:
        return _fill_faults(design, slot_copper_area(design))
    except GeometryError as error:  # the layers cannot be parted
        return [_fault(one.code, (one.key,), one.fault, 1.0) for one in error.findings]


def _drawn_faults(design: MachineDesign, outline: StatorOutline) -> list[Fault]:
    """Faults of a stator from a drawing, whose shape stands as it was recognised."""
    from .drawn_slot import layered

    try:
        slot = layered(outline.drawing.slot, design.winding.layers)
    except OutlineError as error:
        key, text = "winding.layers", str(error)
        count = len(outline.drawing.slot.copper)
        remedy = f"accepted {count}" if count in (1, 2) else "draw one or two"
        return [Fault("slot_layers", (key,), text, 1.0, remedy)]
    return _fill_faults(design, min(part.area for part in slot.copper))


def _fill_faults(design: MachineDesign, copper: float) -> list[Fault]:
    """Whether the conductors of a slot that can be drawn go into its copper regions."""
    winding = design.winding
    room = MOST_FILL * copper  # m^2, of one coil side
    side = 1e-6 * winding.turns_per_coil * winding.conductor_area_mm2
    if side <= room:
        return []
    text = (
        f"{1e6 * side:.4g} mm2 of copper in a coil side; at a fill factor of {MOST_FILL:g} "
        f"{1e6 * room:.4g} mm2 have room"
    )
    turns = math.floor(1e6 * room / winding.conductor_area_mm2)
    key = "winding.turns_per_coil"
    remedy = f"accepted 1 to {turns} with conductors of {winding.conductor_area_mm2:g} mm2"
    if turns < 1:
        key = "winding.conductor_area_mm2"
        largest = 1e6 * room / winding.turns_per_coil
        remedy = f"accepted up to {_floored(largest):g} with {winding.turns_per_coil} turns"
    return [Fault("slot_fill", (key,), text, side - room, remedy)]


def _floored(value: float) -> float:
    """The value rounded down to four digits."""
    scale = 10.0 ** (3 - math.floor(math.log10(value)))
    return math.floor(value * scale) / scale


def _fault(code: str, keys: tuple[str, ...], text: str, lack: float) -> Fault:
    return Fault(code, tuple(f"stator.{key}" for key in keys), text, lack)


def _single_sizes(design: MachineDesign) -> list[Fault]:
    stator, sheet = design.stator, design.rotor.sheet_thickness_mm
    least = (
        ("tooth_thin", "tooth_width_mm", stator.tooth_width_mm, sheet),
        ("opening_narrow", "slot_opening_mm", stator.slot_opening_mm, sheet),
        ("lip_thin", "opening_depth_mm", stator.opening_depth_mm, 0.5 * sheet),
        ("bridge_thin", "bridge_mm", stator.bridge_mm, sheet),
    )
    return [
        _fault(code, (key,), f"under {limit:g} mm, too thin to punch", MM * (limit - value))
        for code, key, value, limit in least
        if value is not None and MM * (limit - value) > SLACK
    ]


def _slot_faults(design: MachineDesign, dims: SlotDimensions) -> list[Fault]:
    """Mouth, tooth tip, tooth, copper and yoke, from the bore outward."""
    sheet = MM * design.rotor.sheet_thickness_mm
    edge = 0.1 * sheet
    room = edge + _capped(dims.copper_height - dims.corner_height)
    if design.stator.slot_mouth != "semi_closed":
        # The inner side bulges up to `mouth_height`.
        room = max(room, edge + dims.mouth_height - dims.corner_height)
    lacks = (
        *_mouth_lacks(design, dims),
        (
            "slot_shallow",
            _shape_keys(
                design,
                "slot_depth_mm",
                "wedge_angle_deg",
                "wedge_depth_mm",
                "opening_depth_mm",
                "bridge_mm",
                "tooth_width_mm",
                "slot_width_mm",
                "slot_corner_radius_mm",
            ),
            "between the slot's inner end and its bottom there is no room for copper",
            room,
        ),
        (
            "yoke_thin",
            ("slot_depth_mm", "outer_diameter_mm", "bore_diameter_mm"),
            "the yoke behind the slot is thinner than the sheet",
            sheet - dims.yoke_depth,
        ),
    )
    faults = [_fault(code, keys, text, lack) for code, keys, text, lack in lacks if lack > SLACK]
    wedge = dims.copper_height - dims.mouth_height
    if design.stator.slot_mouth != "semi_closed" and design.stator.wedge_depth_mm == 0.0:
        wedge = 0.0
    if SLACK < wedge < edge - SLACK:
        text = f"a wedge of {wedge / MM:.3g} mm is too thin to draw"
        keys = _shape_keys(design, "wedge_depth_mm", "wedge_angle_deg")
        faults.append(_fault("wedge_thin", keys, text, edge - wedge))
    return faults


def _mouth_lacks(
    design: MachineDesign, dims: SlotDimensions
) -> list[tuple[str, tuple[str, ...], str, float]]:
    """What is missing at the slot's inner end, and of teeth that the slots leave."""
    stator, sheet = design.stator, MM * design.rotor.sheet_thickness_mm
    edge = 0.1 * sheet
    lacks = []
    if stator.slot_mouth == "semi_closed":
        bore = 0.5 * MM * stator.bore_diameter_mm
        # Seen from the tooth's centre line, a corner of the mouth lies bore sin(half pitch - phi)
        # off.
        phi = math.asin(min(1.0, dims.opening_half_width / bore))
        face = bore * math.sin(dims.half_pitch - phi)
        lacks.append(
            (
                "opening_wide",
                _shape_keys(design, "slot_opening_mm", "tooth_width_mm", "slot_width_mm"),
                "the mouth leaves no tooth tip beside it",
                max(dims.opening_half_width + edge - dims.tip_half_width, 0.5 * sheet - face),
            )
        )
    else:
        lacks.append(
            (
                "slot_narrow",
                _shape_keys(design, "tooth_width_mm", "slot_width_mm"),
                "at its inner end the slot is narrower than the sheet is thick",
                0.5 * sheet - dims.entry.imag,
            )
        )
    if stator.slot_sides == "parallel_slot":
        text = "the slots leave teeth thinner than the sheet"
        lacks.append(("tooth_thin", ("slot_width_mm",), text, sheet - dims.tooth_width))
    return lacks


def _shape_keys(design: MachineDesign, *keys: str) -> tuple[str, ...]:
    """Those of the keys that the slot's shape has."""
    idle = idle_slot_keys(design.stator.slot_choices)
    return tuple(key for key in keys if key not in idle)


def _corner_faults(design: MachineDesign, dims: SlotDimensions) -> list[Fault]:
    edge = 0.1 * MM * design.rotor.sheet_thickness_mm
    radius = dims.corner_radius
    key = ("slot_corner_radius_mm",)
    is_round = design.stator.slot_bottom == "round"
    if 0.0 < radius < edge - SLACK and not is_round:
        return [_fault("corner_small", key, "too small to punch; 0 is sharp", edge - radius)]
    if dims.corner_radius_limit < edge:
        text = "the slot has no width left at its bottom"
        keys = _shape_keys(design, "tooth_width_mm", "slot_width_mm", "slot_depth_mm")
        return [_fault("slot_narrow", keys, text, edge - dims.corner_radius_limit)]
    if is_round:
        return []
    left = dims.bottom_end.imag  # of a flat bottom, half
    if design.stator.slot_bottom == "concentric":
        reach = (radius - dims.flank.level) / max(dims.bottom_radius - radius, SLACK)
        # Half the bottom's arc between its two fillets.
        turn = dims.flank.angle - math.asin(min(1.0, max(-1.0, reach)))
        left = dims.bottom_radius * turn
    if left < 0.5 * edge - SLACK:
        text = "the fillets leave no bottom between them"
        return [_fault("corner_large", key, text, 0.5 * edge - left)]
    return []


def _capped(height: float) -> float:
    """A height that may be infinite, made finite so that lacks can be compared."""
    return min(height, 1e3)
