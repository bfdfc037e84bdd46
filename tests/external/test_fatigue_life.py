"""Life by local stress against closed forms: Basquin, Goodman, Smith et al., Morrow, Neuber.

Source: Goodman 1899, Smith, Watson & Topper 1970, Morrow 1968, Neuber 1961, Ramberg & Osgood 1943,
all from memory; numbers worked by hand from the formulas (checks, group C6). Formula against
formula: the six digits given.
"""

import pytest

from lamwright.geometry.design_fatigue import FatigueData, MeanStressRule
from lamwright.postprocess.rib_life import (
    CyclicCurve,
    LocalCycle,
    local_cycle,
    median_life,
    neuber,
    reversed_amplitude,
)

YOUNG, TENSILE, YIELD = 210e9, 480e6, 350e6
FLAT = CyclicCurve(YOUNG, YIELD, 0.0)
SIX = 3e-6  # relative: half of the last digit given


def data(method: MeanStressRule, cut_edge: float = 1.0) -> FatigueData:
    """sigma_f' 900 MPa, b -0.09."""
    return FatigueData(
        method=method,
        strength_coefficient_mpa=900.0,
        strength_exponent=-0.09,
        tested_to_cycles=1e7,
        cut_edge_factor=cut_edge,
        surface_factor=1.0,
        size_factor=1.0,
        scatter_log10_life=0.2,
        source="invented for this test",
    )


@pytest.mark.parametrize(
    ("method", "amplitude", "life"),
    [
        ("goodman", 218.182e6, 3.44361e6),
        ("smith-watson-topper", 212.132e6, 4.70659e6),
        ("morrow", 180e6, 2.91947e7),
    ],
)
def test_start_and_stop_to_300_mpa(method, amplitude, life):
    """0 to 300 MPa: amplitude and mean 150. Morrow's equals 150 / (1 - 150/900) = 180, derived."""
    cycle = local_cycle(300e6, YIELD, FLAT)
    assert (cycle.amplitude, cycle.mean) == (150e6, 150e6)
    found = reversed_amplitude(cycle, data(method), TENSILE)
    assert found == pytest.approx(amplitude, rel=SIX)
    assert median_life(found, data(method)) == pytest.approx(life, rel=SIX)


def test_neuber_at_a_notch_of_three():
    """K_t 3, S 200 MPa, K' 800 MPa, n' 0.12: 390.398 MPa and 4.39112e-3.

    The product to 1e-10: the root is found to 1e-12 and goes in with the power 1/n' at most.
    """
    stress, strain = neuber(600e6, CyclicCurve(YOUNG, 800e6, 0.12))
    assert stress == pytest.approx(390.398e6, rel=SIX)
    assert strain == pytest.approx(4.39112e-3, rel=SIX)
    assert stress * strain == pytest.approx(600e6**2 / YOUNG, rel=1e-10)


def test_neuber_without_hardening():
    """Perfectly plastic at 350 MPa: strain 600^2 / (210e3 x 350) = 4.89796e-3."""
    stress, strain = neuber(600e6, FLAT)
    assert stress == YIELD
    assert strain == pytest.approx(4.89796e-3, rel=SIX)
    assert neuber(300e6, FLAT) == (300e6, pytest.approx(300e6 / YOUNG))


def test_unloading_is_elastic_up_to_twice_yield():
    """Flat curve: back from 600 MPa the range is elastic (Melan): amplitude 300, mean 350 - 300.

    Beyond twice yield it flows back: range 2 x 350, E x half the strain range 800^2/(2 x 700).
    """
    settled = local_cycle(600e6, YIELD, FLAT)
    assert settled.strain == pytest.approx(4.89796e-3, rel=SIX)
    told = (settled.maximum, settled.amplitude, settled.swing, settled.mean)
    assert told == pytest.approx((350e6, 300e6, 300e6, 50e6))
    flowing = local_cycle(800e6, YIELD, FLAT)
    assert flowing.amplitude == pytest.approx(800e6**2 / (2.0 * 700e6))
    assert flowing.swing == pytest.approx(350e6)
    assert flowing.mean == pytest.approx(0.0, abs=1.0)


def test_a_lowered_strength_shortens_by_its_power():
    """Amplitude over 0.8 of the strength: life x 0.8^(1/0.09)."""
    ratio = median_life(200e6, data("goodman", 0.8)) / median_life(200e6, data("goodman"))
    assert ratio == pytest.approx(0.8 ** (1.0 / 0.09), rel=1e-12)


def test_pressed_places_get_no_help():
    """0 to -300 MPa: amplitude 150 without mean stress by every rule; so a life, not none."""
    cycle = local_cycle(-300e6, YIELD, FLAT)
    for method in ("goodman", "smith-watson-topper", "morrow"):
        assert reversed_amplitude(cycle, data(method), TENSILE) == pytest.approx(150e6)


def test_a_mean_beyond_the_strength_has_no_life():
    """Goodman at a mean of R_m: no amplitude is borne."""
    cycle = LocalCycle(640e6, 3e-3, 150e6, 150e6, 490e6)
    assert median_life(reversed_amplitude(cycle, data("goodman"), TENSILE), data("goodman")) == 0.0
