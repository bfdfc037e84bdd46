"""What `ribs --thin` shows on the terminal: the table that settles how thin a rib may be."""

from collections.abc import Mapping, Sequence

from rich.table import Table

THIN_TABLE = "thin_ribs"  # in `ribs.json`
PRICE = "torque_change_nm_per_0.1_mm"
COLUMNS = {
    "width_before_mm": "was",
    "width_mm": "thinnest",
    "floor_mm": "floor",
    "yield_margin_before": "margin\nwas",
    "yield_margin": "margin",
    PRICE: "N m per\n+0.1 mm",
}


def thin_screen(rows: Sequence[Mapping[str, object]]) -> Table:
    """One row for each group of ribs, as `ribs.json` has them."""
    table = Table(
        title="thinnest ribs that hold, all together: widths in mm",
        title_justify="left",
        title_style="bold",
    )
    table.add_column("rib", no_wrap=True)
    for head in COLUMNS.values():
        table.add_column(head, justify="right", no_wrap=True)
    table.add_column("by")
    for row in rows:
        reason = "floor" if row["is_at_floor"] else "stress"
        table.add_row(str(row["rib"]), *(_cell(key, row.get(key)) for key in COLUMNS), reason)
    return table


def _cell(key: str, value: object) -> str:
    if not isinstance(value, float):
        return ""
    if key.endswith("_mm") and key != PRICE:
        return f"{value:.3f}"
    return f"{value:+.2g}" if key == PRICE else f"{value:.3f}"
