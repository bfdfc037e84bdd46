"""The loss surface gives a card's own loss back and is sane between its points and beyond."""

from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_file import read_steel_card
from lamwright.postprocess.iron_loss import harmonics
from lamwright.postprocess.loss_surface import (
    MOST_MISFIT,
    loss_surface,
    specific_loss,
)

STEEL = Path(__file__).parents[2] / "designs" / "steel"
CARDS = [read_steel_card(STEEL / f"demo_{name}.toml") for name in ("035", "050")]


def _with_points(card: SteelCard, **columns: np.ndarray) -> SteelCard:
    assert card.loss is not None
    changed = {key: tuple(float(v) for v in values) for key, values in columns.items()}
    return card.model_copy(update={"loss": card.loss.model_copy(update=changed)})


def _columns(card: SteelCard) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    assert card.loss is not None
    loss = card.loss
    return np.array(loss.frequency_hz), np.array(loss.b_t), np.array(loss.loss_w_per_kg)


@pytest.mark.parametrize("card", CARDS, ids=lambda card: card.name)
def test_a_sinusoidal_field_in_a_slab_has_the_cards_own_loss(card):
    """At every measured point, from 64 samples of the waveform: 3 % (issue 6, point 5)."""
    surface = loss_surface(card)
    sine = np.sin(2.0 * np.pi * np.arange(64) / 64)
    for f, b, loss in zip(*_columns(card), strict=True):
        own = harmonics((b * sine + 0j)[:, None], f)
        axes = np.stack([own.major, own.minor])
        found = specific_loss(surface, own.order[:, None], axes).sum()
        assert found == pytest.approx(loss, rel=MOST_MISFIT)
    assert surface.misfit < 0.005  # what rounding to three digits leaves: 0.32 % and 0.23 %


@pytest.mark.parametrize("seed", range(8))
def test_the_surface_is_sane_between_and_beyond(seed):
    """Points taken away at random, 2 % of noise: no part negative, all rising with B and f."""
    rng = np.random.default_rng(seed)
    f, b, loss = _columns(CARDS[seed % 2])
    kept = np.sort(rng.choice(f.size, rng.integers(8, f.size), replace=False))
    noisy = loss[kept] * (1.0 + 0.02 * rng.uniform(-1.0, 1.0, kept.size))
    card = _with_points(CARDS[seed % 2], frequency_hz=f[kept], b_t=b[kept], loss_w_per_kg=noisy)
    surface = loss_surface(card)
    assert np.all(np.diff(surface.hysteresis) >= 0.0)
    assert np.all(np.diff(surface.excess) >= 0.0)
    assert surface.hysteresis[0] == surface.excess[0] == 0.0
    grid = specific_loss(surface, np.geomspace(1.0, 2e4, 40)[:, None], np.linspace(0.0, 3.0, 301))
    assert np.all(np.diff(grid, axis=0)[:, 1:] > 0.0)
    assert np.all(np.diff(grid, axis=1) > 0.0)
    assert surface.misfit < 0.05  # noise of 2 % on either of two points


def test_points_at_unlike_flux_densities_give_the_same_surface():
    """A sheet measured at flux densities that no two frequencies share: h and x within 2 %."""
    surface = loss_surface(CARDS[0])
    f, b, _ = _columns(CARDS[0])
    moved = b * (1.0 + 0.02 * np.random.default_rng(3).uniform(-1.0, 1.0, b.size))
    loss = specific_loss(surface, f, moved)
    again = loss_surface(_with_points(CARDS[0], b_t=moved, loss_w_per_kg=loss))
    at = [200, 500, 1000, 1400]
    assert again.hysteresis[at] == pytest.approx(surface.hysteresis[at], rel=0.02)
    assert again.excess[at] == pytest.approx(surface.excess[at], rel=0.02)


def test_a_card_whose_eddy_loss_is_above_its_points_has_a_misfit():
    """Twice the thickness: four times the eddy loss, more than measured at 2 kHz. It is told."""
    card = CARDS[1]
    assert card.loss is not None
    loss = card.loss.model_copy(update={"sheet_thickness_mm": 1.0})
    assert loss_surface(card.model_copy(update={"loss": loss})).misfit > MOST_MISFIT


def test_a_card_without_points_has_no_surface():
    """The caller tells it as not given."""
    with pytest.raises(ValueError, match="holds no loss points"):
        loss_surface(CARDS[0].model_copy(update={"loss": None}))
