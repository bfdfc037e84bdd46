"""Outlines move continuously with every key of every barrier family and end."""

import pytest

from lamwright.geometry.barrier_sides import FITTED
from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.remedies import value_of, with_value
from lamwright.solver.design_motion import draw_rotor, shape_keys
from lamwright.solver.mesh_motion import edge_table, same_kind
from tests.outlines import plain_design

FAMILIES = ("arc", "straight", "vee", "hyperbolic", "streamline")
ENDS = {
    "round": {},
    "flat": {"end_shape": "flat"},
    "thicker": {"end_shape": "flat", "tangential_rib_inner_mm": 0.7},
    "square": {"end_shape": "square"},
}
STEP = 2e-3  # mm or degrees


def design(shape, end):
    barrier = BarrierDesign(
        shape=shape,
        end_angle_deg=30.0,
        thickness_mm=3.0,
        end_thickness_mm=2.6,
        depth_mm=10.0,
        tangential_rib_mm=0.6,
        arm_angle_deg=35.0 if shape == "straight" else None,
        **ENDS[end],
    )
    plain = plain_design()
    return plain.model_copy(
        update={"rotor": plain.rotor.model_copy(update={"barrier": (barrier,)})}
    )


@pytest.mark.parametrize("end", ENDS)
@pytest.mark.parametrize("shape", FAMILIES)
def test_outlines_move_evenly_with_every_key(shape, end):
    """Differences over 2 h and h agree to 1 % of the fastest node's motion plus 1e-3 mm per unit.

    So the ends of fitted arcs do not jump; central differences err by the square of the step of
    2e-3 mm or degrees. Where the number of arcs changes, one side of the key's value must have the
    outline's own kind: slopes are then taken there.
    """
    machine = design(shape, end)
    keys = [key for key in shape_keys(machine) if key.startswith("rotor.barrier[1].")]
    assert "rotor.barrier[1].end_fillet_mm" in keys or end == "round"
    for key in keys:
        value = value_of(machine, key)
        here, *tables = (
            edge_table(draw_rotor(with_value(machine, key, value + k * STEP)))
            for k in (0, -2, -1, 1, 2)
        )
        like = [same_kind(table, here) for table in tables]
        if not all(like):
            assert shape in FITTED, key
            assert like[1] or like[2], key
            continue
        wide = (tables[3].end - tables[0].end) / (4.0 * STEP)
        near = (tables[2].end - tables[1].end) / (2.0 * STEP)
        assert abs(wide - near).max() < 0.01 * abs(near).max() + 1e-6, key
