"""Meshes of slots of every shape: sound elements, areas kept, bridges resolved."""

import math

import numpy as np
import pytest
from slot_shapes import SHAPES, WINDINGS, slotted

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.design_slots import idle_slot_keys
from lamwright.geometry.remedies import value_of, with_value
from lamwright.geometry.slot_outline import slot_copper_area
from lamwright.solver.design_motion import draw_stator, moved_mesh, part_motion, shape_keys
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_checks import least_jacobian_share


def corners_of(mesh):
    """Corner points (n_elem, 3) as complex numbers."""
    xy = mesh.nodes[mesh.elements[:, :3]]
    return xy[..., 0] + 1j * xy[..., 1]


def sizes_of(mesh):
    """Area of each element with curved sides: six-point shoelace plus the sides' parabolas."""
    xy = mesh.nodes[mesh.elements]
    z = xy[..., 0] + 1j * xy[..., 1]
    total = np.zeros(len(z))
    for a, b, middle in ((0, 1, 3), (1, 2, 4), (2, 0, 5)):
        total += 0.5 * (z[:, a].conj() * z[:, b]).imag
        rise = z[:, middle] - 0.5 * (z[:, a] + z[:, b])
        total += 2.0 / 3.0 * (rise.conj() * (z[:, b] - z[:, a])).imag
    return total


def missed_by(edge):
    """Area in m^2 that parabolas of 40 degrees miss of an arc; graded steps are 30 on average."""
    return edge.radius**2 * abs(edge.sweep) * math.radians(40.0) ** 4 / 960.0


@pytest.mark.parametrize("winding", WINDINGS, ids=str)
@pytest.mark.parametrize("shape", SHAPES, ids=" ".join)
def test_every_slot_can_be_meshed(shape, winding):
    """No degenerate triangle: every angle over 10 degrees; regions keep their areas.

    The least angle of the demonstration machines' own meshes is 16 degrees. A parabola through
    three points of an arc misses r^2 f^5 / 960 of its area (derived).
    """
    section = cross_section(slotted(shape, winding))
    mesh = mesh_section(section).stator
    z = corners_of(mesh)
    sides = np.roll(z, -1, axis=1) - z
    angles = np.abs(np.angle(-np.roll(sides, 1, axis=1) / sides))
    assert math.degrees(angles.min()) > 10.0
    assert least_jacobian_share(mesh.nodes[mesh.elements]).min() > 0.3
    sizes = sizes_of(mesh)
    assert mesh.region_names == tuple(region.name for region in section.stator)
    for k, region in enumerate(section.stator):
        whole = area(region.outer) + sum(area(hole) for hole in region.holes)
        paths = (region.outer, *region.holes)
        missed = sum(missed_by(edge) for path in paths for edge in path.edges if not edge.is_line)
        found = sizes[mesh.region_of_elem == k].sum()
        assert found == pytest.approx(whole, abs=missed + 1e-12 * whole)


@pytest.mark.parametrize("off", [-0.06, -0.02, -1e-5, 1e-5, 0.02, 0.06])
def test_layers_parted_beside_a_joint_make_no_needles(off):
    """The line ends within 50 um of where flank and fillet meet: every angle over 10 degrees."""
    keys = {"slot_depth_mm": 7.0, "slot_corner_radius_mm": 2.3721052 + off, "wedge_depth_mm": 1.0}
    design = slotted(("parallel_slot", "flat", "semi_closed"), (2, 6), **keys)
    few = design.winding.model_copy(update={"turns_per_coil": 4})
    section = cross_section(design.model_copy(update={"winding": few}))
    z = corners_of(mesh_section(section).stator)
    sides = np.roll(z, -1, axis=1) - z
    angles = np.abs(np.angle(-np.roll(sides, 1, axis=1) / sides))
    assert math.degrees(angles.min()) > 10.0


@pytest.mark.parametrize("winding", [(2, 6), (2, 1)], ids=str)
@pytest.mark.parametrize("shape", SHAPES[::5] + SHAPES[2::9], ids=" ".join)
def test_meshes_follow_every_key_of_a_slot(shape, winding):
    """Change of the copper's area in the mesh, as its nodes follow a key, and of the outline's.

    Central differences of both, 1e-3 of the key's full effect: the mesh's arcs are parabolas.
    """
    design = slotted(shape, winding)
    mesh = mesh_section(cross_section(design)).stator
    part = part_motion(mesh, design, draw_stator)
    keys = [key for key in shape_keys(design) if key.startswith("stator.")]
    assert {key.removeprefix("stator.") for key in keys} == {
        key
        for key, value in design.stator.model_dump().items()
        if key.endswith(("_mm", "_deg"))
        and value is not None
        and key not in idle_slot_keys(design.stator.slot_choices)
        and not key.startswith("outline_")
    }
    number = mesh.region_names.index("slot_1_layer_0")
    own = mesh.region_of_elem == number
    for key in keys:
        motion = part.extension.extended(part.velocity(design, key))
        step = 1e-3
        sizes = [sizes_of(moved_mesh(mesh, motion, s))[own].sum() for s in (-step, step)]
        value = value_of(design, key)
        sides = [slot_copper_area(with_value(design, key, value + s)) for s in (-step, step)]
        scale = slot_copper_area(design) / 1e3 * step  # per mm, a thousandth of the area
        assert sizes[1] - sizes[0] == pytest.approx(sides[1] - sides[0], rel=1e-3, abs=scale), key


@pytest.mark.parametrize("bridge", [0.5, 0.8, 1.5])
@pytest.mark.parametrize("sides", ["parallel_tooth", "parallel_slot"])
def test_bridges_are_four_elements_thick(sides, bridge):
    """Iron elements that rays across the bridge pass through: 4 at the least, all along it."""
    design = slotted((sides, "flat", "closed"), (2, 6), bridge_mm=bridge)
    section = cross_section(design)
    mesh = mesh_section(section).stator
    iron = mesh.region_of_elem == mesh.region_names.index("stator_iron")
    z = corners_of(mesh)[iron]
    middle = math.pi / section.slots
    for off in (-0.8, -0.4, 0.013, 0.4, 0.8):
        ray = np.exp(1j * (middle + off * 2.0e-3 / section.stator_bore_radius))
        radii = section.stator_bore_radius + section.bridge * np.linspace(0.002, 0.998, 999)
        crossed = set()
        for point in radii * ray:
            around = np.imag(np.conj(np.roll(z, -1, axis=1) - z) * (point - z))
            crossed |= set(np.flatnonzero(np.all(around > 0.0, axis=1)).tolist())
        assert len(crossed) >= 4
