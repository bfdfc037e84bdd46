"""What the reader of a verdict should be wary of: always, and for this design.

The thresholds below are this project's own promises for its default meshes and positions.
"""

from collections.abc import Iterator, Mapping, Sequence

from lamwright.geometry.design import SteelCard
from lamwright.geometry.steel_card import curve_findings

from .verdict import MagneticFigures, StressFigures, TerminalFigures

MOST_TORQUE_DIFFERENCE = 0.005  # of the mean, Maxwell stress against linkages
MOST_COENERGY_DIFFERENCE = 0.03  # of the mean, at the worst position
MOST_MISSED_RIPPLE = 0.1  # of the ripple, between samples and interpolant
MOST_STRESS_ERROR = 0.02  # of the peak
MOST_GROWTH = 0.2  # of the air gap

STANDING = (
    "rotors burst: these results support, and never replace, a qualified engineer's judgement, the"
    " supplier's material certificate, an overspeed test in containment, and local codes and"
    " standards",
    "two-dimensional field: end effects in the iron are not in it",
    "sinusoidal phase currents; iron, friction and AC copper loss are in no figure",
    "figures marked as estimates hold DC resistance and end-winding leakage by formula"
    " (leakage +-30 %), star connection taken",
    "static plane stress at one temperature, no shaft fit; fatigue is not judged",
)


def cautions(
    magnetic: MagneticFigures,
    terminal: TerminalFigures,
    stress: StressFigures,
    cards: Sequence[SteelCard],
    errors: Mapping[str, float],
) -> tuple[str, ...]:
    """All cautions, those of this design first, one line each.

    Args:
        magnetic: figures at rated current.
        terminal: figures at rated speed.
        stress: figures at overspeed.
        cards: the steels.
        errors: by the figure's key, in its unit, as in `Verdict.errors`.
    """
    return (
        *_of_field(magnetic),
        *_of_supply(terminal),
        *_of_stress(stress, errors),
        *dict.fromkeys(line for card in cards for line in _of_steel(card)),
        *STANDING,
    )


def _of_field(magnetic: MagneticFigures) -> Iterator[str]:
    if abs(magnetic.torque_difference) > MOST_TORQUE_DIFFERENCE:
        yield (
            f"mean torque by Maxwell stress and by linkages differ by"
            f" {100.0 * magnetic.torque_difference:.2g} %: the mesh is too coarse"
        )
    if magnetic.coenergy_difference > MOST_COENERGY_DIFFERENCE:
        yield (
            f"torque at one position differs from the coenergy's slope by"
            f" {100.0 * magnetic.coenergy_difference:.2g} % of the mean"
        )
    if magnetic.ripple - magnetic.ripple_of_samples > MOST_MISSED_RIPPLE * magnetic.ripple:
        yield "the positions hardly resolve the torque ripple: ask for more"


def _of_supply(terminal: TerminalFigures) -> Iterator[str]:
    if terminal.line_voltage > terminal.supply_voltage:
        yield (
            f"needs about {terminal.line_voltage:.0f} V at rated speed, the supply gives"
            f" {terminal.supply_voltage:.0f} V: rated current is not reached at rated speed"
        )


def _of_stress(stress: StressFigures, errors: Mapping[str, float]) -> Iterator[str]:
    share = errors["rib_stress_peak_mpa"] / (1e-6 * stress.peak)
    if share > MOST_STRESS_ERROR:
        yield f"the greatest rib stress has not settled: estimated error {100.0 * share:.1f} %"
    if stress.yield_margin < 1.0:
        yield "the rotor yields below overspeed; linear stress ends there"
    if stress.growth > MOST_GROWTH * (stress.growth + stress.gap_left):
        share = 100.0 * stress.growth / (stress.growth + stress.gap_left)
        yield f"radial growth at overspeed takes {share:.0f} % of the air gap"


def _of_steel(card: SteelCard) -> Iterator[str]:
    values = {
        "density": card.density_kg_per_m3.source,
        "Young's modulus": card.youngs_modulus_gpa.source,
        "Poisson's ratio": card.poissons_ratio.source,
        "yield strength": card.yield_strength_mpa.source,
        "tensile strength": card.tensile_strength_mpa.source,
        "magnetisation": card.magnetisation.source,
    }
    by_source: dict[str, list[str]] = {}
    for name, source in values.items():
        by_source.setdefault(source, []).append(name)
    told = "; ".join(f"{', '.join(names)}: {source}" for source, names in by_source.items())
    yield f"steel card {card.name!r}: {told}"
    for finding in curve_findings(card):
        yield f"steel card {card.name!r}: {finding.text}"
