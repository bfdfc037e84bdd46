"""Records and CSV: every key promised, units, and that they read back."""

import csv
import io
import json
import math

import invented_verdict as invented
import numpy as np
import pytest

from lamwright.postprocess.files import json_text
from lamwright.postprocess.tables import (
    point_record,
    spectrum_csv,
    verdict_record,
    waveform_csv,
)
from lamwright.postprocess.torque import TorqueSpectrum, TorqueWaveform
from lamwright.solver.types import FieldSolution, NewtonReport

SPECTRUM = TorqueSpectrum((6, 12), np.array([0.1, 0.8]), np.array([0.0, math.pi / 2.0]))


def test_verdict_reads_back_with_its_keys():
    """Every figure, limit, outcome and estimate under the key the documents promise."""
    record = json.loads(json_text(verdict_record(invented.verdict(), SPECTRUM)))
    # fmt: off
    promised = (
        "torque_nm", "torque_ripple_percent", "saliency_ratio", "psi_d_vs", "psi_q_vs",
        "current_angle_deg", "power_factor", "rib_stress_peak_mpa", "yield_margin",
        "speed_overspeed_rpm", "passes", "outline_dxf", "limits", "outcomes", "version",
        "design_hash", "field_elements", "field_unknowns", "newton_steps", "seconds", "cautions",
        "torque_linkage_nm", "torque_difference_percent", "terminal_voltage_v", "estimates",
    )
    # fmt: on
    assert [key for key in promised if key not in record] == []
    assert record["passes"] is True
    assert record["limits"] == invented.LIMITS.model_dump()
    assert record["outcomes"]["most_ripple_percent"] == {
        "figure": "torque_ripple_percent",
        "value": 20.0,
        "limit": 25.0,
        "holds": True,
    }
    assert record["estimates"][:2] == ["power_factor", "terminal_voltage_v"]
    assert record["torque_harmonics"][1] == {
        "order_el": 12,
        "amplitude_nm": 0.8,
        "phase_deg": 90.0,
    }
    assert isinstance(record["field_elements"], int)


def test_point_record_is_the_solution():
    """Values as computed, angle in degrees, torque both ways: 3/2 p (psi_d i_q - psi_q i_d)."""
    none = np.zeros(0)
    solution = FieldSolution(
        i_d=8.0,
        i_q=4.0,
        position=math.radians(2.5),
        a_rotor=none,
        a_stator=none,
        psi_abc=np.array([0.3, -0.1, -0.2]),
        psi_d=0.4,
        psi_q=0.1,
        torque=2.3,
        energy=1.0,
        coenergy=2.0,
        newton=NewtonReport(3, (1.0, 1e-3, 1e-8), 0.1),
    )
    record = point_record(solution, 2)
    assert record["angle_mech_deg"] == pytest.approx(2.5, rel=1e-15)
    assert [record[f"psi_{x}_vs"] for x in "abc"] == [0.3, -0.1, -0.2]
    assert record["torque_maxwell_nm"] == 2.3
    assert record["torque_linkage_nm"] == pytest.approx(3.0 * (0.4 * 4.0 - 0.1 * 8.0), rel=1e-12)
    assert json.loads(json_text(record)) == record


def test_waveform_table_reads_back():
    """One row a position with units in the header; nine digits survive."""
    angle = np.arange(6) * math.pi / 18.0
    torque = 8.0 + np.cos(6.0 * angle)
    waveform = TorqueWaveform(
        2, 6.0, 9.0, angle, torque, np.full(6, 0.4), np.full(6, 0.1), np.full(6, 2.0)
    )
    rows = list(csv.DictReader(io.StringIO(waveform_csv(waveform))))
    assert [float(row["angle_el_deg"]) for row in rows] == pytest.approx([0, 10, 20, 30, 40, 50])
    assert [float(row["angle_mech_deg"]) for row in rows] == pytest.approx([0, 5, 10, 15, 20, 25])
    assert [float(row["torque_nm"]) for row in rows] == pytest.approx(torque, rel=1e-8)
    # Constant linkages and coenergy: 3/2 p (psi_d i_q - psi_q i_d) = 9 N m, both columns.
    assert {row["torque_linkage_nm"] for row in rows} == {"9"}
    assert [float(row["torque_coenergy_nm"]) for row in rows] == pytest.approx([9.0] * 6)


def test_spectrum_table_has_percent_of_the_mean():
    """0.8 of 8 N m is 10 %."""
    rows = list(csv.DictReader(io.StringIO(spectrum_csv(SPECTRUM, 8.0))))
    assert rows[1] == {"order_el": "12", "amplitude_nm": "0.8", "percent_of_mean": "10"}
