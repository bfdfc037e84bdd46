"""The demonstration machine with slots of every shape; invented dimensions."""

import itertools
import json
import tomllib
from pathlib import Path

from lamwright.geometry.design import MachineDesign

DEMO = Path(__file__).parents[1] / "designs" / "demo_24s4p_arc.toml"
SHAPES = tuple(
    itertools.product(
        ("parallel_tooth", "parallel_slot"),
        ("concentric", "flat", "round"),
        ("semi_closed", "open", "closed"),
    )
)
# One layer; two layers across the slot, beside each other.
WINDINGS = ((1, 6), (2, 6), (2, 1))
TIP = ("slot_opening_mm", "opening_depth_mm", "wedge_angle_deg")


def table_of(
    shape: tuple[str, str, str], winding: tuple[int, int] = (1, 6), **stator: object
) -> dict[str, object]:
    """The design's tables with slots of a shape: sides, bottom, mouth; layers and coil span."""
    sides, bottom, mouth = shape
    table = tomllib.loads(DEMO.read_text(encoding="utf-8"))
    own = {**table["stator"], "slot_sides": sides, "slot_bottom": bottom, "slot_mouth": mouth}
    if sides == "parallel_slot":
        del own["tooth_width_mm"]
        own["slot_width_mm"] = 5.5
    if bottom == "round":
        own.pop("slot_corner_radius_mm", None)
    if mouth != "semi_closed":
        own = {key: value for key, value in own.items() if key not in TIP}
    if mouth == "closed":
        own["bridge_mm"] = 0.8
    table["stator"] = {**own, **stator}
    table["winding"].update(layers=winding[0], coil_span_slots=winding[1], turns_per_coil=10)
    return table


def slotted(
    shape: tuple[str, str, str], winding: tuple[int, int] = (1, 6), **stator: object
) -> MachineDesign:
    """The design of `table_of`, validated."""
    return MachineDesign.model_validate_json(json.dumps(table_of(shape, winding, **stator)))
