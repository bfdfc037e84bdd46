"""Rules of a magnet card, and the temperatures that it is good for."""

from .design import MagnetCard, MagnetChoice
from .errors import Finding

REFERENCE_C = 20.0  # of the card's values
ANY_C = (-60.0, 250.0)  # C, what the design file takes
LEAST_SHARE = 0.05  # of a value at 20 C that a temperature must leave, else the straight law ends

# Bounds that no magnet passes but a wrong unit does (common practice, no source).
_BOUNDS = {
    "remanence_t": (0.05, 2.0),
    "recoil_relative_permeability": (1.0, 5.0),
    "remanence_coefficient_percent_per_k": (-1.0, 1.0),
    "knee_field_ka_per_m": (10.0, 5000.0),
    "knee_coefficient_percent_per_k": (-2.0, 2.0),
    "density_kg_per_m3": (1000.0, 10000.0),
}


def magnet_card_findings(card: MagnetCard) -> tuple[Finding, ...]:
    """Everything that forbids the use of a magnet card."""
    found = []
    for key, (least, most) in _BOUNDS.items():
        value = getattr(card, key).value
        if not least <= value <= most:
            remedy = f"accepted {least:g} to {most:g}, in the unit of the key"
            found.append(Finding("magnet-unit", f"{key}.value", value, "not a magnet", remedy))
    return tuple(found)


def temperature_findings(card: MagnetCard, choice: MagnetChoice) -> tuple[Finding, ...]:
    """Whether the card's straight law in the temperature reaches as far as asked."""
    low, high = temperature_range(card)
    fault = f"the magnet card {card.name!r} leaves nothing of remanence or knee there"
    remedy = f"accepted {low:.0f} to {high:.0f}"
    asked = {
        "magnet.temperature_c": choice.temperature_c,
        "magnet.demagnetising_temperature_c": choice.demagnetising_temperature_c,
    }
    return tuple(
        Finding("magnet-hot", key, value, fault, remedy)
        for key, value in asked.items()
        if value is not None and not low <= value <= high
    )


def temperature_range(card: MagnetCard) -> tuple[float, float]:
    """Temperatures in C between which `LEAST_SHARE` of remanence and knee is left."""
    low, high = ANY_C
    for key in ("remanence_coefficient_percent_per_k", "knee_coefficient_percent_per_k"):
        slope = 0.01 * getattr(card, key).value
        if slope:
            end = REFERENCE_C - (1.0 - LEAST_SHARE) / slope
            low, high = (low, min(high, end)) if slope < 0.0 else (max(low, end), high)
    return low, high
