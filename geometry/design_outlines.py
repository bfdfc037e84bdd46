"""Parts of a design taken from drawings: read, recognised, and their dimensions put into the keys.

A table with `outline_dxf` states no shape of its own. What the drawing shows is put in before the
tables are validated, so that every later step finds whole tables; a dimension that the design
states all the same must be the drawing's.
"""

import hashlib
import math
import threading
from collections import OrderedDict
from collections.abc import Callable, Hashable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Generic, TypeVar

from .design import MachineDesign, RotorDesign, StatorDesign
from .design_drawing import OutlineKeys
from .errors import DrawingMark, OutlineError
from .key_lines import KeyPath
from .outline_report import RotorOutline, StatorOutline, source_of, stator_measures

# What reads and recognises is imported for a design with a drawing: 15 ms of each start without.
if TYPE_CHECKING:
    from .drawn_slot import SlotHints
    from .dxf_reader import DrawnPieces

MM = 1e-3  # m
UM = 1e-6  # m
STATED_TOL = 0.02  # mm, a stated dimension may miss the drawing's by this
OUTLINE_KEYS = tuple(OutlineKeys.model_fields)
# What a drawn part's table may state beside the drawing.
STATOR_KEYS = (*OUTLINE_KEYS, "stack_length_mm", "wedge_depth_mm", "opening_depth_mm")
ROTOR_KEYS = (
    *(*OUTLINE_KEYS, "q_axis_deg", "poles", "shaft_relative_permeability"),
    *("sheet_thickness_mm", "stacking_factor"),
)
# Where a drawing is faulty, or its keys are, and the design is about to be refused for it.
STATOR_FILLERS: "Data" = {
    "outer_diameter_mm": 3.0,
    "bore_diameter_mm": 2.0,
    "slots": 12,
    "tooth_width_mm": 1.0,
    "slot_depth_mm": 1.0,
    "slot_opening_mm": 1.0,
    "opening_depth_mm": 1.0,
}
ROTOR_FILLERS: "Data" = {"gap_mm": 1.0, "shaft_diameter_mm": 1.0}
# Holds the place of the tables of barriers that a drawn rotor has not; `drawn` takes it out.
NO_BARRIER: "Data" = {
    "shape": "arc",
    "end_angle_deg": 1.0,
    "thickness_mm": 1.0,
    "depth_mm": 1.0,
    "tangential_rib_mm": 1.0,
}

MOST_KEPT = 4  # outlines of either kind

_Outline = TypeVar("_Outline")
Data = dict[str, object]
PlacedFault = tuple[KeyPath, str]


@dataclass(frozen=True, slots=True)
class Outlines:
    """What the drawings of a design hold."""

    stator: StatorOutline | None = None
    rotor: RotorOutline | None = None

    def put_into(self, design: MachineDesign) -> MachineDesign:
        """The design with its drawn parts."""
        if self.stator is not None:
            stator = design.stator.drawn(self.stator)
            design = design.model_copy(update={"stator": stator})
        if self.rotor is not None:
            rotor = design.rotor.drawn(self.rotor)
            design = design.model_copy(update={"rotor": rotor})
        return design


@dataclass(frozen=True, slots=True)
class Filled:
    """A design file's data with the drawings' dimensions, and what is wrong with them."""

    data: Data
    outlines: Outlines
    faults: tuple[PlacedFault, ...]
    marks: tuple[DrawingMark, ...]


@dataclass(frozen=True, slots=True)
class _Part:
    """One table after its drawing was read."""

    table: object
    outline: StatorOutline | RotorOutline | None = None
    faults: tuple[PlacedFault, ...] = ()
    marks: tuple[DrawingMark, ...] = ()


