"""How far a flux map is off: by its mesh at rated current, and by interpolation between nodes."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np

from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.winding import WindingTable, winding_table
from lamwright.postprocess.coenergy_surface import CoenergySurface, linkages, torque
from lamwright.postprocess.flux_map import FluxMap, mean_linkages, mean_torque
from lamwright.postprocess.skew import mean_change, mean_solution, step_point
from lamwright.solver.chains import OperatingPoint
from lamwright.solver.estimate import FieldErrors, errors_of, sample_places
from lamwright.solver.estimate_step import Change
from lamwright.solver.types import FieldSolution, FloatArray

from .desk import Desk
from .mapped import Mapped

CHAINS = 3  # that positions are shared out in; fixed, so that results do not vary
# Where between zero and the end of each axis, as shares of its nodes, half-way to the next node:
# beside both axes, where ribs and tooth tips begin to saturate, and further out.
PROBES = ((0.0, 0.0), (0.0, 0.5), (0.25, 0.25), (0.5, 0.75))


@dataclass(frozen=True, slots=True, eq=False)
class MapErrors:
    """Errors of a map."""

    rated: tuple[FieldSolution, ...]  # whole machine at rated current, at all positions
    mesh: FieldErrors  # of these
    linkage: float  # greatest by interpolation at the probes, of the map's greatest linkage
    torque: float  # likewise, of its greatest mean torque
    share_d: float  # greatest error of psi_d by both causes, over psi_d at rated current
    share_q: float  # of psi_q, over the larger of those at rated and at no current


def map_errors(
    mapped: Mapped, rated: tuple[float, float], on_done: Callable[[float], None]
) -> MapErrors:
    """Errors of a map from fields off its nodes.

    Args:
        mapped: machine and map; all desks have the model.
        rated: i_d and i_q in A at rated current.
        on_done: called with the share done.
    """
    section, flux_map, crew = mapped.section, mapped.flux_map, mapped.crew
    offsets, pole_pairs = skew_offsets(mapped.machine.design), section.pole_pairs
    places = [rated, *(_probe(flux_map, shares) for shares in PROBES)]
    tasks = [
        partial(_chain, [step_point(point, offset, pole_pairs) for point in chain])
        for currents in places
        for offset in offsets
        for chain in _chains(currents, flux_map.position)
    ]
    done = crew.share(tasks, lambda count: on_done(0.6 * count / len(tasks)))
    solved = iter([field for chain in done for field in chain])
    count = flux_map.position.size
    # Of each place: for each step of the rotor the fields at all positions.
    fields = [[[next(solved) for _ in range(count)] for _ in offsets] for _ in places]
    means = [
        [
            mean_solution(steps, offsets, OperatingPoint(*currents, float(at)), pole_pairs)
            for steps, at in zip(zip(*by_step, strict=True), flux_map.position, strict=True)
        ]
        for currents, by_step in zip(places, fields, strict=True)
    ]
    sampled = sample_places(means[0])
    samples = [fields[0][step][k] for k in sampled for step in range(len(offsets))]
    winding = winding_table(mapped.machine.design)
    changes = crew.share(
        [partial(_change, section, winding, sample) for sample in samples],
        lambda count: on_done(0.6 + 0.4 * count / len(samples)),
    )
    steps = len(offsets)
    changed = {
        place: mean_change(changes[at * steps : (at + 1) * steps], offsets, pole_pairs)
        for at, place in enumerate(sampled)
    }
    linkage, off = _interpolation(flux_map, mapped.surface, places, means)
    mesh = errors_of(means[0], changed, pole_pairs)
    between = linkage * max(float(np.abs(psi).max()) for psi in mean_linkages(flux_map))
    psi_d, psi_q = (float(psi) for psi in linkages(mapped.surface, *map(np.asarray, rated)))
    bare = _bare_psi_q(mapped.surface)
    return MapErrors(
        rated=tuple(means[0]),
        mesh=mesh,
        linkage=linkage,
        torque=off,
        share_d=(mesh.psi_d + between) / abs(psi_d),
        share_q=(mesh.psi_q + between) / max(abs(psi_q), bare),
    )


def _bare_psi_q(surface: CoenergySurface) -> float:
    """Amount of psi_q in V s without current, of magnets."""
    ends = (surface.i_d_range, surface.i_q_range)
    still = (np.asarray(np.clip(0.0, low, high)) for low, high in ends)
    return abs(float(linkages(surface, *still)[1]))


def _interpolation(
    flux_map: FluxMap,
    surface: CoenergySurface,
    places: Sequence[tuple[float, float]],
    means: Sequence[Sequence[FieldSolution]],
) -> tuple[float, float]:
    """Greatest errors of the surface at places between nodes: of linkages and of torque."""
    i_d, i_q = np.array(places).T
    found = [[np.mean([f.psi_d for f in wave]), np.mean([f.psi_q for f in wave])] for wave in means]
    psi_d, psi_q = np.array(found).T
    own_d, own_q = linkages(surface, i_d, i_q)
    field_torque = 1.5 * flux_map.pole_pairs * (psi_d * i_q - psi_q * i_d)
    most = max(float(np.abs(psi).max()) for psi in mean_linkages(flux_map))
    most_torque = float(np.abs(mean_torque(flux_map)).max())
    off = max(float(np.abs(own_d - psi_d).max()), float(np.abs(own_q - psi_q).max()))
    torque_off = float(np.abs(torque(surface, i_d, i_q) - field_torque).max())
    return off / most, torque_off / most_torque


def _chains(currents: tuple[float, float], position: FloatArray) -> list[list[OperatingPoint]]:
    points = [OperatingPoint(*currents, float(at)) for at in position]
    share = -(-len(points) // CHAINS)
    return [points[at : at + share] for at in range(0, len(points), share)]


def _chain(points: Sequence[OperatingPoint], desk: Desk) -> tuple[FieldSolution, ...]:
    return desk.chain(points, None)


def _change(
    section: CrossSection, winding: WindingTable, solution: FieldSolution, desk: Desk
) -> Change:
    return desk.change(section, winding, solution)


def _probe(flux_map: FluxMap, shares: tuple[float, float]) -> tuple[float, float]:
    return _between(flux_map.i_d, shares[0]), _between(flux_map.i_q, shares[1])


def _between(currents: FloatArray, share: float) -> float:
    zero = int(np.abs(currents).argmin())
    k = min(zero + int(share * (currents.size - 1 - zero)), currents.size - 2)
    return float(currents[k : k + 2].mean())
