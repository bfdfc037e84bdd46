"""How a sector's meshes and radii follow each length and angle of the design file.

Outlines at a key a little smaller and a little larger are drawn exactly (no checks: 3 ms each) and
compared edge by edge. Where the shape changes in kind on one side, as when a fillet just fits, the
other side alone is taken.
Axes: n_on nodes on the outline of a part, n_node nodes of its mesh.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.cross_section import drawn_rotor, drawn_rotor_period, drawn_stator
from lamwright.geometry.design import BarrierDesign, MachineDesign, OtherHalfDesign
from lamwright.geometry.design_drawing import OutlineKeys
from lamwright.geometry.design_slots import idle_slot_keys
from lamwright.geometry.detail_keys import detail_keys
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.remedies import may_be_negative, value_of, with_value
from lamwright.geometry.rotor import rotor_frame
from lamwright.geometry.section import Region, base_name

from .mesh_motion import (
    EdgeTable,
    MeshExtension,
    OutlineNodes,
    edge_table,
    mesh_extension,
    outline_nodes,
    outline_velocity,
    same_kind,
)
from .types import FloatArray, PlanarMesh

MM = 1e-3  # m
# mm or degrees: the outline's own curvature then errs by 1e-7 of a motion, rounding by 1e-9.
KEY_STEP = 1e-3

Draw = Callable[[MachineDesign], tuple[Region, ...]]


@dataclass(frozen=True, slots=True)
class SizeMotion:
    """What the field's formulas take besides nodes: radii and stack, m per mm or degree."""

    rim_radius: float
    bore_radius: float
    stack_length: float

    @property
    def circle_radius(self) -> float:
        """Of the turning circle, half-way between rim and bore."""
        return 0.5 * (self.rim_radius + self.bore_radius)


@dataclass(frozen=True, slots=True, eq=False)
class PartMotion:
    """One mesh (rotor, stator or lamination) tied to the regions it was made of."""

    on: OutlineNodes
    extension: MeshExtension
    table: EdgeTable
    draw: Draw

    def velocity(self, design: MachineDesign, key: str) -> FloatArray:
        """Motion (n_on, 2) of the outline's nodes in m per mm or degree of the key.

        Raises:
            ValueError: where the outline changes in kind on both sides of the key's value.
        """
        value = value_of(design, key)
        below, above = (self._drawn(design, key, value + s) for s in (-KEY_STEP, KEY_STEP))
        low, high = below or self.table, above or self.table
        sides = (below is not None) + (above is not None)
        if not sides:
            raise ValueError(f"{key} = {value:g}: the outline is another one on both sides of it")
        return outline_velocity(self.on, low, high, sides * KEY_STEP)

    def _drawn(self, design: MachineDesign, key: str, value: float) -> EdgeTable | None:
        """The outline with another value of a key; None where it is of another kind."""
        if value < 0.0 and not may_be_negative(key):
            return None
        try:
            table = edge_table(self.draw(with_value(design, key, value)))
        except (ValueError, GeometryError):
            return None
        return table if same_kind(table, self.table) else None


def part_motion(mesh: PlanarMesh, design: MachineDesign, draw: Draw) -> PartMotion:
    """Ties a mesh to the regions that `draw` makes of the design.

    Raises:
        ValueError: when the mesh is not one of these regions.
    """
    table = edge_table(draw(design))
    on = outline_nodes(mesh, table)
    return PartMotion(on, mesh_extension(mesh, on), table, draw)


def draw_rotor(design: MachineDesign) -> tuple[Region, ...]:
    """The rotor's regions, as meshed for the field."""
    return drawn_rotor(design)


def draw_lamination(design: MachineDesign) -> tuple[Region, ...]:
    """The rotor's iron alone, as meshed for stress."""
    period = drawn_rotor_period(design)
    return tuple(region for region in period if base_name(region.name) == "rotor_iron")


def draw_stator(design: MachineDesign) -> tuple[Region, ...]:
    """The stator's regions, as meshed for the field."""
    return drawn_stator(design)