def with_outlines(data: Data, folder: Path) -> Filled:
    """The data of a design file with every drawing it names read.

    Args:
        data: as parsed.
        folder: from which the drawings' names count.
    """
    stator = _stator(data.get("stator"), folder)
    rotor = _rotor(data.get("rotor"), stator.table, folder)
    tables = {k: part.table for k, part in (("stator", stator), ("rotor", rotor)) if k in data}
    outlines = Outlines(
        stator.outline if isinstance(stator.outline, StatorOutline) else None,
        rotor.outline if isinstance(rotor.outline, RotorOutline) else None,
    )
    faults = (*stator.faults, *rotor.faults)
    return Filled({**data, **tables}, outlines, faults, (*stator.marks, *rotor.marks))


def _stator(table: object, folder: Path) -> _Part:
    if not isinstance(table, dict):
        return _Part(table)
    if table.get("outline_dxf") is None:
        return _Part(table, faults=_stray(table, "stator", OUTLINE_KEYS))
    keys = _outline_keys(table)
    if keys is None:
        return _Part({**STATOR_FILLERS, **table})
    hints = _hints(table)

    def recognised(pieces: "DrawnPieces") -> StatorOutline:
        from .drawn_stator import recognised_stator

        drawing = recognised_stator(pieces.edges, UM * keys.heal_um, hints)
        return StatorOutline(drawing, source_of(str(keys.outline_dxf), pieces))

    try:
        outline = _STATORS.of(folder, keys, hints, recognised)
    except OutlineError as error:
        return _failed("stator", {**STATOR_FILLERS, **table}, keys, folder, error)
    drawing = outline.drawing
    measures = stator_measures(drawing)
    faults = _unlike("stator", table, measures, STATOR_KEYS, set(StatorDesign.model_fields))
    if drawing.slot.is_parted and table.get("wedge_depth_mm"):
        text = "stator.wedge_depth_mm: the drawing shows where copper begins; leave it out"
        faults = (*faults, (("stator", "wedge_depth_mm"), text))
    filled = {**measures, **table, "slots": table.get("slots", drawing.slots)}
    if drawing.slot.mouth is None:
        filled["slot_mouth"] = "closed"
    return _Part(filled, outline, faults)


def _rotor(table: object, stator: object, folder: Path) -> _Part:
    if not isinstance(table, dict):
        return _Part(table)
    if table.get("outline_dxf") is None:
        return _Part(table, faults=_stray(table, "rotor", (*OUTLINE_KEYS, "q_axis_deg")))
    barrier = {"barrier": (NO_BARRIER,)}
    keys, poles, q_axis = _outline_keys(table), table.get("poles"), table.get("q_axis_deg")
    bore = stator.get("bore_diameter_mm") if isinstance(stator, dict) else None
    is_even = isinstance(poles, int) and not isinstance(poles, bool) and poles in range(2, 25, 2)
    if keys is None or not is_even or not _is_number(bore) or not _is_number(q_axis or 0.0):
        return _Part({**ROTOR_FILLERS, **table, **barrier})
    told = None if q_axis is None else math.radians(_float(q_axis))

    def recognised(pieces: "DrawnPieces") -> RotorOutline:
        from .drawn_rotor import recognised_rotor

        assert isinstance(poles, int)
        axis = pieces.datum if told is None else told
        drawing = recognised_rotor(pieces.edges, UM * keys.heal_um, poles, axis)
        return RotorOutline(drawing, source_of(str(keys.outline_dxf), pieces))

    try:
        outline = _ROTORS.of(folder, keys, (poles, told), recognised)
    except OutlineError as error:
        return _failed("rotor", {**ROTOR_FILLERS, **table, **barrier}, keys, folder, error)
    drawing = outline.drawing
    measures = {
        "shaft_diameter_mm": 2.0 * drawing.shaft_radius / MM,
        "gap_mm": 0.5 * _float(bore) - drawing.rotor_radius / MM,
    }
    faults = _unlike("rotor", table, measures, ROTOR_KEYS, set(RotorDesign.model_fields))
    if measures["gap_mm"] <= 0.0:
        text = (
            f"rotor.outline_dxf: the rotor drawn has {2.0 * drawing.rotor_radius / MM:.6g} mm of "
            f"diameter, the stator's bore {_float(bore):.6g}; accepted a smaller rotor"
        )
        faults = (*faults, (("rotor", "outline_dxf"), text))
    return _Part({**table, **measures, **barrier}, outline, faults)


