"""Figures as lines of plain text; what `outline` shows, which must be quick."""

from typing import TYPE_CHECKING

import click

from lamwright.postprocess.quantities import error_number as error_number
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.quantities import number as number
from lamwright.postprocess.quantities import valued as valued

if TYPE_CHECKING:
    from .lamination import OutlineReport

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
