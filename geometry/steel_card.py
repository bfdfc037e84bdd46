"""Rules of a steel card that depend on several of its values, or on the unit they are in."""

import math

from .design import SteelCard
from .errors import Finding
from .fatigue_checks import fatigue_findings
from .hardening_checks import hardening_findings
from .hot_steel import hot_card_findings
from .loss_checks import loss_findings

MU_0 = 4e-7 * math.pi  # H/m, permeability of free space

# Bounds that no sheet steel passes but a wrong unit does (common practice, no source).
_BOUNDS = {
    "density_kg_per_m3": (1000.0, 20000.0),
    "youngs_modulus_gpa": (10.0, 1000.0),
    "yield_strength_mpa": (10.0, 5000.0),
    "tensile_strength_mpa": (10.0, 5000.0),
}
_B_MOST = 10.0  # T; a sheet's certificate ends near 2 T, a column in mT starts above this


def card_findings(card: SteelCard) -> tuple[Finding, ...]:
    """Everything that forbids the use of a card.

    The curve must be B(H) with both rising; the strengths and moduli must be possible.
    """
    loss = () if card.loss is None else loss_findings(card.loss)
    hardening = () if card.hardening is None else hardening_findings(card, card.hardening)
    fatigue = () if card.fatigue is None else fatigue_findings(card, card.fatigue)
    hot = () if card.hot is None else hot_card_findings(card.hot)
    more = (*loss, *hardening, *fatigue, *hot)
    return (*_mechanical_faults(card), *_curve_faults(card), *more)


def curve_findings(card: SteelCard) -> tuple[Finding, ...]:
    """What a user should know about a usable card: the part of the curve that is not steel.

    Steel adds to the flux density of free space, so dB/dH >= mu_0; a measured curve falls below
    that only by error. A law built from the card has to leave the curve there.
    """
    b, h = card.magnetisation.b_t, card.magnetisation.h_a_per_m
    for k in range(1, min(len(b), len(h))):
        slope = (b[k] - b[k - 1]) / (h[k] - h[k - 1])
        if slope < MU_0:
            fault = f"dB/dH from the point before is {slope / MU_0:.3g} mu_0, steel has 1 or more"
            remedy = "the curve from here on is replaced by a slope of mu_0"
            return (Finding("curve-below-mu0", f"magnetisation.b_t[{k + 1}]", b[k], fault, remedy),)
    return ()


def _mechanical_faults(card: SteelCard) -> list[Finding]:
    findings = []
    for key, (least, most) in _BOUNDS.items():
        value = getattr(card, key).value
        if not least <= value <= most:
            remedy = f"accepted {least:g} to {most:g}, in the unit of the key"
            findings.append(
                Finding("card-unit", f"{key}.value", value, "not a sheet steel", remedy)
            )
    ratio = card.poissons_ratio.value
    if ratio >= 0.5:
        fault, remedy = "a solid has less than 0.5", "accepted above 0, below 0.5"
        findings.append(Finding("card-poisson", "poissons_ratio.value", ratio, fault, remedy))
    strength, most_yield = card.tensile_strength_mpa.value, card.yield_strength_mpa.value
    if most_yield > strength:
        fault = f"above the tensile strength ({strength:g})"
        remedy = f"accepted up to {strength:g}"
        findings.append(
            Finding("card-strengths", "yield_strength_mpa.value", most_yield, fault, remedy)
        )
    return findings


def _curve_faults(card: SteelCard) -> list[Finding]:
    b, h = card.magnetisation.b_t, card.magnetisation.h_a_per_m
    findings = [
        *_not_rising("magnetisation.b_t", b),
        *_not_rising("magnetisation.h_a_per_m", h),
    ]
    if len(b) != len(h):
        fault = f"number of points, but b_t has {len(b)}"
        remedy = "accepted one H for each B"
        findings.append(Finding("curve-lengths", "magnetisation.h_a_per_m", len(h), fault, remedy))
    top = max(b)
    if top > _B_MOST:
        place = f"magnetisation.b_t[{b.index(top) + 1}]"
        remedy = f"accepted tesla, up to {_B_MOST:g}"
        findings.append(Finding("curve-unit", place, top, "beyond any sheet steel", remedy))
    return findings


def _not_rising(key: str, values: tuple[float, ...]) -> list[Finding]:
    return [
        Finding(
            "curve-order",
            f"{key}[{k + 1}]",
            values[k],
            f"not above the value before it ({values[k - 1]:g})",
            "accepted values that rise from each to the next",
        )
        for k in range(1, len(values))
        if values[k] <= values[k - 1]
    ]