class _Known(Generic[_Outline]):
    """The last few drawings in which something was recognised, by their content and keys.

    Where a design is changed again and again, as on the page, its drawings stay as they are; to
    read and recognise one takes 0.3 s (measured).
    """

    def __init__(self) -> None:
        """None yet."""
        self._kept: OrderedDict[Hashable, _Outline] = OrderedDict()
        self._lock = threading.Lock()

    def of(
        self,
        folder: Path,
        keys: OutlineKeys,
        hints: Hashable,
        recognised: "Callable[[DrawnPieces], _Outline]",
    ) -> _Outline:
        """The outline in the drawing that the keys name, recognised if it is not known.

        Raises:
            OutlineError: nothing is recognised; that is not kept.
        """
        from .dxf_reader import drawing_bytes, read_pieces

        data = drawing_bytes(folder / str(keys.outline_dxf))
        named = tuple(keys.model_dump().items())
        cause = (hashlib.sha256(data).digest(), named, hints)
        with self._lock:
            if cause in self._kept:
                self._kept.move_to_end(cause)
                return self._kept[cause]
        outline = recognised(read_pieces(data, keys.outline_unit_mm, keys.outline_layers))
        with self._lock:
            self._kept[cause] = outline
            while len(self._kept) > MOST_KEPT:
                self._kept.popitem(last=False)
        return outline


_STATORS: _Known[StatorOutline] = _Known()
_ROTORS: _Known[RotorOutline] = _Known()


def _failed(name: str, table: Data, keys: OutlineKeys, folder: Path, error: OutlineError) -> _Part:
    """The table of a drawing in which nothing was recognised."""
    fault = ((name, "outline_dxf"), f'{name}.outline_dxf = "{keys.outline_dxf}": {error}')
    marks: tuple[DrawingMark, ...] = ()
    if error.place is not None:
        path = folder / str(keys.outline_dxf)
        mark = DrawingMark(path, error.place, fault[1], keys.outline_unit_mm, keys.outline_layers)
        marks = (mark,)
    return _Part(table, None, (fault,), marks)


def _outline_keys(table: Mapping[str, object]) -> OutlineKeys | None:
    try:
        return OutlineKeys.model_validate({k: v for k, v in table.items() if k in OUTLINE_KEYS})
    except ValueError:
        return None


def _stray(table: Mapping[str, object], name: str, keys: Sequence[str]) -> tuple[PlacedFault, ...]:
    return tuple(
        ((name, key), f"{name}.{key}: only with outline_dxf; leave it out")
        for key in keys
        if key in table and key != "outline_dxf"
    )


def _is_number(value: object) -> bool:
    is_number = isinstance(value, int | float) and not isinstance(value, bool)
    return is_number and math.isfinite(_float(value))


def _float(value: object) -> float:
    assert isinstance(value, int | float)
    return float(value)


def _hints(table: Mapping[str, object]) -> "SlotHints":
    from .drawn_slot import SlotHints

    def length(key: str) -> float | None:
        value = table.get(key)
        return MM * _float(value) if _is_number(value) and _float(value) >= 0.0 else None

    return SlotHints(length("opening_depth_mm"), length("wedge_depth_mm") or 0.0)


def _unlike(
    name: str,
    table: Mapping[str, object],
    measures: Mapping[str, float],
    free: Sequence[str],
    known: set[str],
) -> tuple[PlacedFault, ...]:
    """Stated dimensions that are not the drawing's, and keys that the drawing stands for."""
    faults: list[PlacedFault] = []
    for key, value in table.items():
        if key in free or key not in known:
            continue
        if key not in measures:
            text = f"{name}.{key}: the drawing gives the {name}; leave it out"
            faults.append(((name, key), text))
        elif _is_number(value) and abs(_float(value) - measures[key]) > STATED_TOL:
            text = f"{name}.{key} = {value}: the drawing has {measures[key]:.6g}; leave it out"
            faults.append(((name, key), text))
    return tuple(faults)
