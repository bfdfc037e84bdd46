"""Errors of figures: of the right ones, in their units, as large as the figures really change."""

import dataclasses
import math

import numpy as np
import pytest

from lamwright.geometry.design_file import read_machine
from lamwright.postprocess.error_bars import magnetic_errors, terminal_errors
from lamwright.postprocess.operating import saliency_ratio
from lamwright.postprocess.quantities import STATED
from lamwright.postprocess.summary import terminal_figures
from lamwright.postprocess.tables import verdict_record
from lamwright.postprocess.torque import TorqueSpectrum
from lamwright.postprocess.verdict import all_figures
from lamwright.solver.estimate import BEYOND, KNOWN_TO, FieldErrors, LinkageErrors
from tests.invented_verdict import MAGNETIC, verdict
from tests.shipped import DESIGNS

CHANGES = LinkageErrors(change_d=np.array([2e-3]), change_q=np.array([-1e-3]))
ERRORS = FieldErrors(0.05, 0.04, 0.003, 2e-3, 1e-3, CHANGES, 0.1, 3e-3, 2e-3, 0.02)
SHARE = BEYOND * (1.0 + KNOWN_TO)  # of one sample's change
FLOOR = 5e-3  # of the errors here, that of Newton's iteration at the most


def test_errors_stand_in_the_units_of_their_figures():
    """Ripple is kept as a share and shown in percent, so is its error: 0.003 is 0.3 %."""
    found = magnetic_errors(MAGNETIC, ERRORS)
    assert found["torque_nm"] == 0.05
    assert found["torque_ripple_percent"] == pytest.approx(0.3)
    assert found["psi_q_vs"] == 1e-3
    # Prescribed, or differences themselves.
    assert not {"current_a", "torque_difference_percent"} & set(found)


def test_currents_err_as_the_best_angle_does():
    """i_d = I cos gamma: an angle off by d moves it by i_q d, and i_q by i_d d (derived)."""
    found = magnetic_errors(MAGNETIC, ERRORS)
    off = math.radians(found["current_angle_deg"])
    assert found["i_d_a"] == pytest.approx(abs(MAGNETIC.i_q) * off)
    assert found["i_q_a"] == pytest.approx(abs(MAGNETIC.i_d) * off)


def test_saliency_errs_by_what_the_changed_linkages_change():
    """One sample: the figure's change times what lies beyond it and what is left open."""
    m = MAGNETIC
    own = saliency_ratio(m.i_d, m.i_q, m.psi_d, m.psi_q)
    shifted = saliency_ratio(m.i_d, m.i_q, m.psi_d + 2e-3, m.psi_q - 1e-3)
    expected = SHARE * abs(shifted - own)
    found = magnetic_errors(m, ERRORS)["saliency_ratio"]
    assert expected < found < (1.0 + FLOOR) * expected


def test_terminal_errors_are_the_figures_changes():
    """Voltage and power factor of a real design with changed linkages, computed anew."""
    design = read_machine(DESIGNS[0]).design
    other = dataclasses.replace(MAGNETIC, psi_d=MAGNETIC.psi_d + 2e-3, psi_q=MAGNETIC.psi_q - 1e-3)
    own, shifted = (terminal_figures(design, m) for m in (MAGNETIC, other))
    found = terminal_errors(design, MAGNETIC, own, ERRORS)
    for key, name in (("terminal_voltage_v", "line_voltage"), ("power_factor", "power_factor")):
        expected = SHARE * abs(getattr(shifted, name) - getattr(own, name))
        assert expected < found[key] < (1.0 + FLOOR) * expected
    # Formulas alone have no error by the meshes.
    assert "copper_loss_w" not in found


def test_an_infinite_error_is_refused():
    """JSON knows no infinity, and a reader would not know what to make of it."""
    with pytest.raises(ArithmeticError, match="torque_nm_error = inf: not a finite number"):
        magnetic_errors(MAGNETIC, dataclasses.replace(ERRORS, torque=float("inf")))


def test_the_record_holds_each_error_beside_its_figure():
    """`<key>_error` follows `<key>`; figures without an error have none."""
    made = verdict(errors={"torque_nm": 0.05})
    none = TorqueSpectrum((), np.zeros(0), np.zeros(0))
    record = verdict_record(made, none)
    keys = list(record)
    assert record["torque_nm_error"] == 0.05
    assert keys.index("torque_nm_error") == keys.index("torque_nm") + 1
    assert [key for key in keys if key.endswith("_error")] == ["torque_nm_error"]
    assert set(all_figures(made)) < set(keys)
    # Of all others it is said why they have none.
    assert set(record["errors_not_given"]) == set(all_figures(made)) - {"torque_nm"}
    assert record["errors_not_given"]["current_a"] == STATED
