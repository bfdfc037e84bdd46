"""Checks of magnet blocks: whether each fits its barrier, and whether magnets and card are there.

Done on the drawn rotor without its magnets, once nothing else is at fault.
"""

from collections.abc import Sequence

from .curves import Path, turned
from .design import BarrierDesign, BarrierMagnetDesign, MachineDesign
from .distances import distance
from .errors import Finding
from .magnets import MM, Block, NoRoom, magnet_blocks
from .remedies import Fault, barrier_key
from .rotor import rotor_frame, rotor_regions

SLACK = 1e-9  # m, a size is let miss its limit by rounding
NO_PLACE = 1.0  # lack of a block without a place: more than any that has one


def has_magnets(design: MachineDesign) -> bool:
    """Whether any barrier holds a magnet."""
    return _first_magnet(design) is not None


def _first_magnet(design: MachineDesign) -> tuple[str, BarrierMagnetDesign] | None:
    """The table and the first magnet of the pole, or else of every second pole."""
    rotor = design.rotor
    for name, barriers in (
        ("barrier", rotor.barrier),
        ("alternate_barrier", rotor.alternate_barrier),
    ):
        for number, barrier in enumerate(barriers, start=1):
            if barrier.magnet is not None:
                return f"rotor.{name}[{number}].magnet", barrier.magnet
    return None


def magnet_faults(design: MachineDesign) -> list[Fault]:
    """All faults of the blocks in their barriers; the barriers themselves must be sound."""
    if not has_magnets(design):
        return []
    try:
        regions, _ = rotor_regions(_without_magnets(design))
    except ValueError:  # the barriers' own checks tell
        return []
    q_axis = rotor_frame(design).q_axis
    faults = []
    for number, barrier in enumerate(design.rotor.barrier, start=1):
        name = f"barrier_{number}"
        cavities = [
            turned(region.outer, -q_axis)
            for region in regions
            if region.name == name or region.name.startswith(f"{name}_")
        ]
        if barrier.magnet is not None:
            sheet = MM * design.rotor.sheet_thickness_mm
            faults += _block_faults(number, barrier.magnet, cavities, sheet)
    return faults


def magnet_findings(design: MachineDesign) -> list[Finding]:
    """Magnets without a card, a card without magnets, and keys that need them."""
    found = []
    first = _first_magnet(design)
    if first is not None and design.magnet is None:
        key, width = f"{first[0]}.width_mm", first[1].width_mm
        remedy = "add a table [magnet] with card and temperature_c"
        found.append(Finding("magnet_card_missing", key, width, "no magnet card", remedy))
    if first is not None:
        return found
    if design.magnet is not None:
        remedy = "remove the table [magnet], or add [rotor.barrier.magnet] to a barrier"
        value = design.magnet.temperature_c
        text = "no barrier holds a magnet"
        found.append(Finding("magnet_unused", "magnet.temperature_c", value, text, remedy))
    current = design.duty.demagnetising_current_a
    if current is not None:
        key, text = "duty.demagnetising_current_a", "no barrier holds a magnet"
        found.append(Finding("magnet_unused", key, current, text, "remove it"))
    return found


def _without_magnets(design: MachineDesign) -> MachineDesign:
    def bare(barrier: BarrierDesign) -> BarrierDesign:
        return barrier.model_copy(update={"magnet": None})

    rotor = design.rotor
    empty = tuple(bare(barrier) for barrier in rotor.barrier)
    return design.model_copy(update={"rotor": rotor.model_copy(update={"barrier": empty})})


def _block_faults(
    number: int, magnet: BarrierMagnetDesign, cavities: Sequence[Path], sheet: float
) -> list[Fault]:
    names = ["width_mm", "clearance_mm"]
    if magnet.thickness_mm is not None:
        names.insert(0, "thickness_mm")
    names.append("offset_mm")
    keys = tuple(barrier_key(number, f"magnet.{name}") for name in names)
    try:
        blocks = magnet_blocks(magnet, cavities)
    except NoRoom as reason:
        first = keys if str(reason).startswith("nothing") else keys[::-1]
        return [Fault("magnet_place", first, f"no place for the magnet: {reason}", NO_PLACE)]
    clearance = MM * magnet.clearance_mm
    left = min(distance(b.path.edges, cavities[b.cavity].edges) for b in blocks)
    faults = []
    if clearance - left > SLACK:
        text = f"the magnet reaches beyond its barrier or its clearance ({left / MM:.3g} mm left)"
        faults.append(Fault("magnet_fit", keys, text, clearance - left))
    thin = sheet - min(_thickness(block) for block in blocks)
    if thin > SLACK:
        text = f"the magnet is thinner than the sheet ({sheet / MM:g} mm)"
        faults.append(Fault("magnet_thin", keys, text, thin))
    if len(blocks) > 1 and blocks[0].cavity == blocks[1].cavity:
        near = clearance - distance(blocks[0].path.edges, blocks[1].path.edges)
        pair = tuple(barrier_key(number, f"magnet.{name}") for name in ("offset_mm", "width_mm"))
        if near > SLACK:
            text = "the two magnets of the pair touch or come nearer than their clearance"
            faults.append(Fault("magnets_close", pair, text, near))
    return faults


def _thickness(block: Block) -> float:
    return block.path.edges[0].length
