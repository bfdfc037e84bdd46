"""A design as a notebook shows it, and the table that all values shown there share.

Every text is escaped: names and notes come from files of others. Looks are stated in each element,
without ids or classes, so that nothing of one cell meets another's.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from html import escape
from typing import TYPE_CHECKING

from .cross_section import cross_section
from .errors import LamwrightError
from .palette import ACCENT
from .pole_svg import pole_svg

if TYPE_CHECKING:
    from .design import MachineDesign
    from .design_file import Machine


@dataclass(frozen=True, slots=True)
class Loud:
    """A text to be seen first: a limit that is missed."""

    text: str


_CELL = "text-align:{};padding:2px 10px 2px 0;border:0"


def design_html(design: "MachineDesign") -> str:
    """Drawing of the pole beside the main figures of a design; why, where it cannot be drawn."""
    try:
        section = cross_section(design)
    except LamwrightError as error:
        lines = "<br>".join(escape(line) for line in str(error).splitlines())
        edge = f"border-left:4px solid {ACCENT};padding-left:8px"
        picture = f'<p style="{edge}">cannot be drawn:<br>{lines}</p>'
    else:
        shown = "one pole" if section.sector_poles == 1 else f"{section.sector_poles} poles"
        label = f"{design.name}: {shown} in section, ribs marked where they are thinnest"
        picture = pole_svg(section, label)
    facts = html_table(("", ""), [(key, value) for key, value in _facts(design)])
    note = f"<p>{escape(design.note)}</p>" if design.note else ""
    return (
        f"<div><p><b>{escape(design.name)}</b></p>{note}"
        f'<div style="display:flex;flex-wrap:wrap;gap:24px;align-items:center">'
        f"<div>{picture}</div><div>{facts}</div></div></div>"
    )


def machine_html(machine: "Machine") -> str:
    """The design as `design_html` shows it, with the names of its cards."""
    cards = ", ".join(dict.fromkeys(card.name for card in machine.cards))
    return f"{design_html(machine.design)}<p>cards: {escape(cards)}</p>"


def html_table(
    head: Sequence[str], rows: Iterable[Sequence[str | Loud]], numbers: Sequence[int] = ()
) -> str:
    """A table of texts, each escaped.

    Args:
        head: of the columns; all empty for none.
        rows: texts, as many as columns.
        numbers: columns that are set to the right.
    """
    sides = ["right" if column in numbers else "left" for column in range(len(head))]

    def cells(row: Sequence[str | Loud], tag: str) -> str:
        return "".join(
            f'<{tag} style="{_CELL.format(side)}">{_set(text)}</{tag}>'
            for text, side in zip(row, sides, strict=True)
        )

    top = f"<thead><tr>{cells(head, 'th')}</tr></thead>" if any(head) else ""
    body = "".join(f"<tr>{cells(row, 'td')}</tr>" for row in rows)
    return f'<table style="border-collapse:collapse">{top}<tbody>{body}</tbody></table>'


def shield(text: str, colour: str) -> str:
    """White words on a colour: to be read on a light page and on a dark one."""
    return f'<b style="background:{colour};color:#fff;padding:0 5px">{escape(text)}</b>'


def _set(text: str | Loud) -> str:
    if isinstance(text, Loud):
        return shield(text.text, ACCENT)
    return escape(text)


def _facts(design: "MachineDesign") -> list[tuple[str, str]]:
    stator, rotor, duty, limits = design.stator, design.rotor, design.duty, design.limits
    overspeed = duty.maximum_speed_rpm * duty.overspeed_factor
    return [
        ("slots, poles", f"{stator.slots}, {rotor.poles}"),
        ("stator", f"{stator.outer_diameter_mm:g} mm outside, {stator.bore_diameter_mm:g} mm bore"),
        ("stack, gap", f"{stator.stack_length_mm:g} mm, {rotor.gap_mm:g} mm"),
        ("barriers of a pole", str(len(rotor.barrier)) if rotor.barrier else "from a drawing"),
        ("rated", f"{duty.rated_current_a:g} A peak, {duty.rated_speed_rpm:g} 1/min"),
        ("maximum, overspeed", f"{duty.maximum_speed_rpm:g}, {overspeed:g} 1/min"),
        (
            "limits",
            f"torque >= {limits.least_torque_nm:g} N m, ripple <= {limits.most_ripple_percent:g} %",
        ),
        (
            "",
            f"saliency >= {limits.least_saliency_ratio:g}, "
            f"yield margin >= {limits.least_yield_margin:g}",
        ),
    ]
