"""Rules of a steel card's hardening curve."""

from .design import SteelCard
from .design_hardening import HardeningCurve
from .errors import Finding

# A punched sheet tears before; a strain in percent starts above this (common practice, no source).
MOST_STRAIN = 1.0


def hardening_findings(card: SteelCard, curve: HardeningCurve) -> tuple[Finding, ...]:
    """Everything that forbids the use of the curve: it must start at yield and must not soften."""
    strain, stress = curve.plastic_strain, curve.true_stress_mpa
    findings = []
    if len(strain) != len(stress):
        findings.append(
            Finding(
                "hardening-lengths",
                "hardening.true_stress_mpa",
                len(stress),
                f"number of points, but plastic_strain has {len(strain)}",
                "accepted one stress for each strain",
            )
        )
    if strain[0] != 0.0:
        findings.append(
            Finding(
                "hardening-start",
                "hardening.plastic_strain[1]",
                strain[0],
                "the curve does not start at yield",
                "accepted 0",
            )
        )
    if max(strain) > MOST_STRAIN:
        findings.append(
            Finding(
                "hardening-unit",
                f"hardening.plastic_strain[{strain.index(max(strain)) + 1}]",
                max(strain),
                "beyond any sheet steel",
                f"accepted plain numbers up to {MOST_STRAIN:g}, not percent",
            )
        )
    strength = card.yield_strength_mpa.value
    if stress[0] != strength:
        findings.append(
            Finding(
                "hardening-yield",
                "hardening.true_stress_mpa[1]",
                stress[0],
                f"not the yield strength ({strength:g})",
                f"accepted {strength:g}",
            )
        )
    return (
        *findings,
        *_falling("hardening.plastic_strain", strain, is_equal_wrong=True),
        *_falling("hardening.true_stress_mpa", stress, is_equal_wrong=False),
    )


def _falling(key: str, values: tuple[float, ...], is_equal_wrong: bool) -> list[Finding]:
    """The values below the one before, or equal to it where that is wrong too."""
    fault = "not above" if is_equal_wrong else "below"
    remedy = "accepted values that rise from each to the next"
    return [
        Finding(
            "hardening-order",
            f"{key}[{k + 1}]",
            values[k],
            f"{fault} the value before it ({values[k - 1]:g})",
            remedy if is_equal_wrong else "accepted values that do not fall",
        )
        for k in range(1, len(values))
        if values[k] < values[k - 1] or (is_equal_wrong and values[k] == values[k - 1])
    ]
