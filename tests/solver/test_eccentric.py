"""Static eccentricity against the closed form of the slotless machine, to first order."""

import math
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from annulus import Ring, RingMachine, sheet_model
from shipped import shipped

from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.postprocess.magnetic_pull import (
    eccentric_pull,
    pulls,
    smooth_pull,
    working_field,
)
from lamwright.solver.eccentric import eccentric_model, solve_eccentric
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.gap_circle import circle_field, circle_reader
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.steel import MU_0, linear_law

A, B, STACK, TURNS = 0.0300, 0.0310, 0.1, 100  # rotor, bore, stack in m
CURRENT = 10.0  # A


@cache
def whole(pole_pairs: int) -> MagneticModel:
    """The whole circle: a sheet of order p on the bore, steel that takes no field."""
    machine = RingMachine(
        pole_pairs=pole_pairs,
        rotor=(Ring("rotor_iron", A, 6),),
        bore=B,
        stator=(Ring("stator_iron", 1.2 * B, 2),),
        stack_length=STACK,
        gap_layers=2,
        n_circle=96,
        sector_poles=2 * pole_pairs,
    )
    return sheet_model(machine, linear_law(1e9), linear_law(1e9), TURNS)


def first_order(pole_pairs: int, offset: float) -> float:
    """Pull in N on the rotor moved by `offset` m, to first order in it; derived.

    About the stator's axis A_0 = C (r^p + a^2p r^-p) sin(p theta), dA/dr = -mu0 K at the bore b.
    At the moved rotor r = a + e cos(theta) the field along the steel is 0: the next term has
    orders m = p -+ 1, D_m (r^m + b^2m r^-m), D_m = p C e a^(p-2) / (b^2m a^-(m+1) - a^(m-1)), and
    F = (2 pi L / mu0) C (p (p+1) a^2p D_(p+1) + p (p-1) b^(2p-2) D_(p-1)).
    """
    p = pole_pairs
    sheet = 1.5 * 0.5 * TURNS * CURRENT / B  # A/m
    c = MU_0 * sheet / (p * (B ** (p - 1) - A ** (2 * p) / B ** (p + 1)))

    def d(m: int) -> float:
        return p * c * offset * A ** (p - 2) / (B ** (2 * m) / A ** (m + 1) - A ** (m - 1))

    inner = p * (p - 1) * B ** (2 * p - 2) * d(p - 1) if p > 1 else 0.0
    return 2.0 * math.pi * STACK / MU_0 * c * (p * (p + 1) * A ** (2 * p) * d(p + 1) + inner)


@pytest.mark.parametrize("direction_deg", [0.0, 71.0])
@pytest.mark.parametrize("pole_pairs", [1, 2, 3])
def test_pull_of_a_smooth_gap(pole_pairs: int, direction_deg: float) -> None:
    """The pull at 2 % of the gap is the first-order one, towards the narrow side, at any angle.

    The next order is eps^2: 1e-3 covers it and the mesh.
    """
    model = whole(pole_pairs)
    offset = 0.02 * (B - A) * np.exp(1j * math.radians(direction_deg))
    machine = eccentric_model(model, complex(offset))
    start = solve_point(model, CURRENT, 0.0, 0.1)
    field = solve_eccentric(machine, CURRENT, 0.0, 0.1, start)
    (force,) = pulls(machine.reader, [circle_field(machine.reader, field)], STACK)
    exact = first_order(pole_pairs, abs(offset))
    assert force == pytest.approx(exact * offset / abs(offset), abs=1e-3 * exact)
    assert abs(field.torque) < 1e-3 * exact * B  # nothing turns a round rotor


