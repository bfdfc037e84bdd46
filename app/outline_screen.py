"""What `assess --outline` shows: how the outline lay, its ribs, and the promise beside it."""

from rich.console import Console
from rich.table import Table
from rich.text import Text

from lamwright.geometry.supplier_outline import angle_text
from lamwright.postprocess.differences import FigureDifference
from lamwright.postprocess.glance import GLANCE, MAGNET_GLANCE
from lamwright.postprocess.supplier_tables import holds

from .lines import error_number, number
from .outline_run import OutlineVerdict
from .screen import print_verdict

MM, UM = 1e3, 1e6  # per m
MOST_RIBS = 12  # those most off; all are in outline_ribs.csv
LIMITED = ("torque_nm", "torque_ripple_percent", "saliency_ratio", "yield_margin")


def print_outline_verdict(result: OutlineVerdict, folder: str) -> None:
    """Alignment, worst places, ribs, promise beside outline, then the verdict itself."""
    console, found = Console(highlight=False), result.found
    if found.strays:  # before all figures, which are not of what was drawn
        console.print(Text(result.cautions[0], "bold red"))
    console.print(Text(f"outline {found.source.file}: {angle_text(found.alignment)}"))
    console.print(
        Text(
            f"unit {found.source.unit}; {found.copies} x what is drawn; noise of the points"
            f" {UM * found.noise:.2g} um; {UM * found.alignment.rms:.2g} um rms from the design"
        )
    )
    for word, ring in (("rim", found.rim), ("bore", found.bore)):
        if ring is not None:
            console.print(
                f"{word} diameter {2.0 * MM * ring.radius:.4f} mm, designed"
                f" {2.0 * MM * ring.designed:.4f}; {UM * abs(ring.centre):.1f} um off the axis,"
                f" {UM * ring.unroundness:.1f} um out of round"
            )
    for place in found.worst[:3]:
        console.print(f"off by {UM * place.deviation:+.2f} um at {place.text}")
    console.print(_ribs(result))
    more = len(found.ribs) - MOST_RIBS
    if more > 0:
        console.print(f"[dim]{more} more ribs in outline_ribs.csv[/dim]")
    console.print(promise_table(result.differences, "promised", "outline"))
    if result.ribs_out:
        limit = f"{UM * result.tolerance:.0f} um"
        console.print(Text(f"{result.ribs_out} ribs are off by more than {limit}", "bold red"))
    print_verdict(result.verdict, folder, result.faults)


def _ribs(result: OutlineVerdict) -> Table:
    table = Table(
        title="ribs most off: widths in mm, differences in um",
        title_justify="left",
        title_style="bold",
    )
    for head in ("pole", "rib", "design", "measured", "off", "+-", "allowed", ""):
        table.add_column(head, justify="left" if head in ("rib", "") else "right", no_wrap=True)
    order = sorted(result.found.ribs, key=lambda rib: -abs(rib.difference))
    for rib in order[:MOST_RIBS]:
        held = holds(rib.difference, rib.error, result.tolerance)
        table.add_row(
            str(rib.pole),
            rib.name,
            f"{MM * rib.designed:.4f}",
            f"{MM * rib.width:.4f}",
            f"{UM * rib.difference:+.1f}",
            f"{UM * rib.error:.1f}",
            f"{UM * result.tolerance:.0f}",
            Text("holds", "green") if held else Text("out", "bold red"),
        )
    return table


def promise_table(differences: tuple[FigureDifference, ...], first: str, second: str) -> Table:
    """The figures that a designer reads at a glance, of both, with their change."""
    table = Table(title=f"{first} and {second}", title_justify="left", title_style="bold")
    for head in ("what", first, second, "change", "+-", "errors"):
        table.add_column(head, justify="left" if head in ("what", "errors") else "right")
    keys = (*LIMITED, *GLANCE, *MAGNET_GLANCE)
    for one in sorted(
        (d for d in differences if d.key in keys), key=lambda one: keys.index(one.key)
    ):
        table.add_row(f"{one.label}{', ' * bool(one.unit)}{one.unit}", *cells(one))
    return table


def cells(one: FigureDifference) -> tuple[str, ...]:
    """Both values, change, error bars, and whether it is beyond them."""
    a, b = ("" if v is None else number(v) for v in (one.first, one.second))
    if one.change is None:
        return a, b, "", "", ""
    bar = "" if one.bar is None else error_number(one.bar)
    word = {True: "beyond", False: "within", None: ""}[one.is_beyond]
    return a, b, f"{one.change:+.3g}" if one.differs else "0", bar, word
