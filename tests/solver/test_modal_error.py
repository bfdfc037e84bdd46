"""Errors of natural frequencies against modes solved on the finer mesh."""

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.solver.mesh import mesh_lamination
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.modal import Mode, Period, index_modes, lowest_modes
from lamwright.solver.modal_bodies import finer_rotor, finer_stator, rotor_period, stator_period
from lamwright.solver.modal_error import BEYOND, frequency_errors
from tests.outlines import plain_design
from tests.plates import STEEL

COUNT = 2


def _again(finer: Period, mode: Mode) -> float:
    """The frequency of the mode next to one of the coarse mesh."""
    found = [other.frequency for other in index_modes(finer, mode.index, 6)]
    return min(found, key=lambda frequency: abs(frequency - mode.frequency))


@pytest.mark.parametrize("kind", ["free", "held", "stator"])
def test_changes_are_those_of_modes_solved_on_the_finer_mesh(kind):
    """One motion tells the change to 10 %: the two-level estimate leaves the smooth part out."""
    section = cross_section(plain_design())
    if kind == "stator":
        period = stator_period(section, STEEL)
        finer, carry = finer_stator(section, period, STEEL)
    else:
        mesh = mesh_lamination(section, MeshSettings(scale=4.0))
        period = rotor_period(section, mesh, STEEL, is_held=kind == "held")
        finer, carry = finer_rotor(section, period, STEEL, is_held=kind == "held")
    modes = lowest_modes(period, COUNT)
    own = np.array([mode.frequency for mode in modes])
    fine = np.array([_again(finer, mode) for mode in modes])
    assert np.all(fine < own)  # nested, and stiffer the coarser
    assert frequency_errors(finer, carry, modes) == pytest.approx(BEYOND * (own - fine), rel=0.1)
