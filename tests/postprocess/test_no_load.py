"""No load from invented linkages with known harmonics: every figure in closed form."""

import math
from dataclasses import dataclass

import numpy as np
import pytest

from lamwright.postprocess.no_load import (
    cogging_torque,
    line_emf,
    linkage_spectrum,
    no_load,
    no_load_positions,
    peak_linkage,
)
from lamwright.solver.types import FloatArray

PAIRS = 3
HARMONICS = {1: 0.5, 3: 0.04, 5: 0.02, 7: 0.01, 17: 0.004}  # V s
UNLIKE = {**HARMONICS, 2: 0.03, 4: 0.01}  # poles that differ bring even orders


@dataclass
class Bare:
    """What `no_load` reads of a field."""

    psi_abc: FloatArray
    psi_d: float
    psi_q: float
    torque: float


def fields(harmonics: dict[int, float], period: int) -> list[Bare]:
    found = []
    for position in no_load_positions(PAIRS, period):
        at = PAIRS * position - 2.0 * math.pi / 3.0 * np.arange(3)
        psi = sum(a * np.cos(n * at + 0.3 * (n - 1)) for n, a in harmonics.items())
        found.append(Bare(psi, 0.5, 0.0, 0.2 * math.sin(12.0 * PAIRS * position)))
    return found


@pytest.mark.parametrize(("harmonics", "period"), [(HARMONICS, 1), (HARMONICS, 2), (UNLIKE, 2)])
def test_whole_period_from_a_part(harmonics: dict[int, float], period: int) -> None:
    """The waveform is put together from three phases: all places and orders to rounding, 1e-12."""
    record = no_load(fields(harmonics, period), period)
    assert len(record.psi) == 180
    exact = sum(a * np.cos(n * record.angle_el + 0.3 * (n - 1)) for n, a in harmonics.items())
    assert record.psi == pytest.approx(exact, abs=1e-12)
    spectrum = linkage_spectrum(record)
    wanted = [harmonics.get(n, 0.0) for n in spectrum.order]
    assert spectrum.amplitude == pytest.approx(wanted, abs=1e-12)
    assert cogging_torque(record) == pytest.approx(0.4, rel=1e-3)  # crests between samples


def test_back_emf_between_lines() -> None:
    """E = sqrt(3/2) omega sqrt(sum (n psi_n)^2) over the orders that three does not divide."""
    spectrum = linkage_spectrum(no_load(fields(HARMONICS, 1), 1))
    omega = 2.0 * math.pi * 50.0
    squares = sum((n * a) ** 2 for n, a in HARMONICS.items() if n % 3)
    total, fundamental = line_emf(spectrum, omega)
    assert total == pytest.approx(math.sqrt(1.5 * squares) * omega, rel=1e-12)
    assert fundamental == pytest.approx(math.sqrt(1.5) * omega * 0.5, rel=1e-12)


def test_peak_of_a_sine_and_its_third() -> None:
    """Psi = cos + h cos 3 peaks at 1 + h for h > 0 (derived); the interpolant within 1e-6."""
    record = no_load(fields({1: 0.5}, 1), 1)
    assert peak_linkage(record) == pytest.approx(0.5, rel=1e-6)
