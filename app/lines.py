"""Figures as lines of plain text; what `outline` shows, which must be quick."""

import math
from typing import TYPE_CHECKING

import click

from lamwright.postprocess.quantities import Figure, figures_of

if TYPE_CHECKING:
    from .lamination import OutlineReport

DIGITS = 4  # significant, on the terminal only
MM = 1e3  # mm per m


def print_outline(report: "OutlineReport") -> None:
    """What was recognised in drawings, the outline's figures and ribs, and where the DXF is."""
    for part in report.recognised:
        click.echo(f"{part.part} recognised in {part.file}, drawn in {part.picture}")
        left = max(len(label) for label, _ in part.lines)
        for label, text in part.lines:
            click.echo(f"  {label:<{left}}  {text}")
    rows = [(figure.label, valued(figure)) for figure in figures_of(report.figures)]
    widths: dict[str, list[str]] = {}
    for rib in report.ribs:
        label = f"{rib.kind} ribs of barrier {rib.barrier}, one pole"
        widths.setdefault(label, []).append(f"{rib.width * MM:.3f}")
    rows += [(label, f"{', '.join(values)} mm") for label, values in widths.items()]
    left = max(len(label) for label, _ in rows)
    click.echo(report.design_name)
    for label, value in rows:
        click.echo(f"  {label:<{left}}  {value}")
    click.echo(f"punch outline: {report.dxf}")


def number(value: float) -> str:
    """A number with four significant digits, without exponent where it can be read so."""
    if value == 0.0 or not 1e-4 <= abs(value) < 1e7:
        return f"{value:.{DIGITS}g}"
    decimals = DIGITS - 1 - math.floor(math.log10(abs(value)))
    return f"{value:.{max(0, decimals)}f}"


def valued(figure: Figure) -> str:
    """A figure with its unit, marked where it is an estimate."""
    about = "~ " if figure.is_estimate else ""
    return f"{about}{number(figure.value)} {figure.unit}".rstrip()
