"""A stator by itself: of a design file whose other tables may lack, or of a drawing."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from .design import MachineDesign, StatorDesign
from .design_file import read_filled
from .design_outlines import NO_BARRIER, with_outlines
from .errors import DrawingError

# In place of the tables that a file with a stator alone has not got; nothing of them is kept.
FILLERS: dict[str, object] = {
    "name": "stator",
    "winding": {
        "layers": 2,
        "coil_span_slots": 1,
        "turns_per_coil": 1,
        "conductor_area_mm2": 1.0,
        "end_turn_length_mm": 1.0,
    },
    "rotor": {
        "poles": 2,
        "gap_mm": 1.0,
        "shaft_diameter_mm": 1.0,
        "sheet_thickness_mm": 1.0,
        "barrier": (NO_BARRIER,),
    },
    "steel": {"rotor_card": "", "stator_card": ""},
    "duty": {
        "rated_current_a": 1.0,
        "rated_speed_rpm": 1.0,
        "maximum_speed_rpm": 1.0,
        "supply_voltage_v": 1.0,
    },
    "limits": {
        "least_torque_nm": 0.0,
        "most_ripple_percent": 1.0,
        "least_saliency_ratio": 1.0,
        "least_yield_margin": 1.0,
    },
}


@dataclass(frozen=True, slots=True)
class StatorParts:
    """The stator of a file, and what of its winding there is besides."""

    stator: StatorDesign
    keys: Mapping[str, object]  # of [stator], as stated
    winding: Mapping[str, object] | None = None  # of [winding], as stated
    poles: int | None = None  # of [rotor]


def read_stator(path: Path) -> StatorParts:
    """The tables [stator] and, where it is there, [winding] of a design file.

    Raises:
        DesignError: the file cannot be read or used; one line for each fault.
    """
    design, data = read_filled(path, FILLERS, ("stator", "winding"))
    keys, winding, rotor = (data.get(name) for name in ("stator", "winding", "rotor"))
    assert isinstance(keys, dict)
    poles = rotor.get("poles") if isinstance(rotor, dict) else None
    return StatorParts(
        stator=design.stator,
        keys=keys,
        winding=winding if isinstance(winding, dict) else None,
        poles=poles if isinstance(poles, int) and poles > 0 else None,
    )


def stator_of_drawing(path: Path, stack_length_mm: float, unit_mm: float | None) -> StatorParts:
    """The stator of a DXF drawing.

    Raises:
        DesignError: no stator is recognised in it.
    """
    keys: dict[str, object] = {"outline_dxf": path.name, "stack_length_mm": stack_length_mm}
    if unit_mm is not None:
        keys["outline_unit_mm"] = unit_mm
    filled = with_outlines({**FILLERS, "stator": keys}, path.parent)
    if filled.faults:
        texts = (fault for _, fault in filled.faults)
        raise DrawingError("\n".join(f"{path}: {text}" for text in texts), filled.marks)
    design = filled.outlines.put_into(MachineDesign.model_validate(filled.data))
    return StatorParts(design.stator, keys)
