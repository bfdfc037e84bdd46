"""Questions that `start` asks on a terminal, and the values it takes where nobody is asked."""

import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TypeVar

import click

from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.stator_file import read_stator

from .start import StartReport

DEFAULT_POLES = 4
DEFAULT_SPEED = 3000.0  # 1/min
CHOOSE = "choose"

_T = TypeVar("_T")
Values = dict[str, object]  # by the names of `StartChoices`


def is_asking(assume_yes: bool) -> bool:
    """Whether somebody can answer."""
    return not assume_yes and sys.stdin.isatty()


def completed(values: Values, asking: bool) -> tuple[Values, tuple[str, ...]]:
    """The options with what was missing asked for or taken by default.

    Args:
        values: as given on the command line, None where an option is missing.
        asking: whether to ask.

    Returns:
        The values, and one line for each default taken.
    """
    whole, taken = dict(values), []

    def fill(key: str, question: str, kind: type[_T], default: _T) -> None:
        if whole[key] is None:
            whole[key] = click.prompt(question, type=kind, default=default) if asking else default
            if not asking:
                taken.append(f"{question}: {default}")

    if asking:
        _ask_stator(whole)
    fill("poles", "poles", int, _poles_of_file(whole["stator"]) or DEFAULT_POLES)
    fill("maximum_speed_rpm", "maximum speed, rpm", float, DEFAULT_SPEED)
    speed = whole["maximum_speed_rpm"]
    assert isinstance(speed, float | int)
    fill("rated_speed_rpm", "rated speed, rpm", float, 0.5 * speed)
    fill("voltage_v", "supply voltage between lines, V rms", float, 400.0)
    _fill_barriers(whole, asking, taken.append)
    return whole, tuple(taken)


def _poles_of_file(stator: object) -> int | None:
    """Poles that a design file with the stator has."""
    if not isinstance(stator, Path) or stator.suffix.lower() == ".dxf":
        return None
    return read_stator(stator).poles


def print_start(report: StartReport, taken: Sequence[str]) -> None:
    """What was laid out, which defaults were taken, and what to do next."""
    design, rotor = report.first.design, report.first.rotor.taken
    if taken:
        click.echo(f"taken by default: {'; '.join(taken)}")
    ends = ", ".join(f"{one.table.end_angle_deg:g}" for one in rotor.barriers)
    slots = design.stator.slots / design.pole_pairs
    rule = ", which the published rule is against" if rotor.is_avoided else ""
    ribs = ", ".join(_ribs(one.table) for one in rotor.barriers)
    rows = (
        ("barriers of a pole", f"{rotor.spread.barriers}, ends at {ends} deg from the q axis"),
        ("barrier ends", f"on {rotor.spread.places} places a pole pair, {slots:g} slots{rule}"),
        ("ripple", f"{100.0 * rotor.estimate.ripple:.0f} % by a linear model that only ranks"),
        ("ribs", f"{ribs} mm"),
        ("yield margin at overspeed", f"{report.yield_margin:.2f} by the stress solution"),
        (
            "winding",
            f"{design.winding.turns_per_coil} turns a coil, {design.duty.rated_current_a:g} A peak",
        ),
    )
    click.echo(f"{design.name}: {design.stator.slots} slots, {design.rotor.poles} poles")
    left = max(len(label) for label, _ in rows)
    for label, text in rows:
        click.echo(f"  {label:<{left}}  {text}")
    click.echo(f"first design: {report.path}")


def _ribs(barrier: BarrierDesign) -> str:
    if barrier.radial_rib_mm is None:
        return f"{barrier.tangential_rib_mm:g}"
    return f"{barrier.tangential_rib_mm:g} + radial {barrier.radial_rib_mm:g}"


def _ask_stator(whole: Values) -> None:
    """Where the stator comes from, as far as the options do not say."""
    sizes = {
        "outer_diameter_mm": "stator outer diameter, mm",
        "bore_mm": "stator bore, mm",
        "length_mm": "stack length, mm",
        "slots": "slots",
    }
    if whole["stator"] is None and all(whole[key] is None for key in sizes):
        file = click.prompt("stator file (TOML or DXF), empty for main sizes", default="")
        whole["stator"] = Path(file) if file else None
    stator = whole["stator"]
    if isinstance(stator, Path):
        sizes = {"length_mm": sizes["length_mm"]} if stator.suffix.lower() == ".dxf" else {}
    for key, question in sizes.items():
        if whole[key] is None:
            whole[key] = click.prompt(question, type=int if key == "slots" else float)


def _fill_barriers(whole: Values, asking: bool, tell: Callable[[str], None]) -> None:
    if whole["barriers"] is not None:
        return
    if not asking:
        tell(f"barriers of a pole: {CHOOSE}")
        return
    choices = click.Choice([CHOOSE, "1", "2", "3", "4", "5", "6"])
    answer = click.prompt("barriers of a pole", type=choices, default=CHOOSE)
    whole["barriers"] = None if answer == CHOOSE else int(answer)
