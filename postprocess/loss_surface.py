"""Specific loss of a steel sheet over frequency and flux density, fitted to its card's points.

In alternating sinusoidal flux density of peak B, in W/kg:

    p = h(B) f + (pi B d f)^2 / (6 rho density) F(d / delta) + x(B) f^1.5

hysteresis, classical eddy currents, excess: the separation of Bertotti, IEEE Trans. Magnetics
24(1), 1988 (from memory). The eddy term is not fitted: it follows from thickness d and resistivity
rho, with the skin correction F for the penetration depth delta at the apparent permeability B/H of
the card's curve, linear in itself, so an estimate where F is far from 1. h and x have a value at
each measured flux density; these are not negative and do not fall with B, and are the least squares
of the relative misfit under that. A weak wish for smooth h/B^1.7 and x/B^1.5 decides where a flux
density was measured at one frequency only. Between them h and x are monotone cubics in B^2, from 0
at B = 0; above the last they go on straight in B^2: extrapolated, as everything beyond
`frequency_range` and `b_range` is.

Axes: n_point measured points, n_b distinct flux densities, n_table entries of the tables over B.
"""

import math
from dataclasses import dataclass, replace

import numpy as np

from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_loss import LossPoints
from lamwright.solver.steel import reluctivity_law
from lamwright.solver.types import FloatArray

MOST_MISFIT = 0.03  # of a measured loss; above it a caution is due
TABLE_STEP = 1e-3  # T; a straight line in between errs by less than 1e-5 of h above 0.1 T
TABLE_END = 4.0  # T; above it h and x stay, no steel has such a flux density
SMOOTHNESS = 5e-3  # weight of the wish for smoothness against a relative misfit of 1
POWERS = (1.7, 1.5)  # of B that h and x follow nearly; common practice, no source
SERIES_END = 0.3  # d / delta under which F is 1 - x^4/630 to 1e-8
EXPONENTIAL_END = 30.0  # d / delta over which F is 3/x to 1e-12


@dataclass(frozen=True, slots=True, eq=False)
class LossSurface:
    """Loss of one sheet steel; see the file's head. Tables are at B = k `TABLE_STEP`."""

    hysteresis: FloatArray  # (n_table,), h in J/kg
    excess: FloatArray  # (n_table,), x in W s^1.5/kg
    permeability: FloatArray  # (n_table,), B/H in H/m
    eddy: float  # W s^2/(kg T^2), without skin effect
    thickness: float  # m
    resistivity: float  # Ohm m
    density: float  # kg/m^3
    frequency_range: tuple[float, float]  # Hz, measured
    b_range: tuple[float, float]  # T, measured
    misfit: float  # greatest relative one over the card's points


def loss_surface(card: SteelCard) -> LossSurface:
    """The surface fitted to a card's loss points.

    Raises:
        ValueError: the card has none.
    """
    points = card.loss
    if points is None:
        raise ValueError(f"steel card {card.name!r} holds no loss points")
    thickness, resistivity = 1e-3 * points.sheet_thickness_mm, 1e-6 * points.resistivity_uohm_m
    density = card.density_kg_per_m3.value
    table: FloatArray = TABLE_STEP * np.arange(round(TABLE_END / TABLE_STEP) + 1.0)
    nu, _ = reluctivity_law(card)(table**2)
    permeability = 1.0 / nu
    eddy = eddy_coefficient(thickness, resistivity, density)
    f, b, loss = (np.array(v) for v in (points.frequency_hz, points.b_t, points.loss_w_per_kg))
    depth = penetration_depth(f, np.interp(b, table, permeability), resistivity)
    classical = eddy * (f * b) ** 2 * skin_factor(thickness / depth)
    nodes, hysteresis, excess = _fitted(f, b, loss, classical)
    surface = LossSurface(
        hysteresis=_through(nodes, hysteresis, table),
        excess=_through(nodes, excess, table),
        permeability=permeability,
        eddy=eddy,
        thickness=thickness,
        resistivity=resistivity,
        density=density,
        frequency_range=(float(f.min()), float(f.max())),
        b_range=(float(b.min()), float(b.max())),
        misfit=0.0,
    )
    return _with_misfit(surface, points)


def specific_loss(surface: LossSurface, f: FloatArray, b: FloatArray) -> FloatArray:
    """Loss in W/kg in sinusoidal alternating flux density, frequency `f` in Hz, peak `b` in T."""
    hysteresis, excess, permeability = looked_up(surface, b)
    depth = penetration_depth(f, permeability, surface.resistivity)
    eddy = surface.eddy * (f * b) ** 2 * skin_factor(surface.thickness / depth)
    return hysteresis * f + eddy + excess * f**1.5


