"""The winding against tabulated factors, its own field's signs, and hand counts."""

import json
import math
import tomllib
from pathlib import Path as FilePath

import numpy as np
import pytest

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.winding import (
    WindingTable,
    copper_resistivity,
    end_winding_inductance,
    phase_resistance,
    winding_factor,
    winding_findings,
    winding_table,
)

DEMO = FilePath(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
ORDERS = (1, 5, 7, 11, 13, 17, 19)
MU_0 = 4e-7 * math.pi


def machine(slots: int, poles: int, layers: int, span: int, turns: int = 25, paths: int = 1):
    """The demonstration machine with another winding; its slots need not be drawable."""
    table = tomllib.loads(DEMO.read_text(encoding="utf-8"))
    table["stator"]["slots"] = slots
    table["rotor"]["poles"] = poles
    table["winding"].update(
        layers=layers, coil_span_slots=span, turns_per_coil=turns, parallel_paths=paths
    )
    return MachineDesign.model_validate_json(json.dumps(table))


WOUND = [
    (slots, poles, 2, span)
    for slots, poles, spans in (
        (6, 2, (3, 2)),
        (24, 4, (6, 5, 7)),
        (36, 4, (9, 8, 7)),
        (36, 6, (6, 5)),
        (48, 4, (12, 11, 10)),
        (54, 6, (9, 7)),
        (72, 4, (15,)),
    )
    for span in spans
] + [(6, 2, 1, 3), (24, 4, 1, 6), (36, 4, 1, 9), (36, 6, 1, 6), (48, 8, 1, 6), (72, 4, 1, 18)]
FRACTIONAL = [
    (27, 6, 2, 4),
    (30, 4, 2, 7),
    (30, 8, 2, 3),
    (18, 4, 1, 5),
    (12, 10, 2, 1),
    (12, 10, 1, 1),
    (12, 8, 1, 1),
    (9, 8, 2, 1),
    (3, 2, 2, 1),
    (3, 4, 2, 1),
    (3, 8, 2, 1),  # the coil spans 2.7 pole pitches: it links the working wave reversed
    (24, 22, 2, 1),
]
each_winding = pytest.mark.parametrize("wound", WOUND, ids=str)
any_winding = pytest.mark.parametrize("wound", WOUND + FRACTIONAL, ids=str)


def table_of(wound: tuple[int, int, int, int]) -> WindingTable:
    return winding_table(machine(*wound))


FACTORS = [
    ("24/4 36/6 48/8", 6, (0.96593, 0.25882, 0.25882, 0.96593, 0.96593, 0.25882, 0.25882)),
    ("24/4 36/6 48/8", 5, (0.93301, 0.06699, 0.06699, 0.93301, 0.93301, 0.06699, 0.06699)),
    ("36/4 54/6", 9, (0.95980, 0.21757, 0.17736, 0.17736, 0.21757, 0.95980, 0.95980)),
    ("36/4 54/6", 8, (0.94521, 0.13985, 0.06066, 0.06066, 0.13985, 0.94521, 0.94521)),
    ("36/4 54/6", 7, (0.90191, 0.03778, 0.13587, 0.13587, 0.03778, 0.90191, 0.90191)),
    ("48/4", 12, (0.95766, 0.20533, 0.15756, 0.12608, 0.12608, 0.15756, 0.20533)),
    ("48/4", 11, (0.94947, 0.16290, 0.09592, 0.01646, 0.01646, 0.09592, 0.16290)),
    ("48/4", 10, (0.92503, 0.05314, 0.04078, 0.12178, 0.12178, 0.04078, 0.05314)),
    ("72/4", 15, (0.92356, 0.05103, 0.03760, 0.09826, 0.08882, 0.02165, 0.02165)),
    ("27/6 36/8", 4, (0.94521, 0.13985, 0.06066, 0.06066, 0.13985, 0.94521, 0.94521)),
    ("30/4 45/6", 7, (0.95144, 0.17321, 0.11106, 0.04452, 0.02126, 0.02126, 0.04452)),
    ("12/10 12/14", 1, (0.93301, 0.06699, 0.06699, 0.93301, 0.93301, 0.06699, 0.06699)),
    ("9/8 18/16", 1, (0.94521, 0.13985, 0.06066, 0.06066, 0.13985, 0.94521, 0.94521)),
    ("24/22", 1, (0.94947, 0.16290, 0.09592, 0.01646, 0.01646, 0.09592, 0.16290)),
    ("12/8 9/6", 1, (0.86603, 0.86603, 0.86603, 0.86603, 0.86603, 0.86603, 0.86603)),
]


@pytest.mark.parametrize(("machines", "span", "factors"), FACTORS)
def test_winding_factors_of_the_handbook(machines, span, factors):
    """Pyrhonen, Jokinen, Hrabovcova 2014 ch. 2 (from memory; recomputed): five digits given."""
    for text in machines.split():
        slots, poles = (int(number) for number in text.split("/"))
        table = winding_table(machine(slots, poles, 2, span))
        assert [winding_factor(table, order) for order in ORDERS] == pytest.approx(
            factors, abs=1e-5
        )
        if span == slots / poles and slots % (3 * poles) == 0:
            single = winding_table(machine(slots, poles, 1, span))
            assert [winding_factor(single, order) for order in ORDERS] == pytest.approx(
                factors, abs=1e-5
            )


@each_winding
def test_whole_slots_are_wound_in_belts(wound):
    """Written down belt by belt, q coils each, first coil (q + span) // 2 slots back: exactly."""
    slots, poles, layers, span = wound
    q = slots // (3 * poles)
    conductors = np.zeros((slots, layers, 3))
    for group in range(0, poles, 3 - layers):
        for phase, k in np.ndindex(3, q):
            start = -((q + span) // 2) + 3 * q * group + 2 * q * phase + k
            conductors[start % slots, -1, phase] -= -25.0 if group % 2 else 25.0
            conductors[(start + span) % slots, 0, phase] += -25.0 if group % 2 else 25.0
    table = table_of(wound)
    assert np.array_equal(table.conductors, conductors)
    assert table.axis_a == (q + span) % 2 * math.pi / slots


@any_winding
def test_phasors_of_the_phases(wound):
    """Ampere-conductors of phase A ~ sin p(theta - axis), B and C 120 and 240 degrees later.

    Their phasor at the working order has the size 2 N k_w: rounding only.
    """
    table = table_of(wound)
    p = table.poles // 2
    theta = (np.arange(table.slots) + 0.5) * 2.0 * math.pi / table.slots
    phasors = np.exp(-1j * p * (theta - table.axis_a)) @ table.conductors.sum(axis=1)
    size = 2.0 * table.turns_per_phase * winding_factor(table, 1)
    assert size > 0.0
    third = 2j * math.pi / 3
    assert 1j * phasors == pytest.approx(size * np.exp([0.0, -third, -2.0 * third]), rel=1e-12)


@any_winding
def test_every_side_is_filled_and_phases_link_alike(wound):
    """One phase in each coil side; self and mutual linkages are alike, whatever the field.

    Any even weight of the distance between two slots stands for the field of a round rotor.
    """
    table = table_of(wound)
    assert np.count_nonzero(table.conductors) == table.slots * table.layers
    assert np.array_equal(np.abs(table.conductors).sum(axis=2), np.full((wound[0], wound[2]), 25.0))
    apart = 2.0 * math.pi * np.arange(table.slots) / table.slots
    weight = np.exp(np.cos(apart[:, None] - apart))
    linked = np.einsum("sla,st,tmb->ab", table.conductors, weight, table.conductors)
    assert np.diag(linked) == pytest.approx(linked[0, 0], rel=1e-12)
    assert linked[[0, 1, 2], [1, 2, 0]] == pytest.approx(linked[0, 1], rel=1e-9, abs=1e-9)


@each_winding
def test_factor_is_distribution_times_pitch(wound):
    """k_d k_p = sin(nu pi/6)/(q sin(nu pi/(6q))) sin(nu pi y/(2 tau)): textbook, rounding."""
    slots, poles, _, span = wound
    q, pitch = slots / (3 * poles), slots / poles
    table = table_of(wound)
    for nu in ORDERS:
        k_d = math.sin(nu * math.pi / 6) / (q * math.sin(nu * math.pi / (6 * q)))
        k_p = math.sin(nu * math.pi * span / (2 * pitch))
        assert winding_factor(table, nu) == pytest.approx(abs(k_d * k_p), abs=1e-12)


@each_winding
def test_a_pole_pitch_on_everything_is_reversed(wound):
    """Conductors of slot s + slots/poles are minus those of slot s: exactly."""
    table = table_of(wound)
    turned = np.roll(table.conductors, table.slots // table.poles, axis=0)
    assert np.array_equal(turned, -table.conductors)


@each_winding
def test_every_side_holds_one_phase_and_phases_are_alike(wound):
    """All sides are filled equally; B and C are A turned by 120 and 240 electrical degrees."""
    table = table_of(wound)
    assert np.array_equal(np.abs(table.conductors).sum(axis=2), np.full((wound[0], wound[2]), 25.0))
    assert np.count_nonzero(table.conductors) == table.slots * table.layers
    third = 2 * table.slots // (3 * table.poles)
    for phase in (1, 2):
        turned = np.roll(table.conductors[..., 0], phase * third, axis=0)
        assert np.array_equal(table.conductors[..., phase], turned)
    assert table.turns_per_phase == table.slots * table.layers * 25 / 6


@each_winding
def test_current_in_phase_a_peaks_at_its_axis(wound):
    """F from dF/d theta = -K, stepped from slot to slot, at i = (1, -1/2, -1/2).

    The points sit symmetrically to the steps, so the fundamental's phase has rounding only.
    """
    table = table_of(wound)
    p, per_slot = table.poles // 2, 16
    steps = (table.conductors @ np.array([1.0, -0.5, -0.5])).sum(axis=1)  # A, per slot
    # F falls by the slot's ampere-conductors at its centre line, half-way through its points.
    after = -np.cumsum(steps)
    before = after + steps
    f = np.repeat(np.column_stack([before, after]).ravel(), per_slot // 2)
    theta = (np.arange(f.size) + 0.5) * 2.0 * math.pi / f.size
    phasor = np.sum(f * np.exp(-1j * p * theta)) * 2.0 / f.size
    # F_1 = |phasor| cos(p theta + arg): peaks at -arg / p.
    peak = -np.angle(phasor) / p
    assert math.remainder(peak - table.axis_a, 2.0 * math.pi / p) == pytest.approx(0.0, abs=1e-12)
    # Amplitude 3/2 (4/pi) N k_w i / (2 p), textbook; n samples of a period err by (2 pi/n)^2/24,
    # at most 1.8e-4 here.
    expected = 3.0 / math.pi * table.turns_per_phase * winding_factor(table, 1) / p
    assert abs(phasor) == pytest.approx(expected, rel=2e-4)


@any_winding
def test_field_links_phase_a_and_leaves_the_rotor_at_its_axis(wound):
    """Slotless annulus, ideal iron: A = mu0 (b/nu) coth(nu ln(b/a)) K (Hague 1929, from memory).

    Solved by its harmonics up to 60 of the working one; signs need no tolerance. The working
    harmonic alone gives L = 3/2 mu0 pi (N_s/2)^2 L/p coth(p ln(b/a)), N_s = (4/pi) k_w N, to
    rounding, the sinusoidal winding of the same fundamental.
    """
    table = table_of(wound)
    p, a, b, stack = table.poles // 2, 40e-3, 40.5e-3, 0.1
    theta = (np.arange(table.slots) + 0.5) * 2.0 * math.pi / table.slots
    current = np.array([1.0, -0.5, -0.5])
    amperes = (table.conductors @ current).sum(axis=1)

    def potential(orders, at):
        nu = p * np.asarray(orders, dtype=float)
        # Current sheet of line currents, A per radian; A_z follows it order by order.
        k = np.exp(-1j * np.outer(nu, theta)) @ amperes / math.pi
        gain = MU_0 / nu / np.tanh(nu * math.log(b / a))
        return np.real(np.exp(1j * np.outer(at, nu)) @ (gain * k))

    def linkage(orders):
        return stack * table.conductors.sum(axis=1).T @ potential(orders, theta)

    psi = linkage(range(1, 61))
    assert psi[0] > 0.0
    # B and C each link half as much, reversed.
    assert psi[1:] == pytest.approx(-0.5 * psi[0], rel=1e-12)
    h = 1e-4  # rad
    ahead, behind = potential([1], np.array([table.axis_a + h, table.axis_a - h]))
    b_r = (ahead - behind) / (2.0 * h * b)
    assert b_r > 0.0
    # The axis is where the working harmonic of B_r is greatest: A_z is zero there.
    scale = np.abs(potential([1], theta)).max()
    assert potential([1], np.array([table.axis_a]))[0] == pytest.approx(0.0, abs=1e-12 * scale)
    n_s = 4.0 / math.pi * winding_factor(table, 1) * table.turns_per_phase
    inductance = 1.5 * math.pi * MU_0 * (0.5 * n_s) ** 2 * stack / p
    assert linkage([1])[0] == pytest.approx(inductance / math.tanh(p * math.log(b / a)), rel=1e-12)


def test_axis_is_at_a_tooth_or_half_a_slot_pitch_on():
    """Full pitch, q = 2: coil group symmetric about the tooth at angle 0; span 5: half a pitch."""
    assert winding_table(machine(24, 4, 1, 6)).axis_a == 0.0
    assert winding_table(machine(24, 4, 2, 6)).axis_a == 0.0
    assert winding_table(machine(24, 4, 2, 5)).axis_a == math.pi / 24


def test_reference_machine():
    """Winding of checks A10: 25 conductors per slot in series make 100 turns per phase."""
    table = winding_table(machine(24, 4, 1, 6, turns=25))
    assert table.conductors.shape == (24, 1, 3)
    assert table.turns_per_phase == 100.0
    # One pole counter-clockwise, by hand: belts -B, A, -C with the axis of A at the first tooth.
    belts = [(0, -25, 0), (0, -25, 0), (25, 0, 0), (25, 0, 0), (0, 0, -25), (0, 0, -25)]
    assert table.conductors[:6, 0].tolist() == [list(map(float, belt)) for belt in belts]


def test_chorded_coils_start_at_the_bore_and_end_at_the_bottom():
    """Layers of 24/4 chorded to 5/6, one pole by hand: bottom sides lie one slot earlier."""
    conductors = winding_table(machine(24, 4, 2, 5, turns=1)).conductors
    letters = np.array([["ABC"[int(np.argmax(np.abs(c)))] for c in s] for s in conductors])
    signs = np.sign(conductors.sum(axis=2))
    assert "".join(letters[:6, 0]) == "BBAACC"
    assert signs[:6, 0].tolist() == [-1.0, -1.0, 1.0, 1.0, -1.0, -1.0]
    assert "".join(letters[:6, 1]) == "CBBAAC"
    assert signs[:6, 1].tolist() == [1.0, -1.0, -1.0, 1.0, 1.0, -1.0]


def test_parallel_paths_divide_turns_and_conductors():
    """Two paths: half the series turns, a quarter of the resistance and of the end inductance."""
    one, two = machine(24, 4, 2, 5), machine(24, 4, 2, 5, paths=2)
    assert winding_table(two).turns_per_phase == 0.5 * winding_table(one).turns_per_phase
    assert np.array_equal(2.0 * winding_table(two).conductors, winding_table(one).conductors)
    assert phase_resistance(two) == pytest.approx(0.25 * phase_resistance(one), rel=1e-14)
    assert end_winding_inductance(two) == pytest.approx(
        0.25 * end_winding_inductance(one), rel=1e-14
    )


def test_table_cannot_be_changed():
    """The array is read-only: what was computed cannot drift."""
    with pytest.raises(ValueError, match="read-only"):
        winding_table(machine(24, 4, 1, 6)).conductors[0, 0, 0] = 1.0


def test_copper_resistivity():
    """IEC 60028:1925: 1/58 Ohm mm2/m at 20 C, 3.93e-3 per K; values to six digits."""
    for celsius, rho in ((20, 0.017241), (75, 0.0209676), (100, 0.0226616), (155, 0.0263882)):
        assert copper_resistivity(celsius) == pytest.approx(1e-6 * rho, rel=5e-6)


def test_ends_of_tooth_coils_are_bundles_of_their_own():
    """12/10, 4 coils of 25 turns a phase: four times 2 ends of mu0 25^2 0.11 0.3 H, by hand.

    Its resistance: 100 turns of 2 (100 + 110) mm as above.
    """
    design = machine(12, 10, 2, 1)
    assert end_winding_inductance(design) == pytest.approx(MU_0 * 8 * 625 * 0.033, rel=1e-12)
    assert phase_resistance(design) == pytest.approx(0.0226616 * 42.0 / 1.4, rel=5e-6)


def test_resistance_and_end_inductance_by_hand():
    """100 turns of 2 (100 + 110) mm, 1.4 mm2 at 100 C: 42 m, 0.0226616 x 42 / 1.4 Ohm.

    End winding with lambda 0.3: 2/2 mu0 100^2 0.11 0.3 H. Six digits of the table.
    """
    design = machine(24, 4, 1, 6)
    assert phase_resistance(design) == pytest.approx(0.0226616 * 42.0 / 1.4, rel=5e-6)
    assert end_winding_inductance(design) == pytest.approx(MU_0 * 330.0, rel=1e-12)


REFUSED = [
    ((20, 4, 2, 5), r"stator\.slots = 20: 4 poles give no three like .*accepted 18 or 21$"),
    ((15, 6, 2, 2), r"stator\.slots = 15: .*accepted 9 or 18, or 4 or 8 poles"),
    ((27, 6, 1, 3), r"stator\.slots = 27: a single layer with 6 poles needs .*accepted 18 or 36$"),
    ((27, 3, 2, 9), r"rotor\.poles = 3: poles come in pairs; accepted 2 or 4"),
    ((18, 4, 1, 4), r"coil_span_slots = 4: a single layer .* odd span; accepted 3 or 5"),
    ((18, 4, 1, 9), r"coil_span_slots = 9: .*accepted odd numbers 1 to 8, full pitch is 4\.5"),
    ((9, 8, 2, 1, 25, 2), r"parallel_paths = 2: the 1 like coil groups .*accepted 1$"),
    ((12, 10, 2, 1, 25, 4), r"parallel_paths = 4: the 2 like coil groups .*accepted 1, 2$"),
    ((12, 8, 1, 1, 25, 4), r"parallel_paths = 4: the 2 like coil groups .*accepted 1, 2$"),
    ((24, 4, 1, 5), r"winding\.coil_span_slots = 5: a single-layer .*accepted 6"),
    ((24, 4, 2, 12), r"winding\.coil_span_slots = 12: .*accepted 1 to 11, full pitch is 6"),
    ((24, 4, 1, 6, 25, 4), r"winding\.parallel_paths = 4: the 2 like coil groups .*accepted 1, 2"),
    (
        (24, 4, 2, 6, 25, 3),
        r"winding\.parallel_paths = 3: the 4 like coil groups .*accepted 1, 2, 4",
    ),
]


@pytest.mark.parametrize(("wound", "text"), REFUSED, ids=[str(wound) for wound, _ in REFUSED])
def test_what_cannot_be_wound_is_refused(wound, text):
    """One line with key, value, fault and what would fit."""
    with pytest.raises(GeometryError, match=text):
        winding_table(machine(*wound))


def test_all_findings_at_once():
    """Wrong span and wrong number of paths are reported together."""
    findings = winding_findings(machine(24, 4, 1, 5, paths=3))
    assert [finding.code for finding in findings] == ["winding_span", "winding_paths"]
