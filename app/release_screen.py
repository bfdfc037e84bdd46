"""What `release` and `verify` show on the terminal, as plain lines."""

from collections.abc import Mapping

import click

from .lines import error_number, number
from .release import ReleaseReport
from .verify import VerifyReport

SHOWN = ("torque_nm", "torque_ripple_percent", "saliency_ratio", "yield_margin")


def print_release(report: ReleaseReport) -> None:
    """Status, what is promised, what it weighs and costs in sheet, and the package's number."""
    manifest = report.manifest
    click.echo(f"{manifest['design']}: {manifest['status']}")
    rows = [*_promised(manifest), *_parts(manifest), *_nesting(manifest)]
    left = max(len(label) for label, _ in rows)
    for label, text in rows:
        click.echo(f"  {label:<{left}}  {text}")
    cautions = manifest["cautions"]
    for line in cautions if isinstance(cautions, list) else ():
        click.echo(f"- {line}")
    files = manifest["files"]
    count = len(files) if isinstance(files, dict) else 0
    click.echo(f"{count} files and the manifest in {report.folder}")
    click.echo(f"package {report.number}")


def print_verify(report: VerifyReport) -> None:
    """Every change, or that there is none."""
    for line in report.changes:
        click.echo(line)
    for line in report.notes:
        click.echo(f"note: {line}")
    if report.is_whole:
        click.echo(f"nothing was changed in {report.files} files; {report.status}")
    else:
        count = len(report.changes)
        click.echo(f"{count} change{'s' if count > 1 else ''}: this is not the package released")
    click.echo(f"package {report.number}")


def _promised(manifest: Mapping[str, object]) -> list[tuple[str, str]]:
    figures = manifest["promised"]
    assert isinstance(figures, dict)
    rows = []
    for key in SHOWN:
        figure = figures[key]
        error = figure["error"]
        bar = "" if error is None else f" +- {error_number(error)}"
        rows.append((key, f"{number(figure['value'])}{bar} {figure['unit']}".rstrip()))
    return rows


def _parts(manifest: Mapping[str, object]) -> list[tuple[str, str]]:
    parts = manifest["parts"]
    assert isinstance(parts, dict)
    rows = []
    for name, part in parts.items():
        mass, cut = number(part["stack_mass_kg"]), number(part["cut_length_mm"])
        rows.append((f"{name} stack", f"{mass} kg of steel, {part['sheets']} sheets"))
        rows.append((f"{name} cut length", f"{cut} mm a sheet"))
    return rows


def _nesting(manifest: Mapping[str, object]) -> list[tuple[str, str]]:
    nesting = manifest["nesting"]
    if not isinstance(nesting, dict):
        return [("nesting", str(nesting))]
    rows = []
    for layout in nesting["layouts"]:
        text = (
            f"{number(layout['scrap_percent'])} % scrap, {layout['rows']} rows, "
            f"{number(layout['strip_mass_per_machine_kg'])} kg of strip"
        )
        rows.append((f"{layout['layout']} rows", text))
    return rows