def size_motion(design: MachineDesign, key: str) -> SizeMotion:
    """Change of radii and stack in m per mm or degree of the key; they are linear in all keys."""
    value = value_of(design, key)
    low, high = (with_value(design, key, value + s) for s in (-KEY_STEP, KEY_STEP))

    def slope(of: Callable[[MachineDesign], float]) -> float:
        return (of(high) - of(low)) / (2.0 * KEY_STEP)

    return SizeMotion(
        rim_radius=slope(lambda d: rotor_frame(d).ring_radius),
        bore_radius=slope(lambda d: 0.5 * MM * d.stator.bore_diameter_mm),
        stack_length=slope(lambda d: MM * d.stator.stack_length_mm),
    )


def shape_keys(design: MachineDesign) -> tuple[str, ...]:
    """Every length and angle of stator, rotor, barriers and details, defaults in use included."""
    idle = idle_slot_keys(design.stator.slot_choices)
    keys = [
        f"{table}.{name}"
        for table in ("stator", "rotor")
        for name in type(getattr(design, table)).model_fields
        if _is_shape(name) and not _is_of_drawing(design, table, name) and name not in idle
    ]
    for table in ("barrier", "alternate_barrier"):
        for number, barrier in enumerate(getattr(design.rotor, table), start=1):
            keys += _barrier_keys(f"rotor.{table}[{number}]", barrier)
    return (*keys, *detail_keys(design))


def _barrier_keys(table: str, barrier: BarrierDesign) -> list[str]:
    """Keys of one barrier; of a list of values each, counted from 1."""
    keys: list[str] = []
    for name in type(barrier).model_fields:
        value = getattr(barrier, name)
        if isinstance(value, OtherHalfDesign):
            keys += [f"{table}.{name}.{own}" for own, one in value if one is not None]
        elif _is_used(barrier, name):
            count = len(value) if isinstance(value, tuple) else 0
            keys += [f"{table}.{name}[{k}]" for k in range(1, count + 1)] or [f"{table}.{name}"]
    return keys


def _is_shape(name: str) -> bool:
    # The skew turns whole steps; no outline follows it.
    return name.endswith(("_mm", "_deg")) and name != "skew_angle_deg"


def _is_of_drawing(design: MachineDesign, table: str, name: str) -> bool:
    """Whether the key says how a drawing is read, or what a drawing shows: none can be moved."""
    if name in OutlineKeys.model_fields or name == "q_axis_deg":
        return True
    if name == "stack_length_mm":
        return False
    if table == "rotor" or name == "bore_diameter_mm":  # the rim moves with the bore
        is_rotor_drawn = design.rotor.outline is not None
        return is_rotor_drawn or (table == "stator" and design.stator.outline is not None)
    return design.stator.outline is not None


def _is_used(barrier: BarrierDesign, name: str) -> bool:
    """Whether a barrier's key is stated, or acts by its default."""
    if not _is_shape(name):
        return False
    if name in barrier.model_fields_set and getattr(barrier, name) is not None:
        return True
    if name == "fillet_mm":
        return barrier.radial_ribs > 0
    if name == "end_fillet_mm":
        return barrier.end_shape != "round"
    if name == "bend_radius_mm":
        return barrier.shape in ("straight", "vee")
    return name == "arm_angle_deg" and barrier.shape == "straight"


def magnet_turns(design: MachineDesign, key: str) -> dict[str, complex]:
    """Change of each magnet's direction, x + iy of its unit vector, per mm or degree of the key.

    Where the key can be changed to one side alone, by that side.
    """
    value = value_of(design, key)
    here = _directions(design)
    sides = []
    for step in (KEY_STEP, -KEY_STEP):
        try:
            there = _directions(with_value(design, key, value + step))
        except (ValueError, GeometryError):
            continue
        if there.keys() == here.keys():
            sides.append({name: (there[name] - own) / step for name, own in here.items()})
    if not sides:
        return {}
    return {name: sum(side[name] for side in sides) / len(sides) for name in here}


def _directions(design: MachineDesign) -> dict[str, complex]:
    regions = draw_rotor(design)
    return {region.name: region.magnetisation for region in regions if region.material == "magnet"}


def moved_mesh(mesh: PlanarMesh, motion: FloatArray, amount: float) -> PlanarMesh:
    """The mesh with its nodes moved by `amount` of a key at `motion` (n_node, 2) in m per unit."""
    nodes: FloatArray = mesh.nodes + amount * motion
    return PlanarMesh(np.asarray(nodes), mesh.elements, mesh.region_of_elem, mesh.region_names)
