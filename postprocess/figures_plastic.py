"""Plastic zones of the lamination after an overspeed test, or in its collapse.

Strain is drawn at the points where it is known, without smoothing: each curved element as four
pieces, the corners' by the point near the corner, the middle by the mean of the other three. What
did not yield stays paper, so the zones show where they end. The two ribs of largest strain are
drawn again close up.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.section import CrossSection, pole_of, rotor_cell
from lamwright.solver.start_stop import NO_FLOW
from lamwright.solver.types import FloatArray, IntArray

from .figures_close_up import frame_close_up, head_close_up, open_close_up
from .figures_labels import RULER_FOOT, Callout, Side, draw_note, draw_ruler, place_callouts
from .figures_section import bare, pole_words
from .figures_stress import LETTERS, RPM, draw_outline, numbered_rib, rib_name, rotor_silhouette
from .figures_style import MM, QUARTERS, ComplexArray, Style, draw_scale, stress_colours, upright
from .plastic_ribs import MECHANISM, PlasticReport, PlasticRib, PlasticStudy

if TYPE_CHECKING:
    from matplotlib.axes import Axes

PERCENT, MICRO = 100.0, 1e6
CLOSE_UP = 2.6  # half the side of a close-up over the rib's width
LEAST_CLOSE_UP = 1.0  # mm, half the side of a close-up at least


def worst_ribs(report: PlasticReport) -> tuple[PlasticRib, ...]:
    """The rib that yielded most, and the next of another kind or barrier, if any yielded."""
    ranked = sorted(
        (row for row in report.ribs if row.zone_area > 0.0),
        key=lambda row: (row.largest_strain, row.section_share),
        reverse=True,
    )
    first = ranked[:1]
    other = [
        row
        for row in ranked
        if (row.rib.kind, row.rib.barrier) != (first[0].rib.kind, first[0].rib.barrier)
    ]
    return (*first, *other[:1])


def draw_plastic(
    ax: Axes, scale_ax: Axes, section: CrossSection, study: PlasticStudy, style: Style
) -> None:
    """Draw plastic strain in percent over the rotor's own period, and its scale.

    Args:
        ax: the drawing, equal axes in mm.
        scale_ax: the colour scale.
        section: exact outlines.
        study: the rotor beyond yield.
        style: sizes and colours.
    """
    section = rotor_cell(section)
    turn = upright(section)
    report = study.report
    place_callouts(
        ax, rotor_silhouette(section), _callouts(section, study, turn), style, RULER_FOOT
    )
    _draw_zones(ax, study, np.arange(len(study.strain)), turn)
    draw_outline(ax, section, turn, style)
    for row, letter in zip(worst_ribs(report), LETTERS, strict=False):
        _draw_frame(ax, row, letter, turn, style)
    draw_ruler(ax, style)
    draw_note(ax, _notes(report), style)
    bare(ax)
    label = (
        "plastic strain left in %"
        if report.survives
        else "strain rate of the collapse in % of most"
    )
    draw_scale(scale_ax, stress_colours(), (0.0, strain_limit(study)), label, style)


def draw_plastic_rib(
    ax: Axes, section: CrossSection, study: PlasticStudy, row: PlasticRib, letter: str, style: Style
) -> None:
    """Draw one rib close up: where it yielded; equal axes in mm."""
    section = rotor_cell(section)
    turn = upright(section)
    middle, half = MM * turn * 0.5 * (row.rib.start + row.rib.end), _half_side(row)
    open_close_up(ax, middle, half)
    near = np.abs(_corners(study, turn) - middle).min(axis=1) < 2.0 * half
    _draw_zones(ax, study, np.flatnonzero(near), turn)
    draw_outline(ax, section, turn, style)
    strain = (
        f"largest strain {PERCENT * row.largest_strain:.2g} %"
        if math.isfinite(row.largest_strain)
        else "tears in the collapse"
    )
    head_close_up(
        ax,
        f"{letter}: {rib_name(row.rib, section.ribs)}, {MM * row.rib.width:.2f} mm\n"
        f"{PERCENT * row.section_share:.0f} % of its section yielded, {strain}",
        style,
    )


def strain_limit(study: PlasticStudy) -> float:
    """Upper end of the colour scale in percent, a round number that covers the largest strain."""
    most = PERCENT * float(study.strain.max())
    if most <= PERCENT * NO_FLOW:
        return 1.0
    step = 10.0 ** math.floor(math.log10(most)) / 2.0
    return step * math.ceil(most / step - 1e-9)


def _notes(report: PlasticReport) -> tuple[str, ...]:
    test = RPM * report.test_speed
    burst = f"burst at {RPM * report.burst_low:.0f} to {RPM * report.burst_high:.0f} 1/min"
    first = f"first yield at {RPM * report.first_yield_speed:.0f} 1/min, {burst}"
    if not report.survives:
        return (f"no equilibrium at the test's {test:.0f} 1/min: how it collapses", first)
    growth = (
        f"growth left: d axis {MICRO * report.growth_d:.2f} \N{MICRO SIGN}m,"
        f" q axis {MICRO * report.growth_q:.2f} \N{MICRO SIGN}m"
    )
    return (f"after {test:.0f} 1/min, back at rest; {growth}", first)


def _callouts(section: CrossSection, study: PlasticStudy, turn: complex) -> list[Callout]:
    """The yielded ribs' share of section, on their own sides."""
    found = []
    rows = [row for row in study.report.ribs if row.zone_area > 0.0]
    most = max((row.section_share for row in rows), default=0.0)
    for row in rows:
        anchor = MM * turn * 0.5 * (row.rib.start + row.rib.end)
        words = pole_words(pole_of(row.rib.name))
        text = f"{numbered_rib(row.rib, section.ribs)}{words}: {PERCENT * row.section_share:.0f} %"
        side: Side = "right" if anchor.real > 0.0 else "left"
        found.append(Callout(text, anchor, side, row.section_share == most))
    return found


