"""Random magnetisation cards, invented: from soft steel to one that is nearly saturated at rest.

Polarisation J = J_s x / (1 + x^n)^(1/n), x = mu_0 (mu_r - 1) H / J_s: n = 1 is the law of
Froelich (1881), a large n a sharp knee (common practice, no source). To H is added
H_c tanh(J / 0.2 J_s), the toe that real curves begin with: the slope first rises, then falls.
Cards give as many points, and as many digits, as catalogues do; the points end anywhere between
a third of the polarisation and full saturation, so that laws have to go on by themselves.
"""

from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import MagnetisationCurve, SteelCard
from lamwright.geometry.steel_card import card_findings, curve_findings
from lamwright.solver.steel import MU_0
from lamwright.solver.types import FloatArray

MOST_FIELD = 0.6  # T, mu_0 H of a card's last point


@dataclass(frozen=True, slots=True)
class Curve:
    """What a card was drawn from."""

    permeability: float  # relative, at rest, without the toe
    saturation: float  # J_s, T
    sharpness: float  # n
    toe: float  # H_c, A/m

    def __str__(self) -> str:
        """For a line in a report."""
        return (
            f"mu_r {self.permeability:.3g}, J_s {self.saturation:.2f} T, "
            f"n {self.sharpness:.1f}, H_c {self.toe:.0f} A/m"
        )

    def points(self, count: int, share: float) -> tuple[FloatArray, FloatArray]:
        """`count` points (B in T, H in A/m) as far as J = `share` J_s, at most to `MOST_FIELD`."""
        n = self.sharpness
        most = (self.permeability - 1.0) * MOST_FIELD / self.saturation
        share = min(share, most / (1.0 + most**n) ** (1.0 / n))
        # Half of the points in even steps of J, half in even steps of the share still missing.
        start = 0.6 * share
        top = 1.0 - np.geomspace(1.0 - start, 1.0 - share, count - count // 2)
        j = np.concatenate([np.linspace(0.0, start, count // 2 + 1)[1:-1], top])
        x = j / (1.0 - j**n) ** (1.0 / n)
        h = x * self.saturation / (MU_0 * (self.permeability - 1.0)) + self.toe * np.tanh(j / 0.2)
        return self.saturation * j + MU_0 * h, h


def random_steel(rng: np.random.Generator, like: SteelCard) -> tuple[SteelCard, Curve]:
    """A usable card and its curve; the same for the same state of `rng`.

    Args:
        rng: what it is drawn with.
        like: a card whose mechanical data are taken.
    """
    permeability = float(np.exp(rng.uniform(np.log(3.0), np.log(30_000.0))))
    toe = float(rng.choice([0.0, rng.uniform(5.0, 100.0)]))
    curve = Curve(permeability, rng.uniform(0.3, 2.2), float(rng.uniform(1.0, 8.0)), toe)
    share = 1.0 - float(np.exp(rng.uniform(np.log(1e-3), np.log(0.3))))
    b, h = _as_printed(*curve.points(int(rng.integers(8, 41)), share))
    magnetisation = MagnetisationCurve(
        b_t=tuple(b.tolist()), h_a_per_m=tuple(h.tolist()), source="invented at random"
    )
    card = like.model_copy(update={"name": str(curve), "magnetisation": magnetisation})
    assert not card_findings(card), card_findings(card)
    assert not curve_findings(card), curve_findings(card)
    return card, curve


def _as_printed(b: FloatArray, h: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Rounded to 1 mT and four digits of H; points that this spoils are left out."""
    b, h = np.round(b, 3), np.array([float(f"{value:.4g}") for value in h])
    kept = [(0.0, 0.0)]
    for b_k, h_k in zip(b.tolist(), h.tolist(), strict=True):
        rise, run = b_k - kept[-1][0], h_k - kept[-1][1]
        if rise > 0.0 and run > 0.0 and rise >= MU_0 * run:
            kept.append((b_k, h_k))
    kept_b, kept_h = np.array(kept[1:]).T
    return kept_b, kept_h
