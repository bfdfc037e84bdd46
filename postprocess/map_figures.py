"""The figures of a flux map."""

import math
from dataclasses import dataclass, field

import numpy as np

from .coenergy_surface import CoenergySurface, incremental, linkages, node_residual, torque
from .flux_map import FluxMap, linkage_torque, mean_torque
from .operating import DEGREE, dq_currents
from .quantities import CHECK, COUNT, STATED, shown_as

ANGLES = 9001  # tried for most torque in half a turn: 0.02 degrees apart
ANGLE_STEP = math.pi / (ANGLES - 1)  # rad, between them
SAME = 1e-9  # of a torque, rounding


@dataclass(frozen=True, slots=True, kw_only=True)
class MapCounts:
    """What a map consists of."""

    currents_d: int = field(metadata=shown_as("map_currents_d", "d-axis currents", "", exact=COUNT))
    currents_q: int = field(metadata=shown_as("map_currents_q", "q-axis currents", "", exact=COUNT))
    positions: int = field(
        metadata=shown_as("map_positions", "positions of each pair", "", exact=COUNT)
    )
    solved: int = field(
        metadata=shown_as("map_points_solved", "pairs solved in this run", "", exact=COUNT)
    )
    kept: int = field(
        metadata=shown_as("map_points_kept", "pairs kept from runs before", "", exact=COUNT)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class MapFigures:
    """A map at rated current and the angle of most torque, and its greatest torque."""

    current: float = field(metadata=shown_as("rated_current_a", "rated current", "A", exact=STATED))
    gamma: float = field(
        metadata=shown_as("rated_current_angle_deg", "its angle of most torque", "deg", 1 / DEGREE)
    )
    i_d: float = field(metadata=shown_as("rated_i_d_a", "i_d there", "A"))
    i_q: float = field(metadata=shown_as("rated_i_q_a", "i_q there", "A"))
    torque: float = field(metadata=shown_as("rated_torque_nm", "torque there", "N m"))
    psi_d: float = field(metadata=shown_as("rated_psi_d_vs", "psi_d there", "V s"))
    psi_q: float = field(metadata=shown_as("rated_psi_q_vs", "psi_q there", "V s"))
    l_dd: float = field(metadata=shown_as("rated_l_dd_mh", "incremental L_dd there", "mH", 1e3))
    l_qq: float = field(metadata=shown_as("rated_l_qq_mh", "incremental L_qq there", "mH", 1e3))
    l_dq: float = field(
        metadata=shown_as("rated_l_dq_mh", "cross inductance L_dq there", "mH", 1e3)
    )
    most_torque: float = field(metadata=shown_as("map_torque_nm", "greatest of the map", "N m"))


@dataclass(frozen=True, slots=True, kw_only=True)
class MapChecks:
    """How well a map holds together, relative to its greatest torque or linkage."""

    difference: float = field(
        metadata=shown_as(
            "map_torque_difference_percent",
            "Maxwell's torque less the coenergy's",
            "%",
            100.0,
            exact=CHECK,
        )
    )
    node_residual: float = field(
        metadata=shown_as(
            "map_node_residual_percent",
            "linkage of the surface less the map's",
            "%",
            100.0,
            exact=CHECK,
        )
    )
    linkage_between: float = field(
        metadata=shown_as(
            "map_interpolation_linkage_percent",
            "linkage between nodes, error",
            "%",
            100.0,
            exact=CHECK,
        )
    )
    torque_between: float = field(
        metadata=shown_as(
            "map_interpolation_torque_percent",
            "torque between nodes, error",
            "%",
            100.0,
            exact=CHECK,
        )
    )


def most_torque_angle(surface: CoenergySurface, current: float) -> float:
    """The current angle in rad of most torque at a peak current in A, within the map.

    Args:
        surface: of the machine.
        current: above 0 and inside the map.
    """
    gamma = np.linspace(-0.5 * math.pi, 1.5 * math.pi, 2 * ANGLES - 1)
    i_d, i_q = current * np.cos(gamma), current * np.sin(gamma)
    (low_d, high_d), (low_q, high_q) = surface.i_d_range, surface.i_q_range
    inside = (low_d <= i_d) & (i_d <= high_d) & (low_q <= i_q) & (i_q <= high_q)
    found = np.full(gamma.size, -np.inf)
    found[inside] = torque(surface, i_d[inside], i_q[inside])
    # Mirror symmetry has the same torque again half a turn on: the first of the best counts.
    best = found >= (1.0 - SAME) * found.max()
    return float(gamma[int(best.argmax())])


def map_figures(flux_map: FluxMap, surface: CoenergySurface, current: float) -> MapFigures:
    """The figures of a map.

    Args:
        flux_map: of the machine.
        surface: through it.
        current: rated, A peak, inside the map.
    """
    gamma = most_torque_angle(surface, current)
    i_d, i_q = dq_currents(current, gamma)
    at = np.array(i_d), np.array(i_q)
    psi_d, psi_q = (float(psi) for psi in linkages(surface, *at))
    l_dd, l_dq, l_qq = (float(value) for value in incremental(surface, *at))
    return MapFigures(
        current=current,
        gamma=gamma,
        i_d=i_d,
        i_q=i_q,
        torque=float(torque(surface, *at)),
        psi_d=psi_d,
        psi_q=psi_q,
        l_dd=l_dd,
        l_qq=l_qq,
        l_dq=l_dq,
        most_torque=float(mean_torque(flux_map).max()),
    )


def map_checks(
    flux_map: FluxMap, surface: CoenergySurface, linkage_between: float, torque_between: float
) -> MapChecks:
    """How well a map holds together; the errors between nodes are relative to the greatest."""
    mean = mean_torque(flux_map)
    return MapChecks(
        difference=float(np.abs(mean - linkage_torque(flux_map)).max() / np.abs(mean).max()),
        node_residual=node_residual(surface, flux_map),
        linkage_between=linkage_between,
        torque_between=torque_between,
    )
