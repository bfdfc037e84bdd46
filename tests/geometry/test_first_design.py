"""The rules of a first design against closed forms, and against what they stand for."""

import math
from fractions import Fraction
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.first_barriers import (
    FLATTEST,
    STEEPEST,
    PoleRoom,
    arc_bottom,
    placed_barriers,
    shares,
)
from lamwright.geometry.first_ribs import RibLaw, rib_loads, rib_stresses, rib_widths
from lamwright.geometry.first_ripple import (
    GapModel,
    RimModel,
    gap_model,
    held_energy,
    rim_model,
    torque_waveform,
)
from lamwright.geometry.first_spread import Spread, is_avoided, spreads
from lamwright.geometry.first_winding import WindingNeeds, coil_plan, winding_table_of
from lamwright.geometry.mid_lines import arc_half
from lamwright.geometry.star_of_slots import is_balanced
from lamwright.geometry.winding import MU_0, winding_factor, winding_table
from lamwright.postprocess.ribs import rib_report
from lamwright.solver.rotor_stress import rotor_stress
from tests.outlines import b1_barrier

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
ENDS = tuple(math.radians(e) for e in (22.5, 45.0, 67.5))
ROOM = PoleRoom(rotor_radius=40.6e-3, shaft_radius=13e-3, pole_pairs=2)


@pytest.mark.parametrize(
    ("barriers", "places", "is_half", "first", "last"),
    [
        (2, 8, True, 22.5, 67.5),  # 4 n: no idle place
        (3, 14, True, 12.857, 64.286),  # 4 n + 2: one on each d axis
        (3, 14, False, 25.714, 77.143),  # 4 n + 2: one on each q axis
        (3, 16, False, 22.5, 67.5),  # 4 n + 4: both
    ],
)
def test_ends_lie_on_places_equally_spaced_all_round(barriers, places, is_half, first, last):
    """n_r = 4 n, 4 n + 2, 4 n + 4 of the published rule, which go on evenly beyond the d axis."""
    spread = Spread(barriers, places, is_half)
    assert math.degrees(spread.ends[0]) == pytest.approx(first, abs=1e-3)
    assert math.degrees(spread.ends[-1]) == pytest.approx(last, abs=1e-3)
    beyond = (math.pi - 2.0 * spread.ends[-1]) / spread.spacing
    assert beyond == pytest.approx(round(beyond), abs=1e-12)


def test_the_published_rule_avoids_the_slots():
    """n_s = 12: 12, 10 and 14 are avoided, 8 and 16 are not; an odd n_s is met by none."""
    twelve = Fraction(24, 2)
    avoided = {s.places for s in spreads((2, 3, 4)) if is_avoided(s, twelve)}
    assert avoided == {10, 12, 14}
    assert {8, 16} <= {s.places for s in spreads((2, 3, 4))} - avoided
    assert not any(is_avoided(s, Fraction(27, 3)) for s in spreads((2, 3, 4)))


def test_carriers_and_barriers_have_equal_flux_density():
    """Flux by integration of sin e, mmf as the mean of cos e, over 1e4 points: 1e-6."""
    share = shares(ENDS)
    borders = [0.0, *ENDS, 0.5 * math.pi]
    e = [np.linspace(a, b, 10_001) for a, b in pairwise(borders)]
    flux = [np.trapezoid(np.sin(part), part) for part in e]
    mean = [np.trapezoid(np.cos(part), part) / np.ptp(part) for part in e]
    assert share.carriers == pytest.approx(flux, rel=1e-6)
    drops = -np.diff(mean)
    assert share.barriers == pytest.approx(drops / drops.sum(), rel=1e-6)


def test_barriers_take_the_depth_and_keep_their_shares():
    """Thicknesses as their shares; carriers too, but for the outermost where arcs are flattest."""
    placed = placed_barriers(ROOM, ENDS, 0.4, [0.6e-3] * 3)
    share = shares(ENDS)
    thickness = np.array([one.thickness for one in placed])
    assert thickness / thickness.sum() == pytest.approx(share.barriers, rel=1e-9)
    edges = np.array([one.depth for one in placed])
    carriers = edges[1:] - (edges + thickness)[:-1]
    assert carriers / carriers[0] == pytest.approx(
        np.array(share.carriers[1:-1]) / share.carriers[1], rel=1e-9
    )
    assert edges[-1] + thickness[-1] < ROOM.depth


@pytest.mark.parametrize("angle", [FLATTEST, 2.0, STEEPEST])
def test_arcs_meet_the_rim_at_the_stated_angle(angle):
    """The arc drawn from the bottom found has that angle between the radii at its end."""
    turn, cap = 0.4, 39e-3
    end = cap * complex(math.cos(turn), math.sin(turn))
    edge = arc_half(arc_bottom(cap, turn, angle), end)
    cosine = (end.conjugate() * (end - edge.centre)).real / (abs(end) * edge.radius)
    assert abs(cosine) == pytest.approx(abs(math.cos(angle)), abs=1e-12)


def test_the_load_of_ribs_is_what_they_bear():
    """Rotor B1: tension and shear of both ribs, cut at their thinnest, hold the load.

    The finite element solution is in equilibrium, its ribs' means are to 0.5 %: within 1 %.
    """
    design = read_machine(DEMO).design
    rotor = design.rotor.model_copy(update={"barrier": (b1_barrier(),), "gap_mm": 1.5})
    design = design.model_copy(update={"rotor": rotor})
    section, speed = cross_section(design), 1884.96
    card = read_machine(DEMO).rotor_steel
    report = rib_report(rotor_stress(section, card, speed), section, 380e6)
    load = rib_loads([b1_barrier()], section.rotor_radius, 2, 7650.0, speed)[0]
    borne = 0.0
    for one in report.ribs:
        along, across = one.mean_tension * math.sin(load.end), one.mean_shear * math.cos(load.end)
        borne += one.rib.width * (along + abs(across))
    assert borne == pytest.approx(load.force, rel=0.01)


