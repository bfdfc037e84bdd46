"""Machines as made: an offset against the keys that make it, spoilt steel against its own law."""

from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.winding import winding_table
from lamwright.solver.adjoint_field import linkage_slopes, on_outline
from lamwright.solver.cut_motion import bore_motion, cut_edges, cut_motion
from lamwright.solver.cut_steel import cut_steel_law, edge_distances, edge_share
from lamwright.solver.design_motion import (
    draw_lamination,
    draw_rotor,
    draw_stator,
    part_motion,
)
from lamwright.solver.field import FieldSettings, magnetic_model, solve_point
from lamwright.solver.made_machine import made_section, made_sector, made_stress, standing_out
from lamwright.solver.mesh import mesh_lamination, mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.rotor_stress import StressSettings, rotor_stress
from lamwright.solver.steel import law_from_points, reluctivity_law

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
MM = 1e-3


@pytest.fixture(scope="module")
def demo():
    """Machine, section, sector mesh, lamination mesh and the two motions."""
    machine = read_machine(DEMO)
    design = machine.design
    section = cross_section(design)
    sector = mesh_section(section, MeshSettings(scale=2.0))
    lamination = mesh_lamination(section, MeshSettings(scale=2.0))
    parts = (
        part_motion(sector.rotor, design, draw_rotor),
        part_motion(sector.stator, design, draw_stator),
    )
    iron = part_motion(lamination, design, draw_lamination)
    motions = (
        cut_motion(section, sector, parts, (lamination, iron)),
        bore_motion(section, sector, parts, lamination),
    )
    return machine, section, sector, lamination, iron, motions


def offset_design(design, d_mm):
    """The design whose drawing is this one with all rotor edges offset: exact for round arcs.

    Barrier +2 d, its depth and its rib -2 d (the rim recedes too), gap +d, bore +2 d in diameter.
    """
    barriers = tuple(
        b.model_copy(
            update={
                "thickness_mm": b.thickness_mm + 2 * d_mm,
                "depth_mm": b.depth_mm - 2 * d_mm,
                "tangential_rib_mm": b.tangential_rib_mm - 2 * d_mm,
            }
        )
        for b in design.rotor.barrier
    )
    rotor = design.rotor.model_copy(
        update={
            "barrier": barriers,
            "gap_mm": design.rotor.gap_mm + d_mm,
            "shaft_diameter_mm": design.rotor.shaft_diameter_mm + 2 * d_mm,
        }
    )
    return design.model_copy(update={"rotor": rotor})


def test_worn_punch_is_the_drawing_with_other_keys(demo):
    """Nodes on cut edges, moved by 20 um, lie on the outline drawn with keys 20 um off.

    Closed form of the keys. Within 0.05 um: normals come from second-order sides, which miss an
    arc's by the fourth power of the step; a wrong sign would be 40 um.
    """
    machine, _, _, lamination, _, (cut, _) = demo
    amount = 0.02
    drawn = cross_section(offset_design(machine.design, amount))
    edges = cut_edges(lamination, drawn.sector_angle)
    nodes = np.unique(edges)
    moved = lamination.nodes[nodes] + MM * amount * cut.lamination[nodes]
    place = moved[:, 0] + 1j * moved[:, 1]
    (iron,) = (region for region in drawn.rotor if region.name == "rotor_iron")
    away = np.full(len(nodes), np.inf)
    for edge in (edge for path in (iron.outer, *iron.holes) for edge in path.edges):
        points = np.array([edge.point(t) for t in np.linspace(0.0, 1.0, 200)])
        step = abs(points[1] - points[0])
        near = np.abs(place[:, None] - points[None, :]).min(axis=1) < step
        if edge.is_line:
            along = (edge.end - edge.start) / abs(edge.end - edge.start)
            own = np.abs(((place - edge.start) * np.conj(along)).imag)
        else:
            own = np.abs(np.abs(place - edge.centre) - abs(edge.start - edge.centre))
        away = np.where(near, np.minimum(away, own), away)
    assert away.max() < 5e-8


def test_stress_of_a_worn_rotor_is_that_of_the_drawing_with_other_keys(demo):
    """Peak at 40 um of wear, moved mesh against a new drawing and mesh: change within 5 % of it.

    Both meshes err by 0.5 % of the peak at most; the change is 12 %.
    """
    machine, section, _, _, _, _ = demo
    design, card, speed, amount = machine.design, machine.rotor_steel, 700.0, 0.04
    settings = StressSettings(tolerance=0.01)
    base = rotor_stress(section, card, speed, settings)
    iron = part_motion(base.mesh, design, draw_lamination)
    sector = mesh_section(section, MeshSettings(scale=2.0))
    parts = (
        part_motion(sector.rotor, design, draw_rotor),
        part_motion(sector.stator, design, draw_stator),
    )
    cut = cut_motion(section, sector, parts, (base.mesh, iron))
    moved = made_stress(section, base.mesh, [cut], [MM * amount], card, speed)
    still = made_stress(section, base.mesh, [cut], [0.0], card, speed)
    assert still.peak == pytest.approx(base.peak, rel=1e-12)
    new = rotor_stress(cross_section(offset_design(design, amount)), card, speed, settings)
    assert moved.peak - base.peak == pytest.approx(new.peak - base.peak, rel=0.05)
    assert standing_out(moved) == pytest.approx(standing_out(new), rel=2e-3)


