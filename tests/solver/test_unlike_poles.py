"""Rotors whose period is several poles: stress, contours and slopes of what repeats."""

import dataclasses

import numpy as np
import pytest
from outlines import plain_design
from plates import SPEED, steel_card

from lamwright.geometry.contours import compare_contours, lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.rotor import rotor_regions
from lamwright.geometry.section import CrossSection, rotor_iron
from lamwright.geometry.sectors import rotor_sector
from lamwright.geometry.winding import winding_table
from lamwright.postprocess.ribs import rib_report
from lamwright.solver.adjoint_field import linkage_slopes, on_outline
from lamwright.solver.adjoint_stress import peak_slope, spinning_pole
from lamwright.solver.design_motion import part_motion, size_motion
from lamwright.solver.field import FieldSettings, magnetic_model, solve_point
from lamwright.solver.mesh import mesh_lamination, mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.rotor_stress import StressSettings, elastic_material, rotor_stress, stress_on
from lamwright.solver.steel import linear_law

COARSE = StressSettings(mesh=MeshSettings(scale=2.0))


def called_period(period: int) -> CrossSection:
    """The plain machine, four like poles, called a rotor of another period."""
    return dataclasses.replace(cross_section(plain_design(), period), rotor_period=period)


def unlike_poles(count: int, sector_poles: int = 4) -> CrossSection:
    """Of each period of `count` poles the first has a thinner first barrier."""
    design = plain_design()
    first, *others = design.rotor.barrier
    thin = first.model_copy(update={"thickness_mm": 1.8})
    other = design.rotor.model_copy(update={"barrier": (thin, *others)})
    thinner = rotor_regions(design.model_copy(update={"rotor": other}))
    poles = [thinner] + [rotor_regions(design)] * (count - 1)
    rotor, ribs = rotor_sector(poles, design.pole_pairs, sector_poles)
    return dataclasses.replace(
        cross_section(design, sector_poles), rotor=rotor, ribs=ribs, rotor_period=count
    )


@pytest.mark.parametrize("period", [2, 4])
def test_stress_of_like_poles_does_not_depend_on_the_period(period: int) -> None:
    """Two poles with coupled sides and the free whole ring are one pole again, turned: 1e-9.

    The meshes are copies, so displacements differ by rounding and by the support alone, which
    carries nothing; recovered stress, loads and zones follow.
    """
    card, one, many = steel_card(), called_period(1), called_period(period)
    single = stress_on(one, mesh_lamination(one, COARSE.mesh), card, SPEED, COARSE)
    several = stress_on(many, mesh_lamination(many, COARSE.mesh), card, SPEED, COARSE)
    assert len(several.mesh.elements) == period * len(single.mesh.elements)
    assert several.peak == pytest.approx(single.peak, rel=1e-9)
    first, second = (rib_report(s, c, 3e8) for s, c in ((single, one), (several, many)))
    assert len(second.ribs) == period * len(first.ribs)
    for k, row in enumerate(second.ribs):
        twin = first.ribs[k % len(first.ribs)]
        assert row.peak == pytest.approx(twin.peak, rel=1e-9)
        assert row.mean_tension == pytest.approx(twin.mean_tension, rel=1e-8)
    assert second.growth_d == pytest.approx(first.growth_d, rel=1e-8)
    assert second.growth_q == pytest.approx(first.growth_q, rel=1e-8)


