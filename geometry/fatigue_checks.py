"""Rules of a steel card's fatigue data."""

from .design import SteelCard
from .design_fatigue import FatigueData
from .errors import Finding

# Of the tensile strength. Fitted lines of steels meet half a cycle between one and three times it;
# a column in another unit does not (common practice, no source).
LEAST_SHARE, MOST_SHARE = 0.7, 5.0


def fatigue_findings(card: SteelCard, data: FatigueData) -> tuple[Finding, ...]:
    """Everything that forbids the use of the data."""
    return (*_of_line(card, data), *_of_cyclic_curve(card, data))


def _of_line(card: SteelCard, data: FatigueData) -> list[Finding]:
    strength, value = card.tensile_strength_mpa.value, data.strength_coefficient_mpa
    least, most = LEAST_SHARE * strength, MOST_SHARE * strength
    if least <= value <= most:
        return []
    fault = f"not a line of a steel with {strength:g} MPa tensile strength"
    key = "fatigue.strength_coefficient_mpa"
    return [Finding("fatigue-unit", key, value, fault, f"accepted {least:g} to {most:g}")]


def _of_cyclic_curve(card: SteelCard, data: FatigueData) -> list[Finding]:
    strength, exponent = data.cyclic_strength_mpa, data.cyclic_exponent
    pair = {"cyclic_strength_mpa": strength, "cyclic_exponent": exponent}
    given = {key: value for key, value in pair.items() if value is not None}
    if len(given) == 1:
        ((key, value),) = given.items()
        (missing,) = pair.keys() - given.keys()
        remedy = f"accepted both, or neither: give {missing} too"
        fault = "half of a cyclic curve"
        return [Finding("fatigue-cyclic", f"fatigue.{key}", value, fault, remedy)]
    if strength is not None and strength < (least := card.yield_strength_mpa.value):
        fault = f"below the yield strength ({least:g})"
        key = "fatigue.cyclic_strength_mpa"
        return [Finding("fatigue-cyclic", key, strength, fault, f"accepted {least:g} or more")]
    return []
