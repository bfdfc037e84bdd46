"""Coarse verdicts of the page: true error bars, bounded work, alike in one process and in two."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from random_designs import random_design

from lamwright.app.coarse_bars import coarse_bars
from lamwright.app.coarse_work import Hand, coarse_work, fewest_positions
from lamwright.app.lamination import section_of
from lamwright.app.point import read_machine
from lamwright.app.pool import Crew
from lamwright.app.study_full import full_figures_of
from lamwright.app.study_quick import QuickWork
from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.quantities import figures_of

DESIGNS = Path(__file__).parents[2] / "designs"
SHIPPED = [*sorted(DESIGNS.glob("*.toml")), *sorted(DESIGNS.glob("gallery/*.toml"))]
# What a verdict in 1.5 s on two cores allows, see app/README.md.
MOST_UNKNOWNS, MOST_FIELDS = 20_000, 50
RANDOM_DESIGNS = 14


@pytest.mark.slow
@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
def test_coarse_error_bars_hold_on_the_shipped_designs(path: Path):
    """Each figure differs from that of `assess` by no more than its bar; the work is bounded.

    The bars are 1.5 times the largest difference here or more, so that other designs have room.
    """
    machine = read_machine(path)
    work = _within_bars(machine, section_of(machine))
    assert work.field.model.numbering.n_dof < MOST_UNKNOWNS
    steps, searched = len(work.field.found.last), len(work.field.found.last[0])
    assert steps * (searched + len(work.field.waveform.torque)) < MOST_FIELDS


@pytest.mark.slow
def test_coarse_error_bars_hold_on_random_designs():
    """The same on machines that the bars were set by too, one of hardly any saliency among them."""
    rng = np.random.default_rng(7)
    demo = read_machine(DESIGNS / "demo_24s4p_arc.toml")
    for _ in range(RANDOM_DESIGNS):
        machine = replace(demo, design=random_design(rng))
        _within_bars(machine, section_of(machine))


def _within_bars(machine: Machine, section: CrossSection) -> QuickWork:
    with Crew(Hand, 0) as crew:
        work = coarse_work(machine, section, crew).quick
    groups = (work.magnetic, work.terminal, work.stress)
    coarse = {one.key: float(one.value) for group in groups for one in figures_of(group)}
    full, _ = full_figures_of(machine, section, "normal")
    for key, bar in coarse_bars(coarse, machine.design.pole_pairs).items():
        assert abs(coarse[key] - full[key]) <= bar, key
    return work


@pytest.mark.slow
def test_a_second_process_changes_no_figure():
    """Halves and chains are the same whoever solves them: equal to the last bit."""
    machine = read_machine(SHIPPED[0])
    section = section_of(machine)
    with Crew(Hand, 0) as alone, Crew(Hand, 1) as pair:
        one, two = (coarse_work(machine, section, crew) for crew in (alone, pair))
    assert one.quick.magnetic == two.quick.magnetic
    assert one.quick.stress == two.quick.stress
    assert np.array_equal(one.drawn.a_stator, two.drawn.a_stator)


@pytest.mark.parametrize(
    ("pole_pairs", "slots", "count"), [(2, 24, 9), (2, 36, 10), (1, 36, 10), (3, 54, 10)]
)
def test_few_positions_still_hold_the_slot_harmonics(pole_pairs: int, slots: int, count: int):
    """A mean over the positions is free of the first four multiples of the slot harmonic, n = q.

    Derived: positions over 60 electrical degrees let through orders 6 M k, slots have 6 n j; the
    first they share is j = M / gcd(M, n).
    """
    assert fewest_positions(pole_pairs, slots, 9, 5) == count
    n = slots // (6 * pole_pairs)
    at = np.arange(count) / count
    for multiple in range(1, 5):
        wave = np.cos(2.0 * np.pi * n * multiple * at)
        assert abs(wave.mean()) < 1e-12
