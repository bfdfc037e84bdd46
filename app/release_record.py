"""What a manifest states, made from the design alone: `verify` makes it again and compares.

The rotor is taken to be punched out of the stator's bore by the same combined die, as is usual
(common practice, no source): one blank of the stator's outer diameter gives a sheet of each.
"""

from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, field

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.errors import DesignError
from lamwright.geometry.nesting import Nest, Strip, nests
from lamwright.geometry.punch_options import PunchOptions
from lamwright.postprocess.sheet_job import SheetOptions

from .release_manifest import (
    FORM,
    NOT_PASSED,
    PASSED,
    Promise,
    Record,
    promised_figures,
    rounded,
)
from .release_parts import Part, part_record
from .release_solids import kernel
from .version import version

MM = 1e3  # mm per m
NO_STRIP = "not given: no strip width was stated"
COMBINED_DIE = "the rotor is punched out of the stator's bore, one blank for a sheet of each"
OF_SCRAP = "all of the strip that is not in the two sheets: slots, barriers, bores and bridges"
OF_STEEL = "of the laminations alone: no shaft, magnets, copper or rivets"


@dataclass(frozen=True, slots=True)
class Order:
    """What the order adds to the design."""

    punch: PunchOptions = field(default_factory=PunchOptions)
    sheet: SheetOptions = field(default_factory=SheetOptions)
    strip: Strip | None = None


def release_record(
    machine: Machine, parts: Sequence[Part], promise: Promise, order: Order
) -> Record:
    """The manifest but for the places and hashes of files, and its seal.

    Raises:
        DesignError: the rotor does not come out of the stator's bore.
        LamwrightError: the strip is too narrow.
    """
    return {
        "package": "lamination package by Lamwright",
        "form": FORM,
        "version": version(),
        "kernel": kernel(),
        "design": machine.design.name,
        "design_hash": design_hash(machine.design, machine.cards),
        "revision": order.sheet.revision,
        "date": order.sheet.date,
        "status": PASSED if promise.passes else NOT_PASSED,
        "limits_missed": list(promise.missed),
        "limits": machine.design.limits.model_dump(),
        "promised": promised_figures(promise.record),
        "punch": asdict(order.punch),
        "drawing": {**asdict(order.sheet), "remarks": list(order.sheet.remarks)},
        "parts": {part.name: part_record(part) for part in parts},
        "masses": OF_STEEL,
        "nesting": nesting_record(parts, order.strip),
        "cautions": _cautions(promise, order.punch),
    }


def nesting_record(parts: Sequence[Part], strip: Strip | None) -> Record | str:
    """Layouts of the blanks in a strip, the one with the least scrap first.

    Raises:
        DesignError: the rotor does not come out of the stator's bore.
        LamwrightError: the strip is too narrow.
    """
    if strip is None:
        return NO_STRIP
    rotor, stator = parts
    if rotor.diameter >= stator.bore:
        raise DesignError(
            f"grinding_allowance_mm: the rotor's blank of {MM * rotor.diameter:.6g} mm does not "
            f"come out of the stator's bore of {MM * stator.bore:.6g}; accepted a smaller "
            "allowance, or no --strip-width"
        )
    used = rotor.area + stator.area
    return {
        "blanks": COMBINED_DIE,
        "scrap": OF_SCRAP,
        "blank_diameter_mm": rounded(stator.diameter * MM),
        "strip_width_mm": rounded(strip.width * MM),
        "bridge_mm": rounded(strip.bridge * MM),
        "edge_mm": rounded(strip.edge * MM),
        "layouts": [
            _nest_record(nest, strip, used, stator) for nest in nests(stator.diameter, strip)
        ],
    }


def _nest_record(nest: Nest, strip: Strip, used: float, part: Part) -> Record:
    surface = nest.strip_area(strip)
    mass = surface * part.thickness * part.steel.density_kg_per_m3.value
    return {
        "layout": nest.kind,
        "rows": nest.rows,
        "pitch_mm": rounded(nest.pitch * MM),
        "row_distance_mm": rounded(nest.row_distance * MM),
        "strip_area_per_blank_mm2": rounded(surface * MM**2),
        "scrap_percent": rounded(100.0 * nest.scrap_share(strip, used)),
        "strip_mass_per_blank_g": rounded(mass * 1e3),
        "strip_mass_per_machine_kg": rounded(mass * part.sheets),
        "strip_length_per_machine_m": rounded(nest.pitch / nest.rows * part.sheets),
    }


def _cautions(promise: Promise, punch: PunchOptions) -> list[str]:
    """What a reader of the package must know, the worst first."""
    lines = []
    if not promise.passes:
        lines.append(
            f"NOT PASSED: the design fails {', '.join(promise.missed)}; not for running rotors"
        )
    if punch.tool_offset_mm:
        lines.append(
            f"the DXF holds the tool's path, {punch.tool_offset_mm:g} mm off the sheet; drawing, "
            "solids and figures are of the sheet"
        )
    if punch.grinding_allowance_mm:
        lines.append(
            f"the rotor's outer diameter has {punch.grinding_allowance_mm:g} mm to be ground off "
            "after stacking; promised figures are of the ground rotor"
        )
    if punch.magnet_clearance_mm:
        lines.append(
            f"magnet pockets are {punch.magnet_clearance_mm:g} mm wider all round than analysed, "
            "ribs beside them thinner by as much: the stress promised is not theirs"
        )
    stated = promise.record.get("cautions")
    return [*lines, *(str(line) for line in stated)] if isinstance(stated, list) else lines


def differences(stated: object, made: object, key: str = "") -> list[str]:
    """One line for each place where a record is not what it should be."""
    if isinstance(stated, Mapping) and isinstance(made, Mapping):
        lines = []
        for name in dict.fromkeys((*made, *stated)):
            inner = f"{key}.{name}" if key else str(name)
            if name not in stated:
                lines.append(f"{inner}: missing")
            elif name not in made:
                lines.append(f"{inner}: not a key of this manifest")
            else:
                lines += differences(stated[name], made[name], inner)
        return lines
    if isinstance(stated, list) and isinstance(made, list) and len(stated) == len(made):
        pairs = enumerate(zip(stated, made, strict=True), start=1)
        return [line for k, (a, b) in pairs for line in differences(a, b, f"{key}[{k}]")]
    is_same = type(stated) is type(made) or _are_numbers(stated, made)
    return [] if is_same and stated == made else [f"{key} = {_shown(stated)}: made {_shown(made)}"]


def _are_numbers(*values: object) -> bool:
    return all(isinstance(v, int | float) and not isinstance(v, bool) for v in values)


def _shown(value: object) -> str:
    text = repr(value)
    return text if len(text) <= 60 else f"{text[:57]}..."