def test_radii_and_circles_follow(demo):
    """Rim, bore and turning circle of section and meshes agree after both motions."""
    _, section, sector, _, _, motions = demo
    amounts = (2e-5, -1e-5)
    made, meshes = made_section(section, motions, amounts), made_sector(sector, motions, amounts)
    assert made.rotor_radius == pytest.approx(section.rotor_radius - 2e-5, abs=1e-12)
    assert made.stator_bore_radius == pytest.approx(section.stator_bore_radius - 1e-5, abs=1e-12)
    assert meshes.circle_radius == pytest.approx(made.circle_radius, abs=1e-12)
    for before, after in ((sector.rotor, meshes.rotor), (sector.stator, meshes.stator)):
        radius = np.hypot(*before.nodes.T)
        on = np.abs(radius - sector.circle_radius) < 1e-9
        assert np.hypot(*after.nodes[on].T) == pytest.approx(made.circle_radius, abs=1e-11)
    for mesh in (meshes.rotor, meshes.stator):  # a side is the other one turned
        place = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
        first = np.sort(place[np.abs(place.imag) < 1e-9].real)
        turned = place * np.exp(-1j * section.sector_angle)
        second = np.sort(turned[np.abs(turned.imag) < 1e-9].real)
        assert second == pytest.approx(first, abs=1e-11)


def test_spoilt_steel_is_the_card_with_less_flux_density(demo):
    """A share of 0.8: nu equals that of a law through (0.8 B, H), but for the spline: 1 %.

    Twin. Slope and energy against differences of the law itself: both are exact derivatives.
    """
    machine = demo[0]
    curve = machine.rotor_steel.magnetisation
    law = cut_steel_law(reluctivity_law(machine.rotor_steel), np.full(1, 0.8))
    twin = law_from_points(0.8 * np.array(curve.b_t), np.array(curve.h_a_per_m))
    b = np.linspace(0.1, 1.4, 27)[:, None]
    nu, dnu = law(b**2)
    assert nu == pytest.approx(twin(b**2)[0], rel=1e-2)
    step = 1e-5
    slope = (law(b**2 + step)[0] - law(b**2 - step)[0]) / (2.0 * step)
    assert dnu == pytest.approx(slope, rel=2e-3, abs=0.02 * float(np.abs(dnu).max()))
    energy = law.energy_density((b + step) ** 2) - law.energy_density((b - step) ** 2)
    assert energy / (2.0 * step) == pytest.approx(nu * b, rel=1e-4)
    assert law.flux_density(law.field_strength(b)) == pytest.approx(b, rel=1e-3)


def test_spoilt_area_is_length_times_depth(demo):
    """Area of the layer 0.1 mm deep against the outline's length times 0.1 mm, within 5 %.

    Closed form for a straight edge; convex corners lose and round ones gain a little.
    """
    _, section, sector, _, _, _ = demo
    mesh, depth = sector.stator, 1e-4
    share = edge_share(edge_distances(mesh, section.sector_angle), depth, 1.0)
    assert np.all((share >= 0.0) & (share <= 1.0))
    iron = mesh.elements_of("stator_iron")
    x, y = mesh.nodes[mesh.elements[iron, :3]].transpose(2, 0, 1)
    area = 0.5 * np.abs(
        (x[:, 1] - x[:, 0]) * (y[:, 2] - y[:, 0]) - (x[:, 2] - x[:, 0]) * (y[:, 1] - y[:, 0])
    )
    edges = cut_edges(mesh, section.sector_angle)
    length = np.linalg.norm(mesh.nodes[edges[:, 1]] - mesh.nodes[edges[:, 0]], axis=1).sum()
    assert float(((1.0 - share) * area).sum()) == pytest.approx(depth * length, rel=0.05)


def test_no_depth_is_no_change(demo):
    """Without depth every share is 1, and shares fall with the depth."""
    _, section, sector, _, _, _ = demo
    distances = edge_distances(sector.rotor, section.sector_angle)
    assert np.all(edge_share(distances, 0.0, 0.5) == 1.0)
    shallow, deep = (edge_share(distances, d, 0.5) for d in (1e-4, 3e-4))
    assert np.all(deep <= shallow)
    assert deep.min() == 0.5


def test_differences_of_made_machines_are_the_adjoint_slopes(demo):
    """psi_d, psi_q between +-2 um of wear and of bore: the exact slope, within 0.1 %.

    The adjoint differentiates the same sums on the same meshes; what is left is Newton's residual
    over 4 um and the curvature.
    """
    machine, section, sector, _, _, motions = demo
    design = machine.design
    winding, law = winding_table(design), reluctivity_law(machine.rotor_steel, 0.97)
    settings = FieldSettings(newton=NewtonSettings(tolerance=1e-9))
    parts = (
        part_motion(sector.rotor, design, draw_rotor),
        part_motion(sector.stator, design, draw_stator),
    )

    def solved(amounts):
        model = magnetic_model(
            made_sector(sector, motions, amounts),
            made_section(section, motions, amounts),
            winding,
            law,
            law,
            settings,
        )
        return model, solve_point(model, 6.5, 10.1, 0.1)

    model, field = solved((0.0, 0.0))
    slopes = linkage_slopes(model, section, winding, field)
    for k, motion in enumerate(motions):
        step = 2e-6
        ends = [solved(sign * step * np.eye(2)[k])[1] for sign in (1.0, -1.0)]
        for slope, name in zip(slopes, ("psi_d", "psi_q"), strict=True):
            exact = on_outline(slope, *parts).by_key(
                motion.rotor[parts[0].on.node], motion.stator[parts[1].on.node], motion.sizes
            )
            found = (getattr(ends[0], name) - getattr(ends[1], name)) / (2.0 * step)
            assert found == pytest.approx(exact, rel=1e-3)
