"""Figures and cautions of the life in starts."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_fatigue import FatigueData
from lamwright.solver.types import FloatArray

from .quantities import CARD, shown_as, shown_estimate
from .rib_life import RibLife

MPA = 1e6  # Pa per MPa

LIFE_STANDING = (
    "life is an estimate by local stress of the sheet's plane, on the card's line for 50 % of"
    " specimens: starts until a crack that can be seen; burr, fretting at the shaft, corrosion,"
    " heat and vibration between the starts are not in it",
    "a life allows no inspection, overspeed test or certificate to be left out",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class LifeFigures:
    """The shortest life anywhere in the lamination."""

    low: float = field(
        metadata=shown_estimate(
            "life_shortest_2_3_percent_cycles", "starts until 2.3 % have cracked", ""
        )
    )
    median: float = field(
        metadata=shown_estimate(
            "life_shortest_50_percent_cycles", "starts until half have cracked", ""
        )
    )
    high: float = field(
        metadata=shown_estimate(
            "life_shortest_97_7_percent_cycles", "starts until 97.7 % have cracked", ""
        )
    )
    amplitude: float = field(
        metadata=shown_estimate(
            "life_shortest_amplitude_mpa", "its amplitude without mean stress", "MPa", 1e-6
        )
    )
    overspeed_share: float = field(
        metadata=shown_as(
            "life_overspeed_share_percent",
            "starts that go to overspeed",
            "%",
            100.0,
            exact="stated by the command",
        )
    )
    tested_to: float = field(
        metadata=shown_as(
            "life_line_tested_to_cycles", "the card's line was tested to", "", exact=CARD
        )
    )


def life_figures(
    lives: Sequence[RibLife], data: FatigueData, overspeed_share: float
) -> LifeFigures:
    """The shortest of all zones."""
    least = min(lives, key=lambda life: life.median)
    return LifeFigures(
        low=least.low,
        median=least.median,
        high=least.high,
        amplitude=least.amplitude,
        overspeed_share=overspeed_share,
        tested_to=data.tested_to_cycles,
    )


def local_rule(stress: FloatArray, factor: float, card: SteelCard, data: FatigueData) -> str:
    """How the local stress was found at the most stressed place.

    Args:
        stress: (n_zone, 2), Pa.
        factor: of the stress, at maximum speed.
        card: the steel.
        data: its fatigue data.
    """
    if factor * abs(stress).max() <= MPA * card.yield_strength_mpa.value:
        return "elastic"
    if data.cyclic_exponent is None:
        return "Neuber's rule, perfectly plastic"
    return "Neuber's rule, Ramberg-Osgood"


def life_cautions(lives: Sequence[RibLife], card: SteelCard, data: FatigueData) -> tuple[str, ...]:
    """What to be wary of, this rotor's own first, one line each."""
    return (*_own(lives, data), _of_card(card, data), *LIFE_STANDING)


def _own(lives: Sequence[RibLife], data: FatigueData) -> Iterator[str]:
    *ribs, elsewhere = lives
    if elsewhere.median < min(life.median for life in ribs):
        yield "the shortest life is not of a rib: look at bore, carriers and holes"
    if any(life.median < 1.0 for life in lives):
        yield "a place bears no cycle by the card's line: it is no matter of fatigue, but of burst"
    beyond = sum(life.high > data.tested_to_cycles for life in ribs)
    if beyond:
        yield (
            f"{beyond} of {len(ribs)} ribs have lives beyond the {data.tested_to_cycles:g} cycles"
            " that the card's line was tested to: read those as more than that"
        )


def _of_card(card: SteelCard, data: FatigueData) -> str:
    factors = (data.cut_edge_factor, data.surface_factor, data.size_factor)
    told = ", ".join(f"{factor:g}" for factor in factors)
    return (
        f"steel card {card.name!r}: fatigue line, factors of cut edge, surface and size ({told}),"
        f" scatter {data.scatter_log10_life:g} of log10 life: {data.source}"
    )
