"""Keys of the lengths and angles of notches, holes, keyway and contour that can be moved alone."""

from .design import MachineDesign
from .design_table import Table

ON_AXIS_DEG = 1e-7  # of an angle that is meant to be that of an axis


def detail_keys(design: MachineDesign) -> list[str]:
    """Keys in use, stated or by default; the angle of a detail on an axis cannot leave it."""
    rotor = design.rotor
    keys: list[str] = []
    for table, parts in (("notch", rotor.notch), ("hole", rotor.hole)):
        for number, part in enumerate(parts, start=1):
            keys += _keys(design, f"rotor.{table}[{number}]", part)
    for table, one in (("keyway", rotor.keyway), ("contour", rotor.contour)):
        if one is not None:
            keys += _keys(design, f"rotor.{table}", one)
    return keys


def _keys(design: MachineDesign, table: str, part: Table) -> list[str]:
    names = [name for name in type(part).model_fields if name.endswith(("_mm", "_deg"))]
    return [
        f"{table}.{name}"
        for name in names
        if getattr(part, name) is not None and not _is_on_axis(design, name, getattr(part, name))
    ]


def _is_on_axis(design: MachineDesign, name: str, value: float) -> bool:
    half_pitch = 90.0 / design.pole_pairs
    on_axis = min(abs(value), abs(value - half_pitch)) < ON_AXIS_DEG
    return name == "angle_deg" and on_axis