def test_stress_of_two_unlike_poles_on_half_and_whole_ring() -> None:
    """Coupled sides against the free ring on the ring's own copies: ribs within the tolerance.

    The ring is meshed anew (its sides are no boundary), so 2 % of the adaptive loop's tolerance.
    """
    card = steel_card()
    half = rotor_stress(unlike_poles(2), card, SPEED)
    whole = dataclasses.replace(unlike_poles(2), rotor_period=4)
    ring = rotor_stress(whole, card, SPEED)
    rows = rib_report(half, unlike_poles(2), 3e8).ribs
    again = rib_report(ring, whole, 3e8).ribs
    assert len(again) == 2 * len(rows)
    for k, row in enumerate(again):
        assert row.peak == pytest.approx(rows[k % len(rows)].peak, rel=0.02)
    # Unlike barriers are unlike loads: the comparison is not one of like poles.
    assert abs(rows[0].peak / rows[len(rows) // 2].peak - 1.0) > 0.01


def test_unbalanced_ring_spins_about_its_centre_of_mass() -> None:
    """One unlike pole of four: solved, in equilibrium, though no symmetry holds the centre.

    Each carrier's ribs together carry what lies outside of them, so the mean tension of ribs of
    the like poles opposite each other agrees to the small shift of the centre: 2 %.
    """
    section = unlike_poles(4)
    solution = rotor_stress(section, steel_card(), SPEED)
    report = rib_report(solution, section, 3e8)
    per_pole = len(report.ribs) // 4
    second, fourth = report.ribs[per_pole : 2 * per_pole], report.ribs[3 * per_pole :]
    for right, left in zip(second, reversed(fourth), strict=True):
        if right.rib.barrier == left.rib.barrier:
            assert right.mean_tension == pytest.approx(left.mean_tension, rel=0.02)
    with pytest.raises(ValueError, match="unbalanced"):
        spinning_pole(section, solution.mesh, elastic_material(steel_card()), SPEED)


def test_contours_of_like_poles_do_not_depend_on_the_period() -> None:
    """Contours drawn from one, two or four poles: the same to rounding of a turn."""
    one = lamination_contours(called_period(1))
    for period in (2, 4):
        assert compare_contours(one, lamination_contours(called_period(period))) < 1e-12


def test_contours_hold_the_iron_of_unlike_poles() -> None:
    """Area of all contours is twice that of the two poles' iron: exact areas, rounding."""
    section = unlike_poles(2, 2)
    contours = lamination_contours(section)
    iron = sum(area(p) for r in rotor_iron(section) for p in (r.outer, *r.holes))
    assert sum(area(contour.path) for contour in contours) == pytest.approx(2.0 * iron, rel=1e-12)
    assert len(contours) == len(lamination_contours(called_period(1)))


@pytest.mark.parametrize("key", ["rotor.barrier[1].thickness_mm", "stator.tooth_width_mm"])
def test_slopes_on_a_wider_sector_are_those_of_one_pole(key: str) -> None:
    """Slopes of the whole machine's linkages by a key: the same from one pole and from two.

    Meshes are copies, but nodes inside follow the outline, to which the sides belong: the line
    between two poles moves with it in one and by the mesh in the other: 1e-6 measured, 1e-5.
    """
    design, found = plain_design(), []
    winding, law = winding_table(design), linear_law(2000.0)
    for poles in (1, 2):
        section = cross_section(design, poles)
        sector = mesh_section(section, MeshSettings(scale=2.5))
        settings = FieldSettings(newton=NewtonSettings(tolerance=1e-10))
        model = magnetic_model(sector, section, winding, law, law, settings)
        solution = solve_point(model, 5.0, 8.0, 0.031)
        parts = [
            part_motion(
                mesh, design, lambda d, part=part, n=poles: getattr(cross_section(d, n), part)
            )
            for mesh, part in ((sector.rotor, "rotor"), (sector.stator, "stator"))
        ]
        moves = [part.velocity(design, key) for part in parts]
        slopes = linkage_slopes(model, section, winding, solution)
        found.append(
            [on_outline(s, *parts).by_key(*moves, size_motion(design, key)) for s in slopes]
        )
    assert found[1] == pytest.approx(found[0], rel=1e-5)


def test_stress_slope_on_two_poles_is_that_of_one() -> None:
    """The smoothed peak of twice as many ribs and its slope by a place, up to the known bias.

    2^(1/200) of the smoothed peak (derived from the norm); the gradient shares the peak over both
    poles, so its sum over both is that of one, times the same factor.
    """
    card, sums = steel_card(), []
    for period in (1, 2):
        section = called_period(period)
        solution = stress_on(section, mesh_lamination(section, COARSE.mesh), card, SPEED, COARSE)
        pole = spinning_pole(section, solution.mesh, elastic_material(card), SPEED)
        peak = peak_slope(pole, solution.displacement)
        radial = np.sum(peak.slope * solution.mesh.nodes)  # by a growth of all lengths
        sums.append((peak.smoothed, radial))
    factor = 2.0 ** (1.0 / 200.0)
    assert sums[1][0] == pytest.approx(factor * sums[0][0], rel=1e-9)
    assert sums[1][1] == pytest.approx(factor * sums[0][1], rel=1e-6)
