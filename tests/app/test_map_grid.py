"""Grids of flux maps: what is chosen for a machine, and what is refused with one clear line."""

import math
from pathlib import Path

import numpy as np
import pytest

from lamwright.app.lamination import section_of
from lamwright.app.map_grid import GridWishes, map_grid, positions_for
from lamwright.app.map_screen import wishes_of
from lamwright.app.point import read_machine
from lamwright.geometry.errors import LamwrightError

DESIGNS = Path(__file__).parents[2] / "designs"
NOTHING = {"points": None, "i_d": None, "i_q": None, "positions": None}


def grid_of(name="demo_24s4p_arc", **options):
    machine = read_machine(DESIGNS / f"{name}.toml")
    return map_grid(machine, section_of(machine), wishes_of({**NOTHING, **options}))


def test_a_mirrored_rotor_without_magnets_needs_one_quadrant():
    """15 x 15 currents from 0 to 1.25 x the most current, 12 A here, at 12 positions.

    Steps grow outwards, from a sixtieth of the range or less along q, where ribs saturate at once.
    """
    grid = grid_of()
    for currents in (grid.i_d, grid.i_q):
        assert (currents[0], currents[-1], currents.size) == (0.0, pytest.approx(15.0), 15)
        assert np.all(np.diff(currents, 2) > 0.0)
    assert grid.i_q[1] < 15.0 / 60.0
    assert grid.position == pytest.approx(np.arange(12) * math.pi / 3.0 / 2 / 12)
    assert grid.cautions == ()


@pytest.mark.parametrize("name", ["demo_36s4p_magnet", "gallery/lift_27s6p"])
def test_magnets_and_unlike_halves_ask_for_both_signs(name):
    """Both signs of i_q with 0 among them; the count asked for is made odd."""
    grid = grid_of(name, points="5x6")
    assert grid.i_d[0] == 0.0
    assert grid.i_q == pytest.approx(-grid.i_q[::-1])
    assert grid.i_q.size == 7
    assert 0.0 in grid.i_q


def test_lists_are_taken_as_they_are():
    """Only the axis that is listed changes."""
    grid = grid_of(i_d="0, 2,5,12", points="5x4")
    assert grid.i_d.tolist() == [0.0, 2.0, 5.0, 12.0]
    assert grid.i_q.size == 4


@pytest.mark.parametrize(
    ("slots", "poles", "count"), [(24, 4, 12), (36, 4, 12), (48, 4, 13), (72, 4, 13), (60, 4, 12)]
)
def test_positions_are_clear_of_the_slot_ripple(slots, poles, count):
    """Slots ripple q times: M positions let harmonic M / gcd(M, q) through, q a pole and phase."""
    q = slots // poles // 3
    assert positions_for(poles // 2, slots) == count
    angles = 2.0 * math.pi * q * np.arange(count) / count
    for harmonic in (1, 2, 3):
        assert abs(np.mean(np.exp(1j * harmonic * angles))) < 1e-12


def test_positions_that_meet_the_slots_alike_are_told():
    """Six positions for six slots a pole and phase: every slot ripple is taken for the mean."""
    (caution,) = grid_of("gallery/blower_36s2p", positions=6).cautions
    assert "6 positions meet the slot ripple at 1 of its phases" in caution
    assert "13 positions do not" in caution


REFUSED = [
    ({"points": "2x15"}, "--points 2x15: 2 currents make no grid; accepted 3 to 200"),
    ({"points": "15"}, "--points 15: no pair of counts; accepted such as 15x15"),
    ({"points": "0x0"}, "--points 0x0: 0 currents make no grid"),
    ({"i_d": ""}, "--i-d : no list of currents; accepted numbers in A with commas"),
    ({"i_d": "0,a,5"}, "--i-d 0,a,5: no list of currents"),
    ({"i_d": "0,12"}, "--i-d 0,12: 2 currents make no grid; accepted 3 to 200 rising currents"),
    ({"i_q": "0,5,3,12"}, "--i-q 0,5,3,12: the currents do not rise"),
    ({"i_q": "0,5,5,12"}, "--i-q 0,5,5,12: the currents do not rise"),
    ({"i_q": "-5,0,12"}, "--i-q -5,0,12: negative currents follow by the mirror"),
    ({"i_d": "1,5,12"}, "--i-d 1,5,12: begins above 0; accepted lists that begin with 0"),
    ({"i_d": "0,5,nan"}, "--i-d 0,5,nan: not all finite numbers"),
    ({"i_d": "0,5,inf"}, "--i-d 0,5,inf: not all finite numbers"),
    ({"i_d": "0,2,5"}, "--i-d 0,2,5: ends below the most current; accepted lists to 12 A or more"),
    ({"positions": 5}, "--positions 5: too few; accepted 6 to 360"),
    ({"positions": 1000}, "--positions 1000: too many; accepted 6 to 360"),
    (
        {"points": "5x5", "i_d": "0,5,12", "i_q": "0,5,12"},
        "--points 5x5: --i-d and --i-q are given; remove one of them",
    ),
]


@pytest.mark.parametrize(("options", "line"), REFUSED, ids=lambda value: str(value)[:40])
def test_bad_grids_are_refused(options, line):
    """One line: option, value, fault, remedy."""
    with pytest.raises(LamwrightError) as caught:
        grid_of(**options)
    assert str(caught.value).startswith(line)
    assert "\n" not in str(caught.value)


def test_magnets_need_the_side_that_opposes():
    """With magnets a list of i_q may begin below 0, and not above."""
    assert grid_of("demo_36s4p_magnet", i_q="-60,0,30,60").i_q[0] == -60.0
    with pytest.raises(LamwrightError, match="begin at or below 0"):
        grid_of("demo_36s4p_magnet", i_q="5,30,60")


def test_wishes_default_to_nothing():
    """Without options all is chosen."""
    assert wishes_of(NOTHING) == GridWishes()
