"""Verdict and flux map as a notebook shows them; the design is shown by `geometry.notebook`."""

from base64 import b64encode
from html import escape

import numpy as np

from lamwright.geometry.notebook import Loud, html_table, shield
from lamwright.geometry.palette import ACCENT

from .flux_map import FluxMap, linkage_torque, mean_linkages, mean_torque
from .glance import glance_rows, limit_rows, verdict_line
from .quantities import number
from .verdict import Verdict

GOOD = "#1d6b3a"


def verdict_html(verdict: Verdict) -> str:
    """Outcome, limits and main figures with their error bars, and all cautions."""
    colour = GOOD if verdict.passes else ACCENT
    rows = [
        (row.label, row.value, row.error, row.limit, _word(row.word))
        for row in (*limit_rows(verdict), *glance_rows(verdict))
    ]
    table = html_table(("what", "value", "+-", "limit", "verdict"), rows, numbers=(1, 2, 3))
    cautions = "".join(f"<li>{escape(caution)}</li>" for caution in verdict.cautions)
    how = f"tolerance {verdict.tolerance}, version {verdict.version}; ~ estimate by formula"
    return (
        f"<div><p><b>{escape(verdict.design_name)}</b> "
        f"{shield(verdict_line(verdict), colour)}</p>{table}<p>{escape(how)}</p>"
        f"<details open><summary>cautions</summary><ul>{cautions}</ul></details></div>"
    )


def _word(word: str) -> str | Loud:
    return word if word in ("", "holds") else Loud(word)


def flux_map_html(flux_map: FluxMap) -> str:
    """Pictures of linkages and mean torque beside the map's main figures."""
    facts = html_table(("", ""), _facts(flux_map))
    return (
        '<div><div style="display:flex;flex-wrap:wrap;gap:24px;align-items:center">'
        f"<div>{_picture(flux_map)}</div><div>{facts}</div></div></div>"
    )


def _picture(flux_map: FluxMap) -> str:
    """Empty for a map that is no plane."""
    if min(flux_map.i_d.size, flux_map.i_q.size) < 2:
        return ""
    from .figures_notebook import flux_map_png

    data = b64encode(flux_map_png(flux_map)).decode("ascii")
    words = "flux linkages over their currents, and mean torque over both"
    return f'<img alt="{words}" style="max-width:100%" src="data:image/png;base64,{data}">'


def _facts(flux_map: FluxMap) -> list[tuple[str, str]]:
    torque, linked = mean_torque(flux_map), linkage_torque(flux_map)
    psi_d, psi_q = mean_linkages(flux_map)
    d, q = np.unravel_index(np.argmax(torque), torque.shape)
    place = f"i_d {number(flux_map.i_d[d])} A, i_q {number(flux_map.i_q[q])} A"
    rows = [
        ("currents", f"{flux_map.i_d.size} x {flux_map.i_q.size}, A peak"),
        ("i_d", f"{number(flux_map.i_d[0])} to {number(flux_map.i_d[-1])} A"),
        ("i_q", f"{number(flux_map.i_q[0])} to {number(flux_map.i_q[-1])} A"),
        ("positions", f"{flux_map.position.size} over 60 electrical degrees"),
        ("greatest mean torque", f"{number(float(torque[d, q]))} N m at {place}"),
        ("psi_d, psi_q there", f"{number(psi_d[d, q])}, {number(psi_q[d, q])} V s"),
    ]
    greatest = float(np.abs(torque).max())
    if greatest > 0.0:
        off = 100.0 * float(np.abs(torque - linked).max()) / greatest
        rows.append(("torque by linkages", f"differs by {off:.2g} % of it at most"))
    return rows