def test_ribs_are_the_thinnest_that_hold():
    """A step thinner does not hold; a radial rib comes where tangential ones grow too thick."""
    load = rib_loads([b1_barrier()], 39.5e-3, 2, 7650.0, 900.0)[0]
    law, least = RibLaw(), 0.6e-3
    alone = rib_stresses(load, least, 0.0, law).greatest
    assert rib_widths(load, least, 1.01 * alone, law).radial == 0.0
    widths = rib_widths(load, least, 0.4 * alone, law)
    assert widths.radial > 0.0
    assert rib_stresses(load, widths.tangential, widths.radial, law).greatest <= 0.4 * alone
    thinner = widths.radial - 0.05e-3
    assert rib_stresses(load, widths.tangential, thinner, law).greatest > 0.4 * alone


@pytest.mark.parametrize(
    ("slots", "poles"), [(24, 4), (36, 4), (12, 4), (48, 8), (27, 6), (30, 4), (12, 10), (24, 2)]
)
def test_turns_give_the_voltage_by_their_formula(slots, poles):
    """The star's factor is that of the winding table; the next turn would exceed the voltage."""
    assert is_balanced(slots, poles)
    needs = WindingNeeds(
        slots=slots,
        poles=poles,
        bore=0.1,
        stack_length=0.1,
        slot_depth=0.015,
        copper_area=60e-6,
        supply_voltage=400.0,
        rated_speed=150.0,
    )
    table = winding_table_of(needs, coil_plan(slots, poles))
    values = {line.key: line.value for line in table.lines}
    design = read_machine(DEMO).design
    design = design.model_copy(
        update={
            "winding": design.winding.model_copy(update=values),
            "stator": design.stator.model_copy(update={"slots": slots}),
            "rotor": design.rotor.model_copy(update={"poles": poles}),
        }
    )
    wound = winding_table(design)
    factor = winding_factor(wound, 1)
    told = next(line.why for line in table.lines if line.key == "turns_per_coil")
    assert f"k_w = {factor:.4f}" in told
    linkage = factor * wound.turns_per_phase * 0.8 * 0.1 * 0.1 / (poles // 2)
    peak = 150.0 * (poles // 2) * linkage * math.hypot(1.0, 0.35)
    limit = 0.9 * 400.0 * math.sqrt(2.0 / 3.0)
    assert peak <= limit < peak * (1.0 + 1.0 / values["turns_per_coil"])


def test_carrier_potentials_are_those_of_the_closed_form():
    """Two barriers, smooth stator, 500 cos(theta_e) A: potentials 451.046 and 303.494 A.

    Source: magnetic circuit in closed form (ends at 30 and 60 electrical degrees, 4 and 5 mm thick,
    30 and 50 mm long, gap 0.5 mm at 40 mm). Cells take the mmf at their middles: 1e-5.
    """
    count = 7200
    theta = (np.arange(count) + 0.5) * 2.0 * math.pi / count
    permeance = np.full(count, MU_0 * 40e-3 / 0.5e-3 * 2.0 * math.pi / count)
    gap = GapModel(2, 0.0, permeance, np.zeros((3, count)))
    ends = np.radians([15.0, 30.0])
    rim = RimModel(ends, MU_0 * np.array([30.0 / 4.0, 50.0 / 5.0]))
    mmf = 500.0 * np.sin(2.0 * theta)[None]  # its crest on the q axis of a d axis at 0
    per_el = MU_0 * 40e-3 / (2 * 0.5e-3)
    steps = np.diff(np.sin([0.0, math.pi / 6.0, math.pi / 3.0]))
    expected = 4 * 2.0 * per_el * 500.0 * float(steps @ [451.046, 303.494])
    assert held_energy(gap, rim, mmf, np.zeros(1))[0] == pytest.approx(expected, rel=1e-5)


def test_estimated_torque_has_no_mean_on_the_axes():
    """Current on d or q alone gives no mean torque, and turning its sense turns the torque's."""
    design = read_machine(DEMO).design
    gap, rim = gap_model(design), rim_model(design, design.rotor.barrier)
    full = torque_waveform(gap, rim, math.radians(45.0)).mean()
    assert full > 0.0
    for gamma in (0.0, 0.5 * math.pi):
        assert abs(torque_waveform(gap, rim, gamma).mean()) < 1e-3 * full
    assert torque_waveform(gap, rim, math.radians(-45.0)).mean() == pytest.approx(-full, rel=1e-3)


def test_stress_of_ribs_goes_with_the_square_of_speed():
    """All forces do, and the law is linear in them."""
    barrier = BarrierDesign(
        shape="arc", end_angle_deg=22.5, thickness_mm=3.5, depth_mm=8.8, tangential_rib_mm=0.6
    )
    slow, fast = (rib_loads([barrier], 40.6e-3, 2, 7650.0, w)[0] for w in (300.0, 600.0))
    low, high = (rib_stresses(one, 0.6e-3, 1e-3, RibLaw()) for one in (slow, fast))
    assert high.tangential == pytest.approx(4.0 * low.tangential, rel=1e-12)
    assert high.radial == pytest.approx(4.0 * low.radial, rel=1e-12)
