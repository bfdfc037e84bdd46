"""What a steel card's sheet is at a temperature, and the rules of its table."""

from bisect import bisect_right

from .design import MachineDesign, SteelCard
from .design_fit import HotSteel
from .errors import Finding

_COLUMNS = ("yield_strength_mpa", "youngs_modulus_gpa")


def steel_at(card: SteelCard, celsius: float) -> SteelCard:
    """The card with strength and Young's modulus of a temperature.

    Unchanged where it has no table; at the nearer end beyond the table, which `hot_findings`
    refuses before. The tensile strength falls with the yield strength.
    """
    table = card.hot
    if table is None:
        return card
    strength, modulus = (_value_at(table, column, celsius) for column in _COLUMNS)
    source = f"{table.source}, at {celsius:g} C"
    share = strength / card.yield_strength_mpa.value
    values = {
        "yield_strength_mpa": strength,
        "youngs_modulus_gpa": modulus,
        "tensile_strength_mpa": max(share * card.tensile_strength_mpa.value, strength),
    }
    changed = {
        key: getattr(card, key).model_copy(update={"value": value, "source": source})
        for key, value in values.items()
    }
    return card.model_copy(update=changed)


def _value_at(table: HotSteel, column: str, celsius: float) -> float:
    at, values = table.temperature_c, getattr(table, column)
    celsius = min(max(celsius, at[0]), at[-1])
    k = min(max(bisect_right(at, celsius), 1), len(at) - 1)
    share = (celsius - at[k - 1]) / (at[k] - at[k - 1])
    return float(values[k - 1] + share * (values[k] - values[k - 1]))


def hot_card_findings(table: HotSteel) -> tuple[Finding, ...]:
    """Everything that forbids the use of a card's table over the temperature."""
    at = table.temperature_c
    found = [
        Finding(
            "hot-order",
            f"hot.temperature_c[{k + 1}]",
            at[k],
            f"not above the value before it ({at[k - 1]:g})",
            "accepted values that rise from each to the next",
        )
        for k in range(1, len(at))
        if at[k] <= at[k - 1]
    ]
    found += [
        Finding(
            "hot-lengths",
            f"hot.{column}",
            len(getattr(table, column)),
            f"number of points, but temperature_c has {len(at)}",
            "accepted one value for each temperature",
        )
        for column in _COLUMNS
        if len(getattr(table, column)) != len(at)
    ]
    return tuple(found)


def hot_findings(design: MachineDesign, card: SteelCard) -> tuple[Finding, ...]:
    """Temperatures of the rotor that its card says nothing about."""
    if design.hot is None or card.hot is None:
        return ()
    low, high = card.hot.temperature_c[0], card.hot.temperature_c[-1]
    coldest = min(
        design.hot.reference_temperature_c,
        design.hot.rotor_temperature_c + min(design.hot.rim_over_bore_k, 0.0),
    )
    return tuple(
        Finding(
            "hot-range",
            "hot.rotor_temperature_c",
            design.hot.rotor_temperature_c,
            f"the rotor runs from {coldest:g} to {design.hot.hottest_rotor_c:g} C, beyond the"
            f" table of the steel card {card.name!r}",
            f"accepted temperatures from {low:g} to {high:g}",
        )
        for _ in range(1)
        if coldest < low or design.hot.hottest_rotor_c > high
    )


def fit_findings(design: MachineDesign) -> tuple[Finding, ...]:
    """A shaft whose own bore leaves nothing of it."""
    fit = design.rotor.fit
    if fit is None or fit.shaft_bore_diameter_mm < design.rotor.shaft_diameter_mm:
        return ()
    return (
        Finding(
            "shaft-bore",
            "rotor.fit.shaft_bore_diameter_mm",
            fit.shaft_bore_diameter_mm,
            "nothing is left of the shaft",
            f"accepted from 0, below {design.rotor.shaft_diameter_mm:g}",
        ),
    )