def _corners(study: PlasticStudy, turn: complex) -> ComplexArray:
    mesh = study.solution.mesh
    return np.asarray(MM * turn * (mesh.nodes @ [1.0, 1.0j])[mesh.elements])


def _draw_zones(ax: Axes, study: PlasticStudy, shown: IntArray, turn: complex) -> None:
    """Colour the pieces of elements that yielded; the others stay paper."""
    mesh = study.solution.mesh
    at = MM * turn * (mesh.nodes @ [1.0, 1.0j])
    values = _piece_values(study.strain[shown])
    least = NO_FLOW if study.report.survives else MECHANISM
    pieces = mesh.elements[shown][:, QUARTERS].reshape(-1, 3)
    flows = values > least
    if not flows.any():
        return
    ax.tripcolor(
        at.real,
        at.imag,
        pieces[flows],
        facecolors=PERCENT * values[flows],
        cmap=stress_colours(),
        vmin=0.0,
        vmax=strain_limit(study),
        edgecolors="none",
        antialiased=False,
        rasterized=True,
        zorder=1,
    )


def _piece_values(strain: FloatArray) -> FloatArray:
    """Strains (4 n,) of the pieces in the order of `QUARTERS` from those at points (n, 6).

    The points 3, 4, 5 are near the corners 0, 1, 2, the points 0, 1, 2 near the middles.
    """
    middle = strain[:, :3].mean(axis=1, keepdims=True)
    return np.concatenate([strain[:, 3:], middle], axis=1).ravel()


def _half_side(row: PlasticRib) -> float:
    return max(CLOSE_UP * MM * row.rib.width, LEAST_CLOSE_UP)


def _draw_frame(ax: Axes, row: PlasticRib, letter: str, turn: complex, style: Style) -> None:
    middle = MM * turn * 0.5 * (row.rib.start + row.rib.end)
    frame_close_up(ax, middle, _half_side(row), letter, style)
