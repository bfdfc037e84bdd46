"""Fields foreseen over a grid of currents, against polynomials and a machine's own field."""

import numpy as np
import pytest
from shipped import shipped_model

from lamwright.solver.field import solve_foreseen, solve_point, unknowns
from lamwright.solver.foreseen import foreseen

I_D, I_Q = np.array([0.0, 1.0, 2.5, 4.0]), np.array([-1.0, 0.5, 1.0, 3.0])


def law(i_d, i_q):
    """Linear in one current times anything in the other: what (1 - P_d)(1 - P_q) leaves out."""
    return np.array([3.0 + i_d * np.exp(i_q), np.sin(i_d) * (1.0 - 2.0 * i_q)])


def known(node):
    rows, columns = range(node[0] + 1), range(node[1] + 1)
    return {(r, c): law(I_D[r], I_Q[c]) for r in rows for c in columns if (r, c) != node}


def test_what_is_linear_in_one_current_is_met():
    """The error of order (2, 2) is the mixed slope of that order, zero here: rounding is left."""
    guesses = foreseen(known((3, 3)), (3, 3), I_D, I_Q)
    assert guesses[0] == pytest.approx(law(I_D[3], I_Q[3]), rel=1e-12)
    assert len(guesses) == 2


def test_order_one_is_the_sum_of_the_neighbours_less_the_corner():
    """(1, 1) takes constants along each current: a_w + a_s - a_sw."""
    before = known((1, 1))
    (guess,) = foreseen(before, (1, 1), I_D, I_Q)
    assert guess == pytest.approx(before[0, 1] + before[1, 0] - before[0, 0], rel=1e-14)


def test_along_a_single_line_it_is_the_straight_line():
    """At a band's first row only nodes of the same row are known."""
    line = {(0, c): law(I_D[0], I_Q[c]) for c in (0, 1, 2)}
    (guess,) = foreseen(line, (0, 3), I_D, I_Q)
    slope = (line[0, 2] - line[0, 1]) / (I_Q[2] - I_Q[1])
    assert guess == pytest.approx(line[0, 2] + slope * (I_Q[3] - I_Q[2]), rel=1e-12)


def test_nothing_known_gives_no_guess():
    """Then the chain begins from zero."""
    assert foreseen({}, (2, 2), I_D, I_Q) == []
    assert foreseen({(0, 0): law(0.0, 0.0)}, (2, 2), I_D, I_Q) == []


def test_a_machine_takes_fewer_steps_and_gives_the_same_field():
    """One minimum of the energy: the guess changes the steps, not the field (1e-6 at 1e-7)."""
    model = shipped_model("demo_24s4p_arc", 2.0, 1e-7)
    i_d, i_q, position = np.linspace(4.0, 10.0, 4), np.linspace(5.0, 11.0, 4), 0.1
    before = {
        (r, c): unknowns(model, solve_point(model, i_d[r], i_q[c], position))
        for r in (1, 2, 3)
        for c in (1, 2, 3)
        if (r, c) != (3, 3)
    }
    guesses = foreseen(before, (3, 3), i_d, i_q)
    alone = solve_point(model, i_d[3], i_q[3], position)
    found = solve_foreseen(model, i_d[3], i_q[3], position, guesses)
    assert found.newton.steps < alone.newton.steps
    assert found.torque == pytest.approx(alone.torque, rel=1e-6)
    assert found.psi_abc == pytest.approx(alone.psi_abc, rel=1e-6, abs=1e-8)
    assert unknowns(model, found) == pytest.approx(unknowns(model, alone), abs=1e-7)


def test_without_sources_there_is_no_field():
    """Guesses leave noise; without currents and magnets the field is zero exactly."""
    model = shipped_model("demo_24s4p_arc", 2.0, 1e-7)
    noise = np.full(unknowns(model, solve_point(model, 0.0, 0.0, 0.0)).size, 1e-6)
    assert solve_foreseen(model, 0.0, 0.0, 0.1, [noise, noise]).energy == 0.0