def looked_up(surface: LossSurface, b: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Look up h in J/kg, x in W s^1.5/kg and B/H in H/m at `b` in T, each shaped as `b`."""
    place = np.minimum(b, TABLE_END) * (1.0 / TABLE_STEP)
    k = np.minimum(place.astype(np.intp), surface.hysteresis.size - 2)
    share = place - k
    found = []
    for table in (surface.hysteresis, surface.excess, surface.permeability):
        low = table.take(k)
        found.append(low + share * (table.take(k + 1) - low))
    return found[0], found[1], found[2]


def eddy_coefficient(thickness: float, resistivity: float, density: float) -> float:
    """Classical eddy loss over (f B)^2 in W s^2/(kg T^2), a sheet thin against the skin depth.

    (pi d)^2 / (6 rho density): derived, flux density uniform over the sheet.
    """
    return (math.pi * thickness) ** 2 / (6.0 * resistivity * density)


def penetration_depth(f: FloatArray, permeability: FloatArray, resistivity: float) -> FloatArray:
    """Penetration depth sqrt(rho / (pi f mu)) in m."""
    depth: FloatArray = np.sqrt(resistivity / (math.pi * f * permeability))
    return depth


def skin_factor(x: FloatArray) -> FloatArray:
    """Eddy loss over that without skin effect, same mean flux, x = thickness / penetration depth.

    (3/x) (sinh x - sin x) / (cosh x - cos x): derived, linear sheet, mean flux density given.
    """
    mid = np.clip(x, SERIES_END, EXPONENTIAL_END)
    factor = 3.0 / mid * (np.sinh(mid) - np.sin(mid)) / (np.cosh(mid) - np.cos(mid))
    return np.where(
        x < SERIES_END,
        1.0 - x**4 / 630.0,
        np.where(x > EXPONENTIAL_END, 3.0 / np.maximum(x, EXPONENTIAL_END), factor),
    )


def _fitted(
    f: FloatArray, b: FloatArray, loss: FloatArray, classical: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Distinct flux densities, and h and x there, (n_b,) each."""
    from scipy.optimize import nnls

    nodes, place = np.unique(b, return_inverse=True)
    n = nodes.size
    # Unknown are the increments from node to node, so that none falls and none is negative; each
    # in units that make it about 1.
    mean = [float(np.mean(loss / (f**k * b**p))) for k, p in zip((1.0, 1.5), POWERS, strict=True)]
    rising = [
        np.cumsum(m * np.diff(np.append(0.0, nodes**p))[None, :] * np.eye(n), axis=0)
        for m, p in zip(mean, POWERS, strict=True)
    ]
    data = np.concatenate(
        [(f**k / loss)[:, None] * r[place] for k, r in zip((1.0, 1.5), rising, strict=True)], axis=1
    )
    wish = [
        SMOOTHNESS * np.diff(r / (m * nodes[:, None] ** p), n=min(2, n - 1), axis=0)
        for r, m, p in zip(rising, mean, POWERS, strict=True)
    ]
    none = [np.zeros_like(w) for w in wish]
    rows = np.concatenate([data, np.hstack([wish[0], none[0]]), np.hstack([none[1], wish[1]])])
    right = np.concatenate([1.0 - classical / loss, np.zeros(len(wish[0]) + len(wish[1]))])
    steps, _ = nnls(rows, right, maxiter=100 * rows.shape[1])
    return nodes, rising[0] @ steps[:n], rising[1] @ steps[n:]


def _through(nodes: FloatArray, values: FloatArray, table: FloatArray) -> FloatArray:
    """Monotone through (0, 0) and the nodes, straight in B^2 above; at the flux densities."""
    from scipy.interpolate import PchipInterpolator

    u, y = np.append(0.0, nodes**2), np.append(0.0, values)
    inside: FloatArray = PchipInterpolator(u, y)(np.minimum(table**2, u[-1]))
    slope = (y[-1] - y[-2]) / (u[-1] - u[-2])
    through = inside + slope * np.maximum(table**2 - u[-1], 0.0)
    # Where the cubics are flat, rounding must not make them fall.
    rising: FloatArray = np.maximum.accumulate(through)
    return rising


def _with_misfit(surface: LossSurface, points: LossPoints) -> LossSurface:
    f, b, loss = (np.array(v) for v in (points.frequency_hz, points.b_t, points.loss_w_per_kg))
    misfit = np.abs(specific_loss(surface, f, b) / loss - 1.0)
    return replace(surface, misfit=float(misfit.max()))
