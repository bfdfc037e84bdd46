"""Carter's coefficient: a smooth face over deep slots, iron infinitely permeable.

Source: Carter, 1901, in Weber's and Binns' form (from memory; confirmed by an independent solution
of order 6 to six digits): k_C = t/(t - gamma g), gamma = (4/pi)[x atan x - ln sqrt(1 + x^2)],
x = s/(2 g), and under the slot's centre B_min/B_0 = 1/sqrt(1 + x^2). Exact for periodic slots too.
"""

import math

import numpy as np
import pytest
from plain_field import Material, PlainField, solve_plain

from lamwright.geometry.curves import Path, line
from lamwright.geometry.section import Region
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.mesh_sizes import SizeSources
from lamwright.solver.steel import MU_0, linear_law

GAP = 1e-3  # m
FLUX = 1e-3  # Wb/m through half a slot pitch


def half_pitch_field(opening: float, pitch: float) -> PlainField:
    """Field from the slot's centre line (x = 0) to the tooth's, both lines of flux."""
    half_slot, half_pitch, top = 0.5 * opening, 0.5 * pitch, GAP + 3.0 * opening
    corner = complex(half_slot, GAP)
    corners = [0j, half_pitch + 0j, complex(half_pitch, GAP), corner]
    corners += [complex(half_slot, top), complex(0.0, top)]
    path = Path(tuple(line(a, b) for a, b in zip(corners, corners[1:] + corners[:1], strict=True)))
    mesh = mesh_regions(
        [Region("gap", "air", path)],
        lambda edge: 0.25 * max(GAP, 0.1 * opening),
        refine_at=SizeSources(np.array([corner]), np.array([0.002 * GAP])),
    )
    at_slot = np.flatnonzero(np.abs(mesh.nodes[:, 0]) < 1e-9)
    at_tooth = np.flatnonzero(np.abs(mesh.nodes[:, 0] - half_pitch) < 1e-9)
    air = Material(np.arange(mesh.elements.shape[0]), linear_law(1.0))
    no_load = np.zeros(mesh.nodes.shape[0])
    return solve_plain(mesh, (air,), no_load, {0.0: at_slot, FLUX: at_tooth}, scale=FLUX / MU_0)


K_C = {(1, 20): 1.00771, (2, 20): 1.02874, (4, 20): 1.09858, (5, 20): 1.14467}  # s/g, t/g
K_C |= {(5, 12): 1.26685, (8, 20): 1.32878, (10, 20): 1.50028}


@pytest.mark.parametrize("case", K_C)
def test_carter_coefficient(case: tuple[int, int]) -> None:
    """Within 0.1 % on a graded second-order mesh: k_C from the stored energy, U = 2 W / flux."""
    (s_over_g, t_over_g), k_c = case, K_C[case]
    field = half_pitch_field(s_over_g * GAP, t_over_g * GAP)
    potential = 2.0 * field.energy / FLUX  # A
    smooth = FLUX * GAP / (MU_0 * 0.5 * t_over_g * GAP)  # A without slots
    assert potential / smooth == pytest.approx(k_c, rel=1e-3)
    x = 0.5 * s_over_g
    gamma = 4.0 / math.pi * (x * math.atan(x) - 0.5 * math.log1p(x**2))
    assert k_c == pytest.approx(t_over_g / (t_over_g - gamma), rel=1e-5)


@pytest.mark.parametrize(
    ("s_over_g", "b_min"), [(1, 0.894427), (2, 0.707107), (5, 0.371391), (10, 0.196116)]
)
def test_flux_density_under_the_slot(s_over_g: float, b_min: float) -> None:
    """B on the smooth face under the slot's centre over B_0 = mu0 U / g, within 0.2 %.

    A is odd about the centre line: its slope there from an odd fifth-order fit. The fit adds less
    than the 0.1 % of the mesh.
    """
    field = half_pitch_field(s_over_g * GAP, 20 * GAP)
    potential = 2.0 * field.energy / FLUX
    x, y = field.mesh.nodes.T
    near = (np.abs(y) < 1e-9) & (x < 0.5 * max(GAP, 0.25 * s_over_g * GAP))
    u = x[near] / x[near].max()
    slope = np.linalg.lstsq(np.stack([u, u**3, u**5], axis=-1), field.a[near], rcond=None)[0][0]
    b = abs(slope) / x[near].max()
    assert b / (MU_0 * potential / GAP) == pytest.approx(b_min, rel=2e-3)
