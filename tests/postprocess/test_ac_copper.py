"""AC copper loss from the fields of a machine, against the closed form of its slots."""

import functools

import numpy as np
import pytest

from lamwright.geometry.design_loss import StrandDesign
from lamwright.geometry.winding import phase_resistance
from lamwright.postprocess.ac_copper import (
    SlotStrands,
    alone_factor,
    closed_factor,
    direct_loss,
    field_loss,
    slot_strands,
    strand_field,
    thickness_in_depths,
)
from lamwright.postprocess.torque import waveform_positions
from lamwright.solver.field import solve_point
from lamwright.solver.types import FieldSolution
from tests.shipped import shipped, shipped_model

NAME = "demo_24s4p_arc"
CURRENT = 0.5  # A, so little that steel hardly drives flux across the slots
OMEGA = 2.0 * np.pi * 400.0
ROUND = StrandDesign(round_diameter_mm=0.944, in_hand=2)
BARS = StrandDesign(width_mm=1.4, height_mm=1.0, layers=17)


def _strands(strands: StrandDesign) -> SlotStrands:
    design = shipped(NAME, 2.0).machine.design
    winding = design.winding.model_copy(update={"strands": strands})
    found = slot_strands(
        design.model_copy(update={"winding": winding}), shipped_model(NAME, 2.0), 1
    )
    assert found is not None
    return found


@functools.cache
def _fields() -> tuple[FieldSolution, ...]:
    model = shipped_model(NAME, 2.0)
    at = CURRENT * np.sqrt(0.5)
    return tuple(solve_point(model, at, at, x) for x in waveform_positions(2, 6))


@pytest.mark.parametrize("strands", [ROUND, BARS], ids=["round", "bars"])
def test_the_fundamental_is_near_the_closed_form(strands):
    """Slots of one phase, steel soft: the field rises evenly through the copper.

    More than in a rectangle of its mean width, 17 and 15 % measured: between parallel teeth a slot
    is narrowest where the field is strongest.
    """
    own = _strands(strands)
    field = strand_field(own, shipped_model(NAME, 2.0), _fields())
    loss = field_loss(own, field, OMEGA)
    direct = direct_loss(own, CURRENT)
    found = 1.0 + loss[0] / direct + alone_factor(own, OMEGA) - 1.0
    assert field.order[0] == 1.0
    closed = float(closed_factor(own, np.array(OMEGA)))
    assert 1.0 < (found - 1.0) / (closed - 1.0) < 1.25


@pytest.mark.parametrize("strands", [ROUND, BARS], ids=["round", "bars"])
def test_thin_strands_lose_by_frequency_squared(strands):
    """All orders together, as each is thin against its penetration depth: 1 % at 20 and 10 Hz."""
    own = _strands(strands)
    field = strand_field(own, shipped_model(NAME, 2.0), _fields())
    loss = [field_loss(own, field, 2.0 * np.pi * f).sum() for f in (10.0, 20.0)]
    assert loss[1] == pytest.approx(4.0 * loss[0], rel=0.01)
    assert thickness_in_depths(own, 2.0 * np.pi * 10.0) < 0.1


def test_direct_loss_is_the_slots_part_of_the_resistance():
    """R I^2 of the wire in the slots; strands of 0.944 mm are 1.39977 mm2 for 1.4 stated."""
    own, design = _strands(ROUND), shipped(NAME, 2.0).machine.design
    slots = 1.5 * phase_resistance(design) * CURRENT**2 * 100.0 / (100.0 + 110.0)
    assert direct_loss(own, CURRENT) == pytest.approx(slots * 1.4 / 1.39977, rel=1e-4)


def test_no_strands_no_loss():
    """It is told as not given."""
    design = shipped(NAME, 2.0).machine.design
    winding = design.winding.model_copy(update={"strands": None})
    bare = design.model_copy(update={"winding": winding})
    assert slot_strands(bare, shipped_model(NAME, 2.0), 1) is None
