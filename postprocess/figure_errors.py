"""Figures with their errors as they stand in JSON: each has one, or the reason why it has none.

An error is absolute, in the figure's unit, and of the numbers alone: mesh, sampling, iteration. Not
in it: the steel curve, the third dimension, what formulas leave out, the shape of the punched part.
"""

from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING

from .quantities import Figure, figures_of

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

SUFFIX = "_error"
NOT_ESTIMATED = "not estimated"
NO_COARSER = "not estimated: the coarser mesh, or the map with its linkages off, has it not"


def error_values(figures: Iterable[Figure], errors: Mapping[str, float]) -> dict[str, float]:
    """Each figure's value by its key, followed by its error where there is one.

    Args:
        figures: no two of one key.
        errors: by the figures' keys, in their units.

    Raises:
        ArithmeticError: two figures have one key.
    """
    values: dict[str, float] = {}
    for figure in figures:
        if figure.key in values:
            raise ArithmeticError(f"{figure.key}: two figures of this name")
        values[figure.key] = figure.value
        if figure.key in errors:
            values[figure.key + SUFFIX] = errors[figure.key]
    return values


def differences(
    groups: "Iterable[DataclassInstance]", others: "Iterable[DataclassInstance]"
) -> dict[str, float]:
    """By how much figures differ from those of another mesh, by key, in their units.

    Args:
        groups: of figures; those that are exact, or that the others lack, are left out.
        others: the same from the other mesh.
    """
    theirs = {figure.key: figure.value for group in others for figure in figures_of(group)}
    return {
        figure.key: abs(figure.value - theirs[figure.key])
        for group in groups
        for figure in figures_of(group)
        if not figure.exact and figure.key in theirs
    }


def lacking_errors(
    groups: "Iterable[DataclassInstance]", errors: Mapping[str, float]
) -> dict[str, str]:
    """Of figures without a counterpart on the coarser mesh, that this is why they have no error."""
    return {
        figure.key: NO_COARSER
        for group in groups
        for figure in figures_of(group)
        if figure.key not in errors and not figure.exact
    }


def without_error(
    figures: Iterable[Figure],
    errors: Mapping[str, float],
    reasons: Mapping[str, str] | None = None,
) -> dict[str, str]:
    """Why figures have no error, by their keys.

    Args:
        figures: all.
        errors: by key, of those that have one.
        reasons: by key, of figures whose own declaration gives none.
    """
    told = reasons or {}
    return {
        figure.key: figure.exact or told.get(figure.key, NOT_ESTIMATED)
        for figure in figures
        if figure.key not in errors
    }
