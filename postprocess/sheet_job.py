"""What a drawing for the lamination supplier is made of: design, outline as cut, and wishes."""

from dataclasses import dataclass, field
from typing import Literal

from lamwright.geometry.contours import Contour
from lamwright.geometry.design import MachineDesign, SteelCard
from lamwright.geometry.section import CrossSection

MM = 1e-3  # m
EDGES_OF_A_WIDTH = 2  # both edges of a rib or barrier may be off by the cut's limit


@dataclass(frozen=True, slots=True)
class SheetOptions:
    """What the design does not say; empty or None is drawn as blank, or told as not given.

    Attributes:
        owner: legal owner, a title block's (ISO 7200); empty: left blank for the user.
        part_number: identification number; empty: left blank.
        title: default `Rotor lamination`; the design's name stands below it.
        revision: revision index as text.
        date: date of issue as text; there is no clock in a drawing.
        creator: who made the drawing.
        approved_by: who approved it.
        status: of the document, as `released`.
        bore_fit: ISO 286 tolerance class of the bore, as `H7`.
        outer_fit: ISO 286 class of the outer diameter, as `h8`; empty: general tolerance.
        key_fit: ISO 286 class of a keyway's width, as `JS9`.
        stator_bore_fit: ISO 286 class of the stator's bore, which makes the air gap.
        stator_outer_fit: ISO 286 class of the stator's outer diameter; empty: general tolerance.
        general_tolerance: class `f`, `m`, `c` or `v` of ISO 2768-1, or any text as given, which is
            then printed as it stands.
        rib_tolerance_mm: limit to both sides of rib widths and barrier thicknesses; default twice
            the design's `tolerance.cut_mm`, since either edge may be off by it.
        burr_side: `near` (the side seen) or `far`; empty: not given.
        burr_mm: most height of a burr; None: not given.
        rolling_direction: note on the rolling direction; empty: not given.
        warning: stands first in the frame of cautions, in bold; empty: none.
        remarks: further notes, one line each, as of a tool's compensation in the outline.
        paper: `A4`, `A3` or `A2`; empty: the smallest on which all views find room.
    """

    owner: str = ""
    part_number: str = ""
    title: str = ""
    revision: str = ""
    date: str = ""
    creator: str = ""
    approved_by: str = ""
    status: str = ""
    bore_fit: str = "H7"
    outer_fit: str = ""
    key_fit: str = "JS9"
    stator_bore_fit: str = "H8"
    stator_outer_fit: str = ""
    general_tolerance: str = "m"
    rib_tolerance_mm: float | None = None
    burr_side: str = ""
    burr_mm: float | None = None
    rolling_direction: str = ""
    warning: str = ""
    remarks: tuple[str, ...] = ()
    paper: str = ""


@dataclass(frozen=True, slots=True)
class SheetJob:
    """A drawing's contents: everything measured is measured from `contours`.

    Attributes:
        design: for the stack, sheet thickness, tolerances and note.
        section: names and places of ribs and barriers; any sector.
        contours: of the whole lamination as cut, in m, layers as in `geometry.contours`, of a
            stator as in `geometry.punch_layers`.
        steel: the part's steel card, for the material's name and the mass.
        design_hash: SHA-256 in hex.
        options: what the design does not say.
        part: which lamination is drawn.
    """

    design: MachineDesign
    section: CrossSection
    contours: tuple[Contour, ...]
    steel: SteelCard
    design_hash: str
    options: SheetOptions = field(default_factory=SheetOptions)
    part: Literal["rotor", "stator"] = "rotor"

    @property
    def title(self) -> str:
        """Of the drawing."""
        wished = self.options.title
        if self.part == "rotor":
            return wished or "Rotor lamination"
        return f"{wished}, stator" if wished else "Stator lamination"

    @property
    def width_limit(self) -> float:
        """Limit to both sides of widths between two cuts (ribs, barriers, teeth, slots), in mm."""
        stated = self.options.rib_tolerance_mm if self.part == "rotor" else None
        return EDGES_OF_A_WIDTH * self.design.tolerance.cut_mm if stated is None else stated
