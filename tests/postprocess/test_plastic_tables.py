"""The rotor beyond yield in JSON and CSV: units, nothing infinite, cautions where it can hurt."""

import csv
import io
import json
import math
from dataclasses import replace

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.postprocess.plastic_ribs import PlasticReport, PlasticRib
from lamwright.postprocess.plastic_tables import (
    PLASTIC_STANDING,
    plastic_cautions,
    plastic_csv,
    plastic_record,
)
from tests.outlines import b1_design

SECTION = cross_section(b1_design())
RPM = 30.0 / math.pi


def report() -> PlasticReport:
    """Invented figures, each different."""
    ribs = tuple(PlasticRib(rib, 0.5, 1e-6, 0.25, 0.01) for rib in SECTION.ribs)
    return PlasticReport(
        test_speed=1000.0,
        running_speed=800.0,
        yield_strength=350e6,
        hardens=False,
        survives=True,
        ribs=ribs,
        largest_strain=0.02,
        yielded_share=0.003,
        growth_d=1e-6,
        growth_q=2e-6,
        growth_max=3e-6,
        first_yield_speed=900.0,
        burst_low=1400.0,
        burst_high=1402.0,
        burst_tensile=1600.0,
        mean_hoop_speed=5000.0,
        mean_rib_speed=1500.0,
        regime="shakedown",
        cycles=1,
    )


def test_record_has_units_and_the_figures():
    """SI to rpm, um, percent, mm2 by hand."""
    record = plastic_record(report(), SECTION)
    assert record["speed_burst_low_rpm"] == pytest.approx(1400.0 * RPM)
    assert record["growth_left_q_um"] == pytest.approx(2.0)
    assert record["plastic_strain_most_percent"] == pytest.approx(2.0)
    assert record["ribs"][0]["yielded_area_mm2"] == pytest.approx(1.0)
    assert record["ribs"][0]["yielded_section_percent"] == pytest.approx(50.0)
    rows = list(csv.DictReader(io.StringIO(plastic_csv(report()))))
    assert [row["rib"] for row in rows] == [rib.name for rib in SECTION.ribs]
    assert float(rows[0]["plastic_strain_most_percent"]) == pytest.approx(1.0)


def test_collapse_is_null_and_forbidden():
    """No infinity in JSON; the first caution says not to run the test."""
    rib = replace(report().ribs[0], largest_strain=math.inf)
    burst = replace(
        report(),
        survives=False,
        ribs=(rib,),
        test_speed=1500.0,
        growth_d=math.inf,
        growth_q=math.inf,
        growth_max=math.inf,
        largest_strain=math.inf,
        regime="collapse",
    )
    record = plastic_record(burst, SECTION)
    assert "Infinity" not in json.dumps(record)
    assert record["growth_left_q_um"] is None
    assert "do not run it" in record["cautions"][0]
    assert plastic_csv(burst).splitlines()[1].endswith(",")


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"test_speed": 1390.0}, "only 0.7 % above the test speed"),
        ({"growth_max": 0.25 * SECTION.gap}, "takes 25 % of the air gap"),
        ({"largest_strain": 0.08}, "plastic strain of 8 %: the sheet may tear"),
        ({"regime": "alternating"}, "low-cycle fatigue"),
        ({"regime": "ratcheting"}, "grows with every start"),
        ({"regime": "unsettled", "cycles": 12}, "did not settle in 12 cycles"),
    ],
)
def test_cautions_where_it_can_hurt(change, words):
    """Each state has its line before the standing ones, which a sound rotor has alone."""
    assert plastic_cautions(report(), SECTION) == PLASTIC_STANDING
    lines = plastic_cautions(replace(report(), **change), SECTION)
    assert words in lines[0]
    assert lines[1:] == PLASTIC_STANDING
