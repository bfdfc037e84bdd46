"""Pictures of slots that are not semi-closed and of tooth coils: named and marked as they are."""

import cmath
import math

from matplotlib.text import Text
from slot_shapes import slotted

from lamwright.geometry.cross_section import cross_section
from lamwright.postprocess.figures import section_figure
from lamwright.postprocess.figures_field import _slot_room
from lamwright.postprocess.figures_style import Style


def names(design):
    figure = section_figure("slots", cross_section(design), Style())
    return {text.get_text() for text in figure.findobj(Text)}


def test_names_follow_the_mouth_and_the_layers():
    """A bridge for an opening; coil sides beside each other; no mouth where copper fills it."""
    closed = names(slotted(("parallel_tooth", "flat", "closed"), (2, 1)))
    assert {"bridge, 0.80 mm", "coil side, layer 0", "coil side, layer 1"} <= closed
    assert not {"slot opening", "slot, bottom layer"} & closed
    filled = names(slotted(("parallel_slot", "round", "open"), (2, 6), wedge_depth_mm=0.0))
    assert {"slot, bottom layer", "slot, top layer"} <= filled
    assert "slot opening" not in filled
    assert "slot opening" in names(slotted(("parallel_slot", "round", "open"), wedge_depth_mm=1.0))


def test_marks_lie_in_their_own_half_of_the_slot():
    """The mark's middle seen from the centre line: mirror images, a quarter of the width off."""
    design = slotted(("parallel_slot", "flat", "closed"), (2, 1))
    regions = {region.name: region for region in cross_section(design).stator}
    angle = math.pi / design.stator.slots
    marks = [
        _slot_room(regions[f"slot_0_layer_{k}"], angle)[0] * cmath.exp(-1j * angle) for k in (0, 1)
    ]
    assert abs(marks[0] - marks[1].conjugate()) < 1e-12
    assert abs(marks[1].imag - 0.25e-3 * design.stator.slot_width_mm) < 1e-12
