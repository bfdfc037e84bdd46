"""The sliding circle: whole edges by renumbering with a sign, the rest by shear."""

import dataclasses
import math

import numpy as np
import pytest
from annulus import Ring, RingMachine, ring_sector, sheet_model

from lamwright.solver.field import solve_point
from lamwright.solver.gap import circle_nodes, rotor_place, sheared, turned
from lamwright.solver.steel import linear_law

MACHINE = RingMachine(
    pole_pairs=2,
    rotor=(Ring("rotor_iron", 0.039, 3),),
    bore=0.040,
    stator=(Ring("stator_iron", 0.050, 2),),
    stack_length=0.1,
    gap_layers=2,
    n_circle=12,
)
SECTOR = ring_sector(MACHINE)
EDGE = math.pi / 24.0  # rad


@pytest.mark.parametrize("angle", [0.0, 0.3 * EDGE, 0.49 * EDGE, 5.2 * EDGE, -7.4 * EDGE, 99.5])
def test_place_is_the_nearest_edge_and_a_rest(angle: float) -> None:
    """Angle = shift * edge + rest with |rest| at most half an edge; to 1e-9 of an edge."""
    place = rotor_place(SECTOR, angle)
    assert place.shift * EDGE + place.rest == pytest.approx(angle, abs=1e-9 * EDGE)
    assert abs(place.rest) <= 0.5 * EDGE * (1.0 + 1e-9)


def test_rounding_of_an_angle_is_no_shear() -> None:
    """An angle that is a whole number of edges but for rounding leaves the gap as meshed."""
    assert rotor_place(SECTOR, 7 * EDGE * (1.0 + 1e-14)).rest == 0.0


def test_circle_nodes_are_numbered_along_the_circle() -> None:
    """Rotor and stator both carry 2 n + 1 places, from the side at 0 to the far side."""
    for mesh in (SECTOR.rotor, SECTOR.stator):
        nodes, number = circle_nodes(mesh.nodes, SECTOR)
        assert sorted(number) == list(range(25))
        angle = np.arctan2(mesh.nodes[nodes, 1], mesh.nodes[nodes, 0])
        assert angle == pytest.approx(number * EDGE / 2.0, abs=1e-12)


def test_far_side_of_a_half_circle_pole_is_the_last_place() -> None:
    """At angle pi the phase may come out as -pi: the place must still be 2 n."""
    sector = ring_sector(
        RingMachine(1, MACHINE.rotor, MACHINE.bore, MACHINE.stator, 0.1, 2, n_circle=12)
    )
    nodes = sector.rotor.nodes.copy()
    nodes[np.abs(nodes[:, 1]) < 1e-12, 1] = -1e-18
    _, number = circle_nodes(nodes, sector)
    assert sorted(number) == list(range(25))


def test_irregular_circle_is_refused() -> None:
    """A node off its place would break the coupling silently."""
    nodes = SECTOR.rotor.nodes.copy()
    found, _ = circle_nodes(nodes, SECTOR)
    nodes[found[3]] *= 1.01
    with pytest.raises(ValueError, match="circle: 24 nodes, expected 25 equally spaced"):
        circle_nodes(nodes, SECTOR)


def test_turning_changes_sign_at_each_pole() -> None:
    """Antiperiodicity: a shift by one pole returns every place with a minus, by two with a plus."""
    number = np.arange(24)
    for poles, sign in ((1, -1.0), (2, 1.0), (-1, -1.0)):
        place, flips = turned(number, 24 * poles, 24)
        assert np.array_equal(place, number)
        assert np.all(flips == sign)
    place, flips = turned(number, 2, 24)
    assert np.array_equal(place, np.roll(number, -2))
    assert np.array_equal(flips, np.where(number < 22, 1.0, -1.0))


def test_shear_turns_the_circle_and_keeps_the_rim() -> None:
    """Circle nodes fall back by the rest, rim and below stay, angles between are linear in r."""
    nodes = SECTOR.rotor.nodes
    rest = 0.4 * EDGE
    moved = sheared(nodes, rest, MACHINE.rim, SECTOR.circle_radius)
    radius = np.hypot(*nodes.T)
    assert np.hypot(*moved.T) == pytest.approx(radius, rel=1e-14)
    turn = np.angle((moved @ [1, 1j])[radius > 0] / (nodes @ [1, 1j])[radius > 0])
    share = np.clip((radius[radius > 0] - MACHINE.rim) / (SECTOR.circle_radius - MACHINE.rim), 0, 1)
    assert turn == pytest.approx(-rest * share, abs=1e-12)


def test_smooth_machine_does_not_notice_the_angle() -> None:
    """Round rotor and bore: linkage and zero torque at any angle, between nodes too.

    Edges of 1.9 degrees, four times as long as half the gap is high: the shear by half an edge
    changes the linkage by 1e-8 and the torque by 1.3e-7 of 3/2 p psi i (measured).
    """
    fine = dataclasses.replace(MACHINE, n_circle=48)
    model = sheet_model(fine, linear_law(1000.0), linear_law(1e7), 100)
    at_rest = solve_point(model, 3.0, 4.0, 0.0)
    for angle in (EDGE, 0.25 * EDGE, 0.125 * EDGE, 17.3 * EDGE):
        solution = solve_point(model, 3.0, 4.0, angle)
        assert solution.psi_d == pytest.approx(at_rest.psi_d, rel=1e-7)
        assert solution.psi_q == pytest.approx(at_rest.psi_q, rel=1e-7)
        scale = 3.0 * math.hypot(at_rest.psi_d, at_rest.psi_q) * 5.0  # 3/2 p psi i
        assert abs(solution.torque) < 1e-6 * scale
