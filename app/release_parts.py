"""Rotor and stator of a package as they are delivered: contours, solids, and what they weigh.

Two outlines are kept apart: the tool's (what the DXF holds, every allowance of the order in it) and
the sheet's (what leaves the tool: without the tool's own compensation). Figures and STEP are of the
sheet.
"""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import pi
from typing import Literal

from lamwright.geometry.contours import Contour
from lamwright.geometry.curves import Path, area, perimeter
from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_file import Machine
from lamwright.geometry.dxf_release import bounding_box
from lamwright.geometry.errors import DesignError
from lamwright.geometry.outline_reach import reach
from lamwright.geometry.punch_checks import FAULTS, punch_findings
from lamwright.geometry.punch_layers import rotor_lamination, stator_lamination
from lamwright.geometry.punch_offset import punched
from lamwright.geometry.punch_options import PunchOptions
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.solver.mesh_step import Solid

from .release_manifest import rounded

MM = 1e3  # mm per m
PartName = Literal["rotor", "stator"]


@dataclass(frozen=True, slots=True)
class Part:
    """One lamination and its stack, in SI units."""

    name: PartName
    tool: tuple[Contour, ...]  # as the tool cuts or is made
    sheet: tuple[Contour, ...]  # as it leaves the tool
    thickness: float  # of a sheet
    length: float  # of the stack
    stacking: float  # share of the stack that is steel
    steel: SteelCard
    bore: float  # diameter of the circle about the shaft axis that is free, m
    axis: float  # rad, middle of the first pole or slot
    questions: tuple[str, ...]  # sizes at which a shop will ask, one line each
    turns: tuple[float, ...] = (0.0,)  # rad, of the steps of the stack

    @property
    def area(self) -> float:
        """Of the sheet, m^2: holes run clockwise, their area is negative."""
        return sum(area(contour.path) for contour in self.sheet)

    @property
    def cut_length(self) -> float:
        """Of all contours of the tool, m."""
        return sum(perimeter(contour.path) for contour in self.tool)

    @property
    def sheets(self) -> int:
        """In the stack, to the nearest."""
        return max(1, round(self.length * self.stacking / self.thickness))

    @property
    def sheet_mass(self) -> float:
        """Of one sheet, kg."""
        return self.area * self.thickness * self.steel.density_kg_per_m3.value

    @property
    def stack_mass(self) -> float:
        """Of the stack's steel, kg."""
        return self.area * self.length * self.stacking * self.steel.density_kg_per_m3.value

    @property
    def diameter(self) -> float:
        """Of the circle about the shaft axis that holds the sheet, m."""
        return 2.0 * reach(self.outer)

    @property
    def outer(self) -> Path:
        """The sheet's outer contour."""
        (path,) = (c.path for c in self.sheet if area(c.path) > 0.0)
        return path

    def lamination(self) -> tuple[Solid, ...]:
        """One sheet as a solid."""
        return (self._solid(0.0, self.thickness, 0.0),)

    def stack(self) -> tuple[Solid, ...]:
        """The stack as one solid a step, each turned to its place."""
        high = self.length / len(self.turns)
        return tuple(self._solid(k * high, high, turn) for k, turn in enumerate(self.turns))

    def _solid(self, bottom: float, height: float, turn: float) -> Solid:
        holes = tuple(c.path for c in self.sheet if area(c.path) < 0.0)
        return Solid(self.outer, holes, bottom, height, turn)


def parts_of(machine: Machine, section: CrossSection, options: PunchOptions) -> tuple[Part, ...]:
    """Rotor and stator of a machine with the order's allowances.

    The tool's offset is of both, all else of the rotor alone.

    Raises:
        DesignError: an allowance leaves nothing of a contour or cuts through the steel.
    """
    design = machine.design
    sheet, stacking = design.rotor.sheet_thickness_mm / MM, design.rotor.stacking_factor
    length = section.stack_length

    def part(
        name: PartName,
        contours: Sequence[Contour],
        options: PunchOptions,
        steel: SteelCard,
        bore_radius: float,
        axis: float,
        turns: tuple[float, ...] = (0.0,),
    ) -> Part:
        plain = replace(options, tool_offset_mm=0.0)
        tool, own = punched(contours, options), punched(contours, plain)
        asked = _questions(name, own, design.rotor.sheet_thickness_mm)
        bore = 2.0 * bore_radius
        return Part(name, tool, own, sheet, length, stacking, steel, bore, axis, asked, turns)

    of_stator = PunchOptions(tool_offset_mm=options.tool_offset_mm, corners=options.corners)
    rotor, stator = machine.rotor_steel, machine.stator_steel
    of_rotor, q_axis, slot = rotor_lamination(section), 0.5 * section.pole_angle, pi / section.slots
    shaft, bore = section.shaft_radius, section.stator_bore_radius
    return (
        part("rotor", of_rotor, options, rotor, shaft, q_axis, skew_offsets(design)),
        part("stator", stator_lamination(section), of_stator, stator, bore, slot),
    )


def _questions(name: str, contours: Sequence[Contour], sheet_mm: float) -> tuple[str, ...]:
    """Sizes that a shop will ask about.

    Raises:
        DesignError: the contours cannot be cut at all.
    """
    findings = punch_findings(contours, sheet_mm)
    faults = [f"{name}: {finding.text}" for finding in findings if finding.code in FAULTS]
    if faults:
        raise DesignError("\n".join(faults))
    return tuple(finding.text for finding in findings)


def part_record(part: Part) -> dict[str, object]:
    """What the manifest states of a part, with a unit in every key."""
    corners = bounding_box(part.sheet)
    counts = Counter(contour.layer for contour in part.tool)
    return {
        "material": part.steel.name,
        "density_kg_per_m3": part.steel.density_kg_per_m3.value,
        "sheet_thickness_mm": rounded(part.thickness * MM),
        "sheets": part.sheets,
        "stacking_factor": part.stacking,
        "stack_length_mm": rounded(part.length * MM),
        "skew_steps": len(part.turns),
        "bounding_box_mm": [rounded(MM * x) for p in corners for x in (p.real, p.imag)],
        "sheet_area_mm2": rounded(part.area * MM**2),
        "sheet_mass_g": rounded(part.sheet_mass * 1e3),
        "stack_mass_kg": rounded(part.stack_mass),
        "cut_length_mm": rounded(part.cut_length * MM),
        "cut_length_of_stack_m": rounded(part.cut_length * part.sheets),
        "contours": len(part.tool),
        "contours_by_layer": dict(sorted(counts.items())),
        "to_ask_the_shop": list(part.questions),
    }
