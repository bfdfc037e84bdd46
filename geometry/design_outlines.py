"""Parts of a design taken from drawings: read, recognised, and their dimensions put into the keys.

A table with `outline_dxf` states no shape of its own. What the drawing shows is put in before the
tables are validated, so that every later step finds whole tables; a dimension that the design
states all the same must be the drawing's.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from .design import MachineDesign
from .design_drawing import OutlineKeys
from .drawn_slot import SlotHints
from .drawn_stator import recognised_stator
from .dxf_reader import read_pieces
from .errors import DrawingMark, OutlineError
from .key_lines import KeyPath
from .outline_report import StatorOutline, source_of, stator_measures

MM = 1e-3  # m
UM = 1e-6  # m
STATED_TOL = 0.02  # mm, a stated dimension may miss the drawing's by this
OUTLINE_KEYS = tuple(OutlineKeys.model_fields)
# What a drawn stator's table may state beside the drawing.
STATOR_KEYS = (*OUTLINE_KEYS, "stack_length_mm", "wedge_depth_mm", "opening_depth_mm")
FILLER = 1.0  # where the keys are faulty and the design is about to be refused for it

Data = dict[str, object]
PlacedFault = tuple[KeyPath, str]


@dataclass(frozen=True, slots=True)
class Outlines:
    """What the drawings of a design hold."""

    stator: StatorOutline | None = None

    def put_into(self, design: MachineDesign) -> MachineDesign:
        """The design with its drawn parts."""
        if self.stator is not None:
            stator = design.stator.drawn(self.stator)
            design = design.model_copy(update={"stator": stator})
        return design


@dataclass(frozen=True, slots=True)
class Filled:
    """A design file's data with the drawings' dimensions, and what is wrong with them."""

    data: Data
    outlines: Outlines
    faults: tuple[PlacedFault, ...]
    marks: tuple[DrawingMark, ...]


def with_outlines(data: Data, folder: Path) -> Filled:
    """The data of a design file with every drawing it names read.

    Args:
        data: as parsed.
        folder: from which the drawings' names count.
    """
    table = data.get("stator")
    if not isinstance(table, dict):
        return Filled(data, Outlines(), (), ())
    if table.get("outline_dxf") is None:
        return Filled(data, Outlines(), _stray(table, "stator"), ())
    keys = _outline_keys(table)
    if keys is None:
        return Filled({**data, "stator": {**_fillers(), **table}}, Outlines(), (), ())
    file = str(keys.outline_dxf)
    try:
        pieces = read_pieces(folder / file, keys.outline_unit_mm, keys.outline_layers)
        drawing = recognised_stator(pieces.edges, UM * keys.heal_um, _hints(table))
    except OutlineError as error:
        fault = (("stator", "outline_dxf"), f'stator.outline_dxf = "{file}": {error}')
        marks = _marks(folder / file, keys, error)
        return Filled({**data, "stator": {**_fillers(), **table}}, Outlines(), (fault,), marks)
    measures = stator_measures(drawing)
    faults = _unlike(table, measures)
    filled = {**measures, **table, "slots": table.get("slots", drawing.slots)}
    outline = StatorOutline(drawing, source_of(file, pieces))
    return Filled({**data, "stator": filled}, Outlines(outline), faults, ())


def _outline_keys(table: Mapping[str, object]) -> OutlineKeys | None:
    try:
        return OutlineKeys.model_validate({k: v for k, v in table.items() if k in OUTLINE_KEYS})
    except ValueError:
        return None


def _stray(table: Mapping[str, object], name: str) -> tuple[PlacedFault, ...]:
    return tuple(
        ((name, key), f"{name}.{key}: only with outline_dxf; leave it out")
        for key in OUTLINE_KEYS
        if key in table
    )


def _hints(table: Mapping[str, object]) -> SlotHints:
    def length(key: str) -> float | None:
        value = table.get(key)
        is_number = isinstance(value, int | float) and not isinstance(value, bool)
        return MM * float(value) if is_number and value >= 0 else None  # type: ignore[arg-type,operator]

    return SlotHints(length("opening_depth_mm"), length("wedge_depth_mm") or 0.0)


def _unlike(table: Mapping[str, object], measures: Mapping[str, float]) -> tuple[PlacedFault, ...]:
    """Stated dimensions that are not the drawing's, and keys that the drawing stands for."""
    faults: list[PlacedFault] = []
    for key, value in table.items():
        place = ("stator", key)
        if key in STATOR_KEYS:
            continue
        if key not in measures:
            if key in _shape_keys():
                text = f"stator.{key}: the drawing gives the slot; leave it out"
                faults.append((place, text))
            continue
        is_number = isinstance(value, int | float) and not isinstance(value, bool)
        if is_number and abs(value - measures[key]) > STATED_TOL:  # type: ignore[operator]
            text = f"stator.{key} = {value}: the drawing has {measures[key]:.6g}; leave it out"
            faults.append((place, text))
    return tuple(faults)


def _shape_keys() -> set[str]:
    from .design import StatorDesign

    return set(StatorDesign.model_fields)


def _fillers() -> dict[str, object]:
    return {
        "outer_diameter_mm": 3.0,
        "bore_diameter_mm": 2.0,
        "slots": 12,
        "tooth_width_mm": FILLER,
        "slot_depth_mm": FILLER,
        "slot_opening_mm": FILLER,
        "opening_depth_mm": FILLER,
    }


def _marks(path: Path, keys: OutlineKeys, error: OutlineError) -> tuple[DrawingMark, ...]:
    if error.place is None:
        return ()
    mark = DrawingMark(path, error.place, str(error), keys.outline_unit_mm, keys.outline_layers)
    return (mark,)
