"""Outlines as polygons, the demo design as read, and the reference rotor B1, for tests."""

import cmath
import math
from pathlib import Path as FilePath

import numpy as np
import shapely

from lamwright.geometry.curves import Path
from lamwright.geometry.design import BarrierDesign, MachineDesign
from lamwright.geometry.design_file import read_design

DESIGNS = FilePath(__file__).parents[1] / "designs"
SAG = 1e-7  # m, how far a polygon's chords may lie from their arcs


def demo_design() -> MachineDesign:
    """The arc demo as its file states it."""
    return read_design(DESIGNS / "demo_24s4p_arc.toml")


def polygon(path: Path, sag: float = SAG) -> shapely.Polygon:
    """The path as a polygon with its corners on the curve, chords within `sag` of it (m)."""
    points = []
    for edge in path.edges:
        count = 1
        if not edge.is_line:
            # The sagitta of a chord over the angle phi is r (1 - cos(phi / 2)) < r phi^2 / 8.
            step = math.sqrt(8.0 * sag / edge.radius)
            count = max(1, math.ceil(abs(edge.sweep) / step))
        points += [edge.point(k / count) for k in range(count)]
    return shapely.Polygon(np.column_stack([np.real(points), np.imag(points)]))


def turns(path: Path) -> list[float]:
    """The angle in rad by which the path turns at the end of each edge, 0 where it is smooth."""
    edges = path.edges
    return [
        cmath.phase(after.direction(0.0) / before.direction(1.0))
        for before, after in zip(edges, (*edges[1:], edges[0]), strict=True)
    ]


def b1_barrier() -> BarrierDesign:
    """Barrier of the reference rotor B1 (check values C10), from its definition there.

    R = 39.5 mm; band between circles of 25 and 30 mm about the point R sqrt 2 on the q axis; cap
    centres on the circle of 27.5 mm, 39.5 - 0.6 - 2.5 mm from the shaft axis.
    """
    centre, reach = 39.5 * math.sqrt(2.0), 39.5 - 0.6 - 2.5
    cosine = (reach**2 + centre**2 - 27.5**2) / (2.0 * reach * centre)
    return BarrierDesign(
        shape="arc",
        end_angle_deg=math.degrees(math.acos(cosine)),
        thickness_mm=5.0,
        depth_mm=39.5 - (centre - 25.0),
        tangential_rib_mm=0.6,
    )


def b1_design() -> MachineDesign:
    """The demo's stator at a bore of 80 mm round the reference rotor B1; bore 24 mm, gap 0.5 mm."""
    demo = demo_design()
    rotor = demo.rotor.model_copy(
        update={"gap_mm": 0.5, "shaft_diameter_mm": 24.0, "barrier": (b1_barrier(),)}
    )
    stator = demo.stator.model_copy(update={"bore_diameter_mm": 80.0})
    return demo.model_copy(update={"rotor": rotor, "stator": stator})
