"""Loss separation: Bertotti, IEEE Trans. Magnetics 24(1), 1988 (from memory), and closed forms.

Figures of checks D4, given to six digits: 1e-5.
"""

import numpy as np
import pytest

from lamwright.postprocess.iron_loss import harmonics
from lamwright.postprocess.loss_surface import (
    TABLE_END,
    TABLE_STEP,
    LossSurface,
    eddy_coefficient,
    skin_factor,
    specific_loss,
)

B_TABLE = TABLE_STEP * np.arange(round(TABLE_END / TABLE_STEP) + 1)


def law(hysteresis: float, eddy: float, excess: float) -> LossSurface:
    """A sheet of h = k_h B^2, x = k_e B^1.5, and no skin effect."""
    return LossSurface(
        hysteresis=hysteresis * B_TABLE**2,
        excess=excess * B_TABLE**1.5,
        permeability=np.full(B_TABLE.size, 1e-12),
        eddy=eddy,
        thickness=0.5e-3,
        resistivity=0.5e-6,
        density=7700.0,
        frequency_range=(50.0, 1000.0),
        b_range=(0.1, 1.5),
        misfit=0.0,
    )


THREE_TERMS = law(0.02, 5e-5, 1e-3)


@pytest.mark.parametrize(
    ("b", "f", "thickness", "resistivity", "density", "loss"),
    [
        (1.5, 50.0, 0.50e-3, 0.46e-6, 7700.0, 0.653074),
        (1.0, 50.0, 0.50e-3, 0.46e-6, 7700.0, 0.290255),
        (1.0, 400.0, 0.35e-3, 0.52e-6, 7650.0, 8.10475),
    ],
)
def test_classical_eddy_loss(b, f, thickness, resistivity, density, loss):
    """(pi f B d)^2 / (6 rho density)."""
    found = eddy_coefficient(thickness, resistivity, density) * (f * b) ** 2
    assert found == pytest.approx(loss, rel=1e-5)


def test_skin_correction():
    """(3/x)(sinh x - sin x)/(cosh x - cos x); its series and its end meet it at the joints."""
    x = np.array([1.0, 2.0, 3.0])
    assert skin_factor(x) == pytest.approx([0.998417, 0.975589, 0.893205], abs=6e-7)
    for joint in (0.3, 30.0):
        below, above = skin_factor(np.array([joint * (1 - 1e-9), joint * (1 + 1e-9)]))
        assert below == pytest.approx(above, rel=1e-7)


@pytest.mark.parametrize(
    ("f", "b", "loss"),
    [(50.0, 1.5, 3.18077), (50.0, 1.0, 1.47855), (200.0, 1.0, 8.82843), (1000.0, 0.5, 28.6803)],
)
def test_three_terms(f, b, loss):
    """k_h f B^2 + k_c (f B)^2 + k_e (f B)^1.5."""
    found = specific_loss(THREE_TERMS, np.array(f), np.array(b))
    assert found == pytest.approx(loss, rel=1e-5)


def _loss_of_waveform(period: np.ndarray, f: float, surface: LossSurface) -> float:
    """Sum over the harmonics and both axes of their ellipses, W/kg."""
    own = harmonics(period[:, None], 1.0)
    axes = np.stack([own.major, own.minor])
    return float(specific_loss(surface, f * own.order[:, None], axes).sum())


@pytest.mark.parametrize("direction", [1.0, 1.0j, np.exp(0.7j)])
def test_a_sampled_sine_is_the_formulas(direction):
    """64 points of a pure sine give the formula's figure in any direction; 1e-3 asked, exact."""
    period = 1.2 * direction * np.sin(2.0 * np.pi * np.arange(64) / 64 + 0.3)
    found = _loss_of_waveform(period, 50.0, THREE_TERMS)
    formula = specific_loss(THREE_TERMS, np.array(50.0), np.array(1.2))
    assert found == pytest.approx(float(formula), rel=1e-9)


def test_a_circular_field_has_twice_the_classical_loss():
    """dB/dt of both components: exact."""
    eddy_only = law(0.0, 5e-5, 0.0)
    angle = 2.0 * np.pi * np.arange(64) / 64
    circular = _loss_of_waveform(1.2 * np.exp(1j * angle), 50.0, eddy_only)
    alternating = _loss_of_waveform(1.2 * np.cos(angle) + 0j, 50.0, eddy_only)
    assert circular == pytest.approx(2.0 * alternating, rel=1e-12)


def test_classical_loss_is_that_of_the_slopes():
    """Of a waveform with harmonics, by its ellipses and by the mean of |dB/dt|^2 (Parseval)."""
    angle = 2.0 * np.pi * np.arange(4096) / 4096
    period = np.exp(1j * angle) - 0.2 * np.cos(3 * angle + 0.4) + 0.07j * np.sin(7 * angle)
    slope = 1j * np.exp(1j * angle) + 0.6 * np.sin(3 * angle + 0.4) + 0.49j * np.cos(7 * angle)
    # e f^2 B^2 of an alternating field is e / (2 pi^2) times the mean of (dB/dt)^2, f = 1 Hz
    from_slopes = 5e-5 / (2.0 * np.pi**2) * np.mean(np.abs(2.0 * np.pi * slope) ** 2)
    found = _loss_of_waveform(period, 1.0, law(0.0, 5e-5, 0.0))
    assert found == pytest.approx(from_slopes, rel=1e-9)
