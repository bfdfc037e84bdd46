"""What the reader of a verdict with magnets should be wary of."""

from collections.abc import Iterator, Sequence

from lamwright.geometry.design import MagnetCard, Sourced, SourcedNumber

from .demagnetisation import MagnetState

LEAST_SHARE = 1e-4  # of a magnet's area below the knee that is told

LOAD_LEFT_OUT = (
    "the load of the magnets is not in the stress of the spin alone, nor in its yield margin: the"
    " ribs carry more; `ribs` tells stress and margin with it"
)
STANDING = (
    LOAD_LEFT_OUT,
    "saliency is taken without the no-load linkage: psi_d i_q / ((psi_q - psi_q at no load) i_d)",
    "magnets are straight recoil lines, all at one temperature: beyond the knee, and after a loss,"
    " the field is not followed; eddy currents in magnets are in no figure",
)


def magnet_cautions(card: MagnetCard, states: Sequence[MagnetState]) -> tuple[str, ...]:
    """All cautions about the magnets, one line each."""
    return (*_of_states(states), *STANDING, _of_card(card))


def _of_states(states: Sequence[MagnetState]) -> Iterator[str]:
    for state in states:
        if state.share_below > LEAST_SHARE:
            share = 100.0 * state.share_below
            yield (
                f"{state.name}: {share:.2g} % of its area is driven below the knee by the"
                " demagnetising current: it loses magnetisation for good there"
            )


def _of_card(card: MagnetCard) -> str:
    values: dict[str, Sourced | SourcedNumber] = {
        "remanence": card.remanence_t,
        "recoil permeability": card.recoil_relative_permeability,
        "its temperature coefficient": card.remanence_coefficient_percent_per_k,
        "knee": card.knee_field_ka_per_m,
        "the knee's temperature coefficient": card.knee_coefficient_percent_per_k,
        "density": card.density_kg_per_m3,
    }
    by_source: dict[str, list[str]] = {}
    for name, value in values.items():
        by_source.setdefault(value.source, []).append(name)
    told = "; ".join(f"{', '.join(names)}: {source}" for source, names in by_source.items())
    return f"magnet card {card.name!r}: {told}"