@pytest.mark.parametrize("pole_pairs", [1, 2, 3])
def test_thin_gap_formula(pole_pairs: int) -> None:
    """F = pi R L B_1^2 eps / (2 mu0), half of it for two poles: within g / R of the exact one.

    The thickness of the gap is left out; measured 3.4, 0.04 and 0.09 % at g / R = 3.3 %.
    """
    model = whole(pole_pairs)
    reader = circle_reader(model)
    field = circle_field(reader, solve_point(model, CURRENT, 0.0, 0.0))
    crest = working_field(reader, [field], pole_pairs)
    share = 0.02
    thin = smooth_pull(pole_pairs, reader.radius, STACK, crest, share)
    assert thin == pytest.approx(first_order(pole_pairs, share * (B - A)), rel=1.1 * (B - A) / A)


def test_pull_grows_in_proportion_and_changes_sign() -> None:
    """An odd function of the offset: at 10 % of the gap 5 times that at 2 %, within eps^2 = 1 %.

    A centred rotor is not pulled: below 1e-6 of it.
    """
    model = whole(2)
    start = solve_point(model, CURRENT, 0.0, 0.1)

    def pull(share: float) -> complex:
        machine = eccentric_model(model, complex(share * (B - A)))
        field = solve_eccentric(machine, CURRENT, 0.0, 0.1, start)
        return complex(pulls(machine.reader, [circle_field(machine.reader, field)], STACK)[0])

    small, large = pull(0.02), pull(0.1)
    assert large.real == pytest.approx(5.0 * small.real, rel=0.015)
    assert pull(-0.02) == pytest.approx(-small, abs=1e-6 * abs(small))
    assert abs(pull(0.0)) < 1e-6 * abs(small)


@pytest.mark.slow
def test_pull_is_the_slope_of_the_coenergy() -> None:
    """24/4 demo, slots and saturation: F = dW'/de at constant currents (virtual work).

    Central differences at 8 and 12 % of the gap. Measured 1.8, 0.7 and 0.3 % apart at 2.5, 1.5 and
    1 times the usual element size, the stress itself being within 0.4 % of the finest throughout.
    """
    machine = shipped("demo_24s4p_arc", 2.5).machine
    section = cross_section(machine.design, 4)
    model = model_of(machine, section, mesh_section(section, MeshSettings(scale=2.5)))
    tight = replace(model.settings, newton=NewtonSettings(tolerance=1e-8))
    model = replace(model, settings=tight)
    start, force, stored = solve_point(model, 6.0, 9.0, 0.05), 0.0, []
    for share in (0.08, 0.12):
        moved = eccentric_model(model, complex(share * section.gap))
        field = solve_eccentric(moved, 6.0, 9.0, 0.05, start)
        stored.append(field.coenergy)
        read = [circle_field(moved.reader, field)]
        force += 0.5 * pulls(moved.reader, read, section.stack_length)[0].real
    slope = (stored[1] - stored[0]) / (0.04 * section.gap)
    assert force == pytest.approx(slope, rel=0.025)
    assert force > 100.0  # N


def test_parts_along_and_across() -> None:
    """A mean of 3 N along and 4 N across a direction, by hand."""
    direction = np.exp(0.7j)
    forces = np.array([3.0 + 3.0j, 3.0 + 5.0j]) * direction
    found = eccentric_pull(forces, complex(1e-5 * direction), 1e-4, 7.0)
    assert (found.along, found.across) == pytest.approx((3.0, 4.0))
    assert (found.share, found.most, found.smooth) == pytest.approx(
        (0.1, math.hypot(3.0, 5.0), 7.0)
    )


def test_what_cannot_be_moved_is_refused() -> None:
    """A sector cannot be moved, nor may the bore come near the turning circle."""
    with pytest.raises(ValueError, match=r"0\.5 of the gap; accepted to 0\.4"):
        eccentric_model(whole(2), complex(0.5 * (B - A)))
    sector = RingMachine(2, (Ring("rotor_iron", A, 2),), B, (Ring("stator_iron", 0.04, 1),), STACK)
    model = sheet_model(sector, linear_law(1e3), linear_law(1e3), TURNS)
    with pytest.raises(ValueError, match="needs the whole circle"):
        eccentric_model(model, 1e-5 + 0j)
