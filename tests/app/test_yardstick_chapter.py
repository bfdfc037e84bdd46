"""Yardsticks: the design's point on its surface, the ideal rotor, the induction machine's field."""

import csv
import math
from types import SimpleNamespace

import numpy as np
import pytest
from shipped import shipped

from lamwright.app.desk import Desk
from lamwright.app.ideal_rotor import at_share, parabola_vertex, round_model
from lamwright.app.pool import Crew
from lamwright.app.yardstick_chapter import design_figures, yardstick_chapter
from lamwright.geometry.curves import area
from lamwright.geometry.round_rotor import round_rotor_section
from lamwright.geometry.slot_dimensions import slot_dimensions
from lamwright.geometry.winding import winding_factor, winding_table
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.flux_map import FluxMap
from lamwright.postprocess.induction_machine import harmonic_leakage, stator_slot_permeance
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.shifted_surface import shifted
from lamwright.solver.field import solve_point
from lamwright.solver.steel import MU_0

DEMO = "demo_24s4p_arc"
L_D, L_Q = 0.060, 0.012  # H


def linear_map(current: float) -> FluxMap:
    """A linear machine of four poles up to a current."""
    i = np.linspace(0.0, current, 5)
    i_d, i_q, _ = np.meshgrid(i, i, [0.0, 1.0], indexing="ij")
    torque = 3.0 * (L_D - L_Q) * i_d * i_q
    coenergy = 0.75 * (L_D * i_d**2 + L_Q * i_q**2)
    return FluxMap(2, i, i, np.array([0.0, 0.26]), L_D * i_d, L_Q * i_q, torque, coenergy)


def test_design_stands_at_its_angle_of_most_torque() -> None:
    """Linear: T = 3/4 p (L_d - L_q) I^2 at 45 degrees, saliency L_d / L_q; the surface's 1e-6."""
    design = shipped(DEMO).machine.design
    current = design.duty.rated_current_a
    figures = design_figures(design, coenergy_surface(linear_map(current)))
    assert figures.torque == pytest.approx(1.5 * (L_D - L_Q) * current**2, rel=1e-6)
    assert figures.saliency == pytest.approx(L_D / L_Q, rel=1e-6)


def test_parabola_finds_its_vertex_within_bounds() -> None:
    """Exact on a parabola; a rising or hollow one ends at a bound."""
    shares = (0.2, 0.35, 0.5)
    assert parabola_vertex(shares, [1.0 - (k - 0.41) ** 2 for k in shares]) == pytest.approx(0.41)
    assert parabola_vertex(shares, [k**2 for k in shares]) == 0.65
    assert parabola_vertex(shares, [1.0 - k for k in shares]) in (0.1, 0.65)


@pytest.mark.parametrize("name", [DEMO, "demo_36s6p_arc"])
def test_round_rotor_fills_its_sector(name: str) -> None:
    """Areas of iron, shaft and half the gap: rings over the sector's angle; exact."""
    one = shipped(name)
    section = round_rotor_section(one.machine.design, one.section)
    radii = (0.0, section.shaft_radius, section.rotor_radius, section.circle_radius)
    areas = {region.name: area(region.outer) for region in section.rotor[:3]}
    pole = math.pi / section.pole_pairs / 2.0
    for name, inner, outer in zip(
        ("shaft", "rotor_iron", "gap_rotor"), radii, radii[1:], strict=False
    ):
        assert areas[name] == pytest.approx(pole * (outer**2 - inner**2), rel=1e-12)
    assert section.stator == one.section.stator


