"""The figures that an evaluation may have, by their keys: those of a verdict, and masses."""

from dataclasses import fields
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from lamwright.postprocess.quantities import Shown

# Of the verdict, what a quick evaluation does not compute.
NOT_QUICK = (
    "torque_difference_percent",
    "torque_coenergy_difference_percent",
    "torque_ripple_samples_percent",
    "dxf_area_difference_relative",
    "dxf_perimeter_difference_relative",
    "dxf_vertex_difference_um",
)


def known_figures() -> dict[str, "Shown"]:
    """Key, label and unit of every figure of a full evaluation."""
    from lamwright.postprocess.magnet_figures import MagnetFigures
    from lamwright.postprocess.masses import MassFigures
    from lamwright.postprocess.quantities import OutlineFigures
    from lamwright.postprocess.verdict import (
        MagneticFigures,
        SolverFigures,
        StressFigures,
        TerminalFigures,
    )

    groups = (
        *(MagneticFigures, TerminalFigures, StressFigures),
        *(MassFigures, OutlineFigures, SolverFigures, MagnetFigures),
    )
    shown: list[Shown] = [item.metadata["shown"] for group in groups for item in fields(group)]
    return {one.key: one for one in shown}


def quick_figures() -> dict[str, "Shown"]:
    """The same of a quick evaluation."""
    from lamwright.postprocess.magnet_figures import MagnetFigures
    from lamwright.postprocess.verdict import SolverFigures

    left_out = [
        item.metadata["shown"].key
        for group in (SolverFigures, MagnetFigures)
        for item in fields(group)
    ]
    return {
        key: shown
        for key, shown in known_figures().items()
        if key not in NOT_QUICK and key not in left_out
    }
