"""What the reader of a rotor's ribs should be wary of, whatever the rotor."""

from lamwright.geometry.design import SteelCard

RIB_STANDING = (
    "rotors burst: run the overspeed test in containment that holds the parts",
    "strengths are those of the steel card: replace them by the supplier's certificate of the coil"
    " that is punched",
    "these results support, and never replace, the judgement and signature of an engineer licensed"
    " where the law asks for it",
    "local codes and standards rule over every figure here",
    "plane stress of one sheet at one temperature: no assembly, balance or vibration in it",
)


def rib_cautions(card: SteelCard) -> tuple[str, ...]:
    """The standing cautions, and where the card's strengths are from."""
    yielding, tensile = card.yield_strength_mpa, card.tensile_strength_mpa
    return (
        *RIB_STANDING,
        f"steel card {card.name!r}: yield strength {yielding.value:g} MPa, {yielding.source};"
        f" tensile strength {tensile.value:g} MPa, {tensile.source}",
    )
