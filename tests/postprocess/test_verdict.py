"""The verdict: units, limits from both sides, figures that are no numbers, cautions."""

import dataclasses
import math

import invented_verdict as invented
import pytest
from plates import steel_card

from lamwright.geometry.design import SteelCard
from lamwright.postprocess.cautions import STANDING, cautions
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.verdict import all_figures, judged

# fmt: off
UNITS_AT_THE_END = (
    "_nm", "_percent", "_ratio", "_deg", "_a", "_vs", "_factor", "_v", "_rpm", "_w", "_ohm", "_mh",
    "_mpa", "_um", "_mm", "_mm2", "_relative", "_margin", "_elements", "_unknowns", "_solutions",
    "_steps", "_most", "_greatest", "_positions", "_refinements",
)
# fmt: on


def test_figures_leave_in_the_unit_of_their_key():
    """SI inside, units outside: values converted by hand (definitions of the units)."""
    found = {key: figure.value for key, figure in all_figures(invented.verdict()).items()}
    assert found["torque_nm"] == 10.0
    assert found["torque_ripple_percent"] == pytest.approx(20.0, rel=1e-12)
    assert found["current_angle_deg"] == pytest.approx(57.29577951308232, rel=1e-12)
    assert found["rib_stress_peak_mpa"] == pytest.approx(250.0, rel=1e-12)
    assert found["speed_overspeed_rpm"] == pytest.approx(754.0 * 60.0 / (2.0 * math.pi), rel=1e-12)
    assert found["radial_growth_um"] == pytest.approx(8.0, rel=1e-12)
    assert found["gap_left_mm"] == pytest.approx(0.392, rel=1e-12)
    assert found["end_winding_inductance_mh"] == pytest.approx(1.3, rel=1e-12)
    assert found["lamination_area_mm2"] == pytest.approx(3000.0, rel=1e-12)


def test_every_key_says_its_unit_and_stands_once():
    """House rule: a unit, or what is counted, at the end of each key."""
    verdict = invented.verdict()
    groups = (verdict.magnetic, verdict.terminal, verdict.stress, verdict.outline, verdict.solver)
    keys = [figure.key for group in groups for figure in figures_of(group)]
    assert len(keys) == len(set(keys))
    assert [key for key in keys if not key.endswith(UNITS_AT_THE_END)] == []


@pytest.mark.parametrize(
    ("group", "field", "missed", "key"),
    [
        ("magnetic", "torque", 8.99, "least_torque_nm"),
        ("magnetic", "ripple", 0.2501, "most_ripple_percent"),
        ("magnetic", "saliency", 2.99, "least_saliency_ratio"),
        ("stress", "yield_margin", 1.199, "least_yield_margin"),
    ],
)
def test_each_limit_alone_decides(group, field, missed, key):
    """One figure just beyond its limit: that outcome fails, the others hold, no pass."""
    base = invented.verdict()
    assert base.passes
    changed = dataclasses.replace(getattr(base, group), **{field: missed})
    verdict = invented.verdict(**{group: changed})
    assert [o.key for o in verdict.outcomes if not o.holds] == [key]
    assert not verdict.passes


def test_a_figure_at_its_limit_holds():
    """`least` and `most` include the limit itself (common language)."""
    at = dataclasses.replace(invented.MAGNETIC, torque=9.0, ripple=0.25, saliency=3.0)
    stress = dataclasses.replace(invented.STRESS, yield_margin=1.2)
    assert all(outcome.holds for outcome in judged(invented.LIMITS, at, stress))


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_a_figure_that_is_no_number_is_never_passed_on(value):
    """NaN compares false with every limit: it must stop the verdict, not slip through."""
    broken = dataclasses.replace(invented.MAGNETIC, ripple=value)
    with pytest.raises(ArithmeticError, match=r"torque_ripple_percent = .*: not a finite number"):
        judged(invented.LIMITS, broken, invented.STRESS)


ERRORS = {"rib_stress_peak_mpa": 3.0}  # of 250


def told(
    magnetic=invented.MAGNETIC,
    terminal=invented.TERMINAL,
    stress=invented.STRESS,
    cards=(),
    errors=ERRORS,
):
    return cautions(magnetic, terminal, stress, cards, errors)


def test_a_sound_design_has_the_standing_cautions_only():
    """What always holds is always said; nothing else without a cause."""
    assert told() == STANDING


@pytest.mark.parametrize(
    ("group", "changed", "text"),
    [
        ("magnetic", {"torque_difference": -0.006}, "by linkages differ by -0.6 %"),
        ("magnetic", {"coenergy_difference": 0.05}, "coenergy's slope by 5 %"),
        ("magnetic", {"ripple_of_samples": 0.17}, "positions hardly resolve"),
        ("terminal", {"line_voltage": 431.0}, "needs about 431 V at rated speed, the supply gives"),
        ("stress", {"yield_margin": 0.9}, "yields below overspeed"),
        ("stress", {"growth": 100e-6, "gap_left": 0.3e-3}, "takes 25 % of the air gap"),
    ],
)
def test_a_cause_brings_its_caution(group, changed, text):
    """Each threshold crossed alone brings exactly one line, in front of the standing ones."""
    base = {"magnetic": invented.MAGNETIC, "terminal": invented.TERMINAL, "stress": invented.STRESS}
    found = told(**{group: dataclasses.replace(base[group], **changed)})
    assert len(found) == len(STANDING) + 1
    assert text in found[0]


def test_a_stress_that_has_not_settled_is_told():
    """The error is the error bar of the same figure: 6 of 250 MPa is 2.4 %, above the limit."""
    found = told(errors={"rib_stress_peak_mpa": 6.0})
    assert found == ("the greatest rib stress has not settled: estimated error 2.4 %", *STANDING)


def test_steel_is_named_with_the_source_of_each_value():
    """Two equal cards are told once; values that share a source share a clause."""
    values = {"value": 0.3, "source": "handbook"}
    card = SteelCard.model_validate(
        {
            "name": "sheet",
            "density_kg_per_m3": values,
            "youngs_modulus_gpa": values,
            "poissons_ratio": values,
            "yield_strength_mpa": {"value": 380.0, "source": "certificate"},
            "tensile_strength_mpa": values,
            "magnetisation": {
                "b_t": (0.5, 1.0, 1.5),
                "h_a_per_m": (80.0, 150.0, 1000.0),
                "source": "measured",
            },
        }
    )
    found = told(cards=(card, card))
    assert len(found) == len(STANDING) + 1
    assert found[0].startswith("steel card 'sheet': density, Young's modulus, Poisson's ratio,")
    assert "yield strength: certificate; magnetisation: measured" in found[0]


def test_a_curve_that_leaves_steel_is_told():
    """Points with dB/dH below mu_0 are not used; the reader must know, the file may be a copy."""
    card = steel_card()
    points = card.magnetisation
    beyond = points.model_copy(
        update={
            "b_t": (*points.b_t, points.b_t[-1] + 1e-4),
            "h_a_per_m": (*points.h_a_per_m, points.h_a_per_m[-1] + 1e4),
        }
    )
    worse = card.model_copy(update={"magnetisation": beyond})
    fault = "replaced by a slope of mu_0"
    assert [fault in line for line in told(cards=(worse,))].count(True) == 1
    assert [fault in line for line in told(cards=(card,))].count(True) == 0
