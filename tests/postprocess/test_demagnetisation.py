"""Demagnetisation of slabs in one dimension: shares and flux densities exact."""

import math

import numpy as np
import pytest
from plain_field import Material, solve_plain

from lamwright.geometry.curves import Path
from lamwright.geometry.section import Region
from lamwright.postprocess.demagnetisation import magnet_states, opposing_angle, worst_states
from lamwright.solver.kernel import quadrature
from lamwright.solver.magnet import MagnetLaw, magnet_law
from lamwright.solver.steel import MU_0, linear_law
from lamwright.solver.types import FloatArray, PlanarMesh

LAW = MagnetLaw(remanence=0.4, recoil_permeability=1.1, knee_field=260e3)
LENGTH, HEIGHT = 0.010, 0.020  # m
N_X, N_Y = 3, 8


def slab(turn: complex) -> PlanarMesh:
    """A rectangle of second-order triangles, turned as a whole."""
    x, y = np.linspace(0.0, LENGTH, 2 * N_X + 1), np.linspace(0.0, HEIGHT, 2 * N_Y + 1)
    z = (x[None, :] + 1j * y[:, None]) * turn
    number = np.arange(z.size).reshape(z.shape)
    elements = []
    for j in range(0, 2 * N_Y, 2):
        for i in range(0, 2 * N_X, 2):
            q = number[j : j + 3, i : i + 3]
            elements.append([q[0, 0], q[0, 2], q[2, 2], q[0, 1], q[1, 2], q[1, 1]])
            elements.append([q[0, 0], q[2, 2], q[2, 0], q[1, 1], q[2, 1], q[1, 0]])
    return PlanarMesh(
        nodes=np.stack([z.real.ravel(), z.imag.ravel()], axis=-1),
        elements=np.array(elements),
        region_of_elem=np.zeros(len(elements), dtype=np.int64),
        region_names=("magnet_1",),
    )


def places(mesh: PlanarMesh, turn: complex) -> tuple[FloatArray, FloatArray]:
    z = (mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]) / turn
    return z.real, z.imag


@pytest.mark.parametrize("turn", [1.0 + 0j, np.exp(0.7j)])
@pytest.mark.parametrize("rows", [0, 3, 8])
def test_share_of_a_field_that_grows_across_the_slab(turn: complex, rows: int) -> None:
    """B = knee + slope (y - y_k) along the magnetisation: exactly y_k / height lies below the knee.

    A = B_k y + slope (y - y_k)^2 / 2 is quadratic, so second-order elements hold it exactly; y_k
    is a border of elements. Flux density's mean to 1e-12.
    """
    mesh, slope = slab(turn), 30.0  # T/m
    _, y = places(mesh, turn)
    y_k = HEIGHT * rows / N_Y
    a = LAW.knee * y + 0.5 * slope * (y - y_k) ** 2
    region = Region("magnet_1", "magnet", Path(()), (), turn)
    (state,) = magnet_states(mesh, [region], a, LAW)
    assert state.share_below == pytest.approx(rows / N_Y, abs=1e-12)
    assert state.flux_mean == pytest.approx(LAW.knee + slope * (0.5 * HEIGHT - y_k), rel=1e-12)
    lowest = LAW.knee + slope * (0.01 * HEIGHT - y_k)
    assert state.flux_low == pytest.approx(lowest, abs=slope * HEIGHT / N_Y / 3.0)


@pytest.mark.parametrize("opposing", [200e3, 259e3, 261e3, 400e3])  # A/m
def test_slab_in_a_uniform_opposing_field(opposing: float) -> None:
    """H = -opposing is prescribed along the magnetisation: B = B_r - mu_0 mu_r H, exact to 1e-9.

    The load of the remanence and the boundary's H make the equations; below the knee field the
    whole slab is beyond, above it nothing.
    """
    mesh = slab(1.0 + 0j)
    x, y = places(mesh, 1.0 + 0j)
    quad = quadrature(mesh.nodes, mesh.elements)
    along_y = np.einsum("eq,eqi->ei", quad.weight, quad.grad[:, :, 1])
    load = np.bincount(mesh.elements.ravel(), along_y.ravel(), len(x))  # int dN/dy
    # int H . curl N = int (-opposing) dN/dy on the boundary side; the remanence adds nu B_r dN/dy.
    load *= LAW.reluctivity * LAW.remanence - opposing
    material = Material(np.arange(len(mesh.elements)), linear_law(LAW.recoil_permeability))
    field = solve_plain(mesh, [material], load, {0.0: np.flatnonzero(y == 0.0)}, 1.0)
    region = Region("magnet_1", "magnet", Path(()), (), 1.0 + 0j)
    (state,) = magnet_states(mesh, [region], field.a, LAW)
    exact = LAW.remanence - MU_0 * LAW.recoil_permeability * opposing
    assert state.flux_mean == pytest.approx(exact, rel=1e-9)
    assert state.flux_low == pytest.approx(exact, rel=1e-9)
    assert state.share_below == (1.0 if opposing > LAW.knee_field else 0.0)


def test_worst_position_counts() -> None:
    """Of each magnet the state with most below the knee, whatever the others have."""
    mesh = slab(1.0 + 0j)
    _, y = places(mesh, 1.0 + 0j)
    region = Region("magnet_1", "magnet", Path(()), (), 1.0 + 0j)
    states = [magnet_states(mesh, [region], b * y, LAW) for b in (0.3, LAW.knee - 0.01, 0.1)]
    assert worst_states(states)[0].flux_mean == pytest.approx(LAW.knee - 0.01)


def test_opposing_angle() -> None:
    """Inward magnets link -q: the opposing current is +i_q, 90 degrees."""
    assert opposing_angle(0.0, -0.1) == pytest.approx(math.pi / 2.0)
    assert math.cos(opposing_angle(0.1, 0.0)) == pytest.approx(-1.0)


def test_card_at_its_temperature(magnet_card) -> None:
    """B_r (1 + alpha dT), H_k (1 + beta dT), knee = B_r - mu_0 mu_r H_k; at 20 C the card's."""
    law = magnet_law(magnet_card, 120.0)
    assert law.remanence == pytest.approx(0.42 * 0.8, rel=1e-12)
    assert law.knee_field == pytest.approx(340e3 * 1.35, rel=1e-12)
    assert law.knee == pytest.approx(0.42 * 0.8 - MU_0 * 1.06 * 340e3 * 1.35, rel=1e-12)
    assert magnet_law(magnet_card, 20.0).remanence == 0.42


@pytest.fixture
def magnet_card():
    from pathlib import Path as FilePath

    from lamwright.geometry.design_file import read_magnet_card

    designs = FilePath(__file__).parents[2] / "designs"
    return read_magnet_card(designs / "magnet" / "demo_ferrite.toml")
