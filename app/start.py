"""A first design for a stator: `start` gathers what it needs, lays the rotor out, and writes it.

The ribs follow a formula; the stress solution then tells what margin they really have, and where
it is short they are laid out for more. That takes about a second. No field is solved.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.errors import DesignError, LamwrightError
from lamwright.geometry.first_design import FirstDesign, first_design
from lamwright.geometry.first_notes import checked_tables
from lamwright.geometry.first_source import (
    StatorSource,
    from_drawing,
    from_file,
    from_sizes,
    relative_name,
)
from lamwright.geometry.first_stator import MainSizes
from lamwright.geometry.first_text import design_text
from lamwright.geometry.first_wishes import AIMED_MARGIN, RPM, Wishes, usual_gap, usual_shaft
from lamwright.geometry.whole_file import write_text

MM = 1e-3  # m
STACKING = 0.97
MOST_ROUNDS = 4
LEAST_MARGIN = 1.0  # of the stress solution
ROUND_UP = 1.02  # on the ribs' next margin, so that rounds come to an end
STRESS_TOLERANCE = 0.05  # of the peak, relative
DEMO_CARD = Path(__file__).resolve().parent.parent / "designs" / "steel" / "demo_050.toml"


@dataclass(frozen=True, slots=True)
class StartChoices:
    """What `start` is told, in the units of the command line; None where it is to choose."""

    out: Path
    poles: int
    maximum_speed_rpm: float
    stator: Path | None = None
    outer_diameter_mm: float | None = None
    bore_mm: float | None = None
    length_mm: float | None = None
    slots: int | None = None
    unit_mm: float | None = None
    barriers: int | None = None
    rated_speed_rpm: float | None = None
    voltage_v: float = 400.0
    gap_mm: float | None = None
    shaft_mm: float | None = None
    sheet_mm: float = 0.5
    rib_factor: float = 1.2
    steel: Path | None = None
    name: str | None = None
    is_replacing: bool = False


@dataclass(frozen=True, slots=True)
class StartReport:
    """What `start` has written."""

    path: Path
    first: FirstDesign
    yield_margin: float  # at overspeed, by the stress solution
    rounds: int  # times the ribs were laid out


def choices_of(values: Mapping[str, object]) -> StartChoices:
    """The choices by their names, as the command line has them."""
    return StartChoices(**values)  # type: ignore[arg-type]


def start(choices: StartChoices) -> StartReport:
    """Lay out a first design and write its file.

    Raises:
        DesignError: the choices do not fit together; one line.
        LamwrightError: the file is there already.
    """
    _raise_if_bad(choices)
    wishes = wishes_of(choices)
    first, margin, rounds = laid_out(wishes)
    tables = checked_tables(first.tables, margin)
    write_text(choices.out, design_text(tables, head_comment(choices)))
    return StartReport(choices.out, first, margin, rounds)


def laid_out(wishes: Wishes) -> tuple[FirstDesign, float, int]:
    """The first design whose ribs have the aimed margin, that margin, and the rounds it took.

    Where no layout has it, the one with the largest margin above one.

    Raises:
        DesignError: no rotor is found.
    """
    best: tuple[FirstDesign, float, int] | None = None
    for count in range(1, MOST_ROUNDS + 1):
        try:
            first = first_design(wishes)
        except DesignError:
            if best is None:
                raise
            break  # no thicker ribs can be laid out
        margin = yield_margin(first, wishes)
        if best is None or margin > best[1]:
            best = (first, margin, count)
        if margin >= AIMED_MARGIN:
            break
        more = ROUND_UP * wishes.rib_margin * AIMED_MARGIN / margin
        wishes = replace(wishes, rib_margin=more)
    assert best is not None
    if best[1] >= LEAST_MARGIN:
        return best
    raise DesignError(
        f"no rotor found for {wishes.poles} poles at {RPM * wishes.maximum_speed:g} rpm: by the "
        f"stress solution the strongest ribs laid out have a yield margin of {best[1]:.2f} at "
        "overspeed; try a lower maximum speed or stronger steel"
    )


def yield_margin(first: FirstDesign, wishes: Wishes) -> float:
    """Yield strength over the greatest stress at overspeed."""
    from lamwright.solver.rotor_stress import StressSettings, rotor_stress

    duty = first.design.duty
    speed = duty.overspeed_factor * duty.maximum_speed_rpm / RPM
    settings = StressSettings(tolerance=STRESS_TOLERANCE)
    solution = rotor_stress(cross_section(first.design), wishes.steel, speed, settings)
    return 1e6 * wishes.steel.yield_strength_mpa.value / solution.peak


def wishes_of(choices: StartChoices) -> Wishes:
    """The choices in SI with what was left open filled in.

    Raises:
        DesignError: stator or steel cannot be read; one line for each fault.
    """
    folder = choices.out.parent
    source = _source(choices, folder)
    card = choices.steel or DEMO_CARD
    if choices.steel is None and not card.is_file():
        raise DesignError("steel: the demo card is not there; accepted --steel with a card's name")
    bore, poles = MM * source.stator.bore_diameter_mm, choices.poles
    gap = usual_gap(bore) if choices.gap_mm is None else MM * choices.gap_mm
    shaft = usual_shaft(bore, poles) if choices.shaft_mm is None else MM * choices.shaft_mm
    rated = choices.rated_speed_rpm or 0.5 * choices.maximum_speed_rpm
    return Wishes(
        name=choices.name or choices.out.stem.replace("_", " "),
        stator=source.stator,
        stator_table=source.table,
        winding_table=source.winding if source.poles in (None, poles) else None,
        poles=poles,
        maximum_speed=choices.maximum_speed_rpm / RPM,
        rated_speed=rated / RPM,
        supply_voltage=choices.voltage_v,
        barriers=choices.barriers,
        gap=gap,
        shaft_diameter=shaft,
        sheet=MM * choices.sheet_mm,
        rib_factor=choices.rib_factor,
        steel=read_steel_card(card),
        steel_file=relative_name(card, folder),
    )


def head_comment(choices: StartChoices) -> str:
    """What stands at the head of the file."""
    source = "its main sizes" if choices.stator is None else choices.stator.name
    return (
        f"First design for a stator from {source}, {choices.poles} poles, up to "
        f"{choices.maximum_speed_rpm:g} rpm, by published rules and stated assumptions. It is a "
        "start: assess it, then change it. Rotors burst: nothing here replaces a qualified "
        "engineer's judgement and an overspeed test."
    )


def _source(choices: StartChoices, folder: Path) -> StatorSource:
    path = choices.stator
    if path is not None and path.suffix.lower() == ".dxf":
        length = _needed("length", choices.length_mm)
        return from_drawing(path, MM * length, choices.unit_mm, folder)
    if path is not None:
        return from_file(path, folder)
    sizes = MainSizes(
        MM * _needed("outer-diameter", choices.outer_diameter_mm),
        MM * _needed("bore", choices.bore_mm),
        MM * _needed("length", choices.length_mm),
        round(_needed("slots", choices.slots)),
    )
    if sizes.bore_diameter >= sizes.outer_diameter:
        bore, outer = sizes.bore_diameter / MM, sizes.outer_diameter / MM
        raise DesignError(
            f"bore = {bore:g}: not inside the outer diameter; accepted below {outer:g}"
        )
    return from_sizes(sizes, choices.poles, MM * choices.sheet_mm, STACKING)


def _needed(name: str, value: float | None) -> float:
    if value is None:
        raise DesignError(f"{name}: missing; accepted --stator FILE, or --{name} with its value")
    return value


def _raise_if_bad(choices: StartChoices) -> None:
    """Single values that no machine has, and a file that is there already."""
    ranges = (
        ("poles", choices.poles, 2, 24),
        ("max-speed", choices.maximum_speed_rpm, 1.0, 1e6),
        ("outer-diameter", choices.outer_diameter_mm, 5.0, 2e4),
        ("bore", choices.bore_mm, 2.0, 2e4),
        ("length", choices.length_mm, 0.1, 1e5),
        ("slots", choices.slots, 3, 144),
        ("unit-mm", choices.unit_mm, 1e-6, 1e6),
        ("barriers", choices.barriers, 1, 6),
        ("rated-speed", choices.rated_speed_rpm, 1.0, choices.maximum_speed_rpm),
        ("voltage", choices.voltage_v, 1.0, 1e5),
        ("gap", choices.gap_mm, 0.02, 100.0),
        ("shaft", choices.shaft_mm, 0.1, 2e4),
        ("sheet", choices.sheet_mm, 0.02, 5.0),
        ("rib-factor", choices.rib_factor, 1.0, 5.0),
    )
    for name, value, least, most in ranges:
        if value is not None and not least <= value <= most:
            raise DesignError(f"{name} = {value:g}: out of range; accepted {least:g} to {most:g}")
    if choices.poles % 2:
        near = f"{choices.poles - 1} or {choices.poles + 1}"
        raise DesignError(f"poles = {choices.poles}: poles come in pairs; accepted {near}")
    if choices.out.exists() and not choices.is_replacing:
        raise LamwrightError(f"{choices.out}: is there already; accepted --replace, or a new name")
    if not choices.out.parent.is_dir():
        raise LamwrightError(f"{choices.out.parent}: no such folder; accepted one that is there")
