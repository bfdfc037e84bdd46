"""Ribs as rows: units by hand, what has no meaning stays empty, places named after the outline."""

import csv
import io
import math
from dataclasses import replace

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.postprocess.rib_tables import (
    elastic_errors,
    elastic_figures,
    outline_place,
    rib_rows,
    ribs_csv,
)
from lamwright.postprocess.ribs import RibReport, RibStress
from tests.outlines import b1_design

SECTION = cross_section(b1_design())


def invented_report() -> RibReport:
    """A pressed rib and one that is pulled; the peak where B1's table has it, on the cap."""
    # checks C10: (35.069, 16.750) mm with x on the q axis of four poles.
    at = 1e-3 * complex(35.069, 16.750) * np.exp(0.25j * math.pi)
    first, second = SECTION.ribs
    row = RibStress(
        rib=first,
        mean_tension=-5e6,
        mean_shear=1e6,
        bending=2e6,
        peak=80e6,
        peak_at=complex(at),
        yield_margin=4.0,
        mean_yield_speed=math.inf,
    )
    pulled = replace(row, rib=second, mean_tension=20e6, mean_yield_speed=100.0 * math.pi)
    return RibReport(
        speed=50.0 * math.pi,
        yield_strength=320e6,
        ribs=(row, pulled),
        peak=80e6,
        peak_error=1e5,
        peak_at=row.peak_at,
        yield_margin=4.0,
        growth_d=1e-6,
        growth_q=2e-6,
        growth_max=2e-6,
        gap_left=0.398e-3,
    )


def test_rib_table_reads_back():
    """Units converted by hand; a rib under pressure never yields in tension: empty, not inf.

    First yield at speed x sqrt(margin): 1500 rpm x 2; peak over mean 80 / 20; error 1 % of 80,
    of the speed a half of that share.
    """
    report = invented_report()
    figures = elastic_figures(SECTION, report)
    errors = elastic_errors(SECTION, report, report, np.array([0.01, 0.02, 0.5]))
    rows = rib_rows(SECTION, report, figures, errors=errors)
    first, second = csv.DictReader(io.StringIO(ribs_csv(rows)))
    assert first["rib"] == SECTION.ribs[0].name
    assert float(first["width_mm"]) == pytest.approx(0.6, rel=1e-5)
    assert float(first["tension_mean_mpa"]) == pytest.approx(-5.0)
    assert float(first["peak_angle_deg"]) == pytest.approx(
        math.degrees(math.atan2(16.750, 35.069)), abs=1e-3
    )
    assert float(first["speed_first_yield_rpm"]) == pytest.approx(3000.0)
    assert float(first["peak_mpa_error"]) == pytest.approx(0.8)
    assert float(first["speed_first_yield_rpm_error"]) == pytest.approx(15.0)
    assert first["speed_mean_yield_rpm_error"] == ""
    assert first["speed_mean_yield_rpm"] == first["stress_concentration"] == ""
    assert float(second["speed_mean_yield_rpm"]) == pytest.approx(3000.0)
    assert float(second["stress_concentration"]) == pytest.approx(4.0)
    assert rows[0].record["speed_mean_yield_rpm"] is None


def test_places_are_named_after_the_outline():
    """B1 (checks C10): cap of 2.5 mm, sides of 25 and 30 mm about the q axis' point, bore, rim."""
    q_axis = complex(np.exp(0.25j * math.pi))
    centre = 0.0395 * math.sqrt(2.0)
    cap = complex(0.0330211, 0.0153156) + 0.0025 * np.exp(0.3j)
    assert outline_place(SECTION, complex(cap * q_axis)) == "barrier 1, arc of 2.5 mm"
    assert outline_place(SECTION, q_axis * (centre - 0.030)) == "barrier 1, arc of 30 mm"
    assert outline_place(SECTION, q_axis * (centre - 0.025)) == "barrier 1, arc of 25 mm"
    assert outline_place(SECTION, 0.0395 * q_axis) == "rim"
    assert outline_place(SECTION, 0.012 * q_axis) == "bore"
    assert outline_place(SECTION, 0.020 * q_axis) == "inside the iron"