def test_magnetising_inductance_is_the_textbook_one() -> None:
    """Round rotor, small current: L = (1 + spread) 6/pi mu0 (N k_w)^2 L r / (p^2 k_C g) + slots.

    The steel's share of the mmf, 2 % at this flux, and the gap's curvature are left out: 6 %.
    """
    one = shipped(DEMO)
    design, section = one.machine.design, one.section
    model = round_model(one.machine, section)
    found = np.mean([solve_point(model, 3.0, 0.0, k * math.pi / 18).psi_d / 3.0 for k in range(3)])
    table, size = winding_table(design), slot_dimensions(design)
    gap, pitch = section.gap, 2.0 * math.pi * section.stator_bore_radius / 24
    ratio = 2.0 * size.opening_half_width / gap
    carter = pitch / (pitch - gap * ratio**2 / (5.0 + ratio))
    radius = 0.5 * (section.stator_bore_radius + section.rotor_radius)
    turns = table.turns_per_phase * winding_factor(table, 1.0)
    magnetising = 6.0 / math.pi * MU_0 * turns**2 * section.stack_length * radius
    magnetising /= 4.0 * carter * gap
    slots = 2.0 * MU_0 * section.stack_length * table.turns_per_phase**2
    slots *= stator_slot_permeance(size) / (2 * 2)
    textbook = (1.0 + harmonic_leakage(table)) * magnetising + slots
    assert found == pytest.approx(textbook, rel=0.06)


def test_ideal_rotor_beats_the_design_in_its_stator() -> None:
    """A third of gaps, no ribs: more torque and saliency than the demonstration rotor has.

    The demonstration design reaches 11.6 N m and 5.9 at 12 A. Torque falls both ways.
    """
    one = shipped(DEMO)
    model = round_model(one.machine, one.section)
    low, good, high = (
        at_share(one.machine.design, model, one.section.shaft_radius, share)
        for share in (0.1, 0.35, 0.65)
    )
    assert good.torque > max(low.torque, high.torque)
    assert good.torque > 11.6
    assert good.saliency > 5.9
    assert low.saliency < good.saliency < high.saliency


@pytest.mark.slow
def test_chapter_writes_both_yardsticks(tmp_path) -> None:
    """Table and picture; estimates are marked and their assumptions stand in table and cautions.

    A magnet design has no ideal rotor, and says so. One per cent more of each linkage moves the
    linear machine's torque by 1.5 (L_d + L_q) I^2 / 100.
    """
    for name, is_magnet in ((DEMO, False), ("demo_36s4p_magnet", True)):
        one = shipped(name)
        surface = coenergy_surface(linear_map(one.rated))
        with Crew(Desk, 0) as crew:
            mapped = SimpleNamespace(
                machine=one.machine,
                section=one.section,
                surface=surface,
                shifted=(shifted(surface, 0.01, 0.0), shifted(surface, 0.0, 0.01)),
                crew=crew,
            )
            chapter = yardstick_chapter(mapped, tmp_path)
        figures = {f.key: f for group in chapter.figures for f in figures_of(group)}
        by_hand = 0.01 * 1.5 * (L_D + L_Q) * one.machine.design.duty.rated_current_a**2
        assert chapter.errors["yardstick_design_torque_nm"] == pytest.approx(by_hand, rel=1e-4)
        assert ("ideal_rotor_torque_nm" in figures) is not is_magnet
        assert bool(chapter.not_given) is is_magnet
        assert all(f.is_estimate for key, f in figures.items() if key.startswith("induction_"))
        loss = figures["induction_estimate_rotor_cage_loss_w"].value
        assert 0.0 < loss < 3.0 * figures["induction_estimate_stator_copper_loss_w"].value
        same_loss = figures["induction_estimate_torque_at_design_copper_loss_nm"].value
        assert 0.0 < same_loss < figures["induction_estimate_torque_nm"].value
        assert any("estimate; assumed: squirrel cage" in line for line in chapter.cautions)
        rows = list(csv.DictReader((tmp_path / "yardsticks.csv").read_text().splitlines()))
        kinds = {row["key"]: row["kind"] for row in rows}
        assert kinds["induction_estimate_torque_nm"] == "estimate"
        assert sum(row["kind"] == "assumption" for row in rows) >= 6
        assert (tmp_path / "yardsticks.png").exists()
