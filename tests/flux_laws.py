"""Flux maps from laws, for tests that need a map but no field.

Linear machine: psi_d = l_d i_d + l_dq i_q, psi_q = l_q i_q + l_dq i_d - psi_m. The saturating one
is the published law of a 6.7 kW four-pole motor, F1 of the check values: currents of linkages,

    i_d = (17.4 + 373 |psi_d|^5 + 560 |psi_d| psi_q^2) psi_d
    i_q = (52.1 + 658 |psi_q| + 1120/3 |psi_d|^3) psi_q                     (A peak, V s)

both slopes of one energy (its integral, derived), so reciprocal.
"""

import math

import numpy as np

from lamwright.postprocess.flux_map import FluxMap

F1_POLE_PAIRS = 2
F1_RESISTANCE = 0.54  # Ohm
F1_RATED = 21.9203  # A peak, 15.5 A rms
POSITIONS = 12


def map_of(pole_pairs, i_d, i_q, psi_d, psi_q, coenergy, *, swing=0.0, n_pos=POSITIONS):
    """A map whose linkages (n_d, n_q) do not change with the position.

    `swing` is the amplitude in N m of order 6 (electrical) in the torque; its mean is zero.
    """
    i_d, i_q = np.asarray(i_d, dtype=float), np.asarray(i_q, dtype=float)
    theta_e = np.arange(n_pos) * math.pi / 3.0 / n_pos
    same = np.ones(n_pos)
    torque = 1.5 * pole_pairs * (psi_d * i_q - psi_q * i_d[:, None])
    return FluxMap(
        pole_pairs=pole_pairs,
        i_d=i_d,
        i_q=i_q,
        position=theta_e / pole_pairs,
        psi_d=psi_d[..., None] * same,
        psi_q=psi_q[..., None] * same,
        torque=torque[..., None] + swing * np.cos(6.0 * theta_e),
        coenergy=coenergy[..., None] * same,
    )


def linear_map(pole_pairs, l_d, l_q, i_d, i_q, *, l_dq=0.0, psi_m=0.0, swing=0.0):
    """The map of a linear machine; inductances in H, magnets' linkage psi_m against psi_q."""
    d, q = np.meshgrid(i_d, i_q, indexing="ij")
    coenergy = 1.5 * (0.5 * l_d * d**2 + 0.5 * l_q * q**2 + l_dq * d * q - psi_m * q)
    psi_d, psi_q = l_d * d + l_dq * q, l_q * q + l_dq * d - psi_m
    return map_of(pole_pairs, i_d, i_q, psi_d, psi_q, coenergy, swing=swing)


def f1_currents(psi_d, psi_q):
    """Currents of the law F1 in A and its energy in J, at linkages in V s."""
    d, q = np.abs(psi_d), np.abs(psi_q)
    i_d = (17.4 + 373.0 * d**5 + 560.0 * d * q**2) * psi_d
    i_q = (52.1 + 658.0 * q + 1120.0 / 3.0 * d**3) * psi_q
    energy = 1.5 * (
        17.4 * d**2 / 2.0
        + 373.0 * d**7 / 7.0
        + 52.1 * q**2 / 2.0
        + 658.0 * q**3 / 3.0
        + 560.0 / 3.0 * d**3 * q**2
    )
    return i_d, i_q, energy


def f1_linkages(i_d, i_q):
    """Linkages of the law F1 in V s and its coenergy in J, at currents in A that broadcast."""
    i_d, i_q = np.broadcast_arrays(np.asarray(i_d, dtype=float), np.asarray(i_q, dtype=float))
    d, q = np.abs(i_d), np.abs(i_q)
    x, y = np.minimum(d / 17.4, (d / 373.0) ** (1 / 6)), q / 52.1
    for _ in range(60):  # Newton on a convex energy, halved where it would leave the quadrant
        f, g, _ = f1_currents(x, y)
        f_x = 17.4 + 6.0 * 373.0 * x**5 + 1120.0 * x * y**2
        f_y = 1120.0 * x**2 * y
        g_y = 52.1 + 1316.0 * y + 1120.0 / 3.0 * x**3
        scale = f_x * g_y - f_y**2
        x = np.maximum(0.5 * x, x - (g_y * (f - d) - f_y * (g - q)) / scale)
        y = np.maximum(0.5 * y, y - (f_x * (g - q) - f_y * (f - d)) / scale)
    x, y = np.where(d == 0.0, 0.0, x), np.where(q == 0.0, 0.0, y)
    energy = f1_currents(x, y)[2]
    return np.sign(i_d) * x, np.sign(i_q) * y, 1.5 * (x * d + y * q) - energy


def f1_map(i_d, i_q, *, swing=0.0):
    """The map of the law F1 over a grid of currents in A."""
    psi_d, psi_q, coenergy = f1_linkages(np.asarray(i_d)[:, None], np.asarray(i_q)[None, :])
    return map_of(F1_POLE_PAIRS, i_d, i_q, psi_d, psi_q, coenergy, swing=swing)
