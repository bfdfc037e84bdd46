"""Tables of the rotor lamination's details: notches, holes, keyways, outer contour.

Angles are mechanical degrees from the q axis of the pole to the middle of a detail. One on the
q axis (0) or on the d axis (180 / poles) stands once a pole, any other on both sides of the q axis.
"""

from typing import Annotated, Literal

from pydantic import Field

from .design_table import NotNegative, Positive, Table

Permeability = Annotated[float, Field(ge=1.0)]


class NotchDesign(Table):
    """A groove along the rotor's surface, its walls parallel to the radius through its middle.

    A round bottom is a half circle between the walls, or one arc from rim to rim where the notch is
    shallower than half its width; a flat one has a fillet in each corner.
    """

    angle_deg: NotNegative
    width_mm: Positive
    depth_mm: Positive  # on the notch's middle, from the rim
    bottom: Literal["round", "flat"] = "round"
    corner_radius_mm: Positive | None = None  # flat only


class HoleDesign(Table):
    """A hole for a rivet or to save weight; with a span a slot along the circumference.

    The slot's round ends have the diameter of the hole, their centres are `span_deg` apart.
    """

    place_radius_mm: Positive  # from the shaft axis to the hole's middle
    angle_deg: NotNegative
    diameter_mm: Positive
    span_deg: Positive | None = None
    material: Literal["air", "rivet"] = "air"
    relative_permeability: Permeability | None = None  # of a rivet, default 1: non-magnetic


class KeywayDesign(Table):
    """Grooves in the bore, `count` of them evenly spaced; `angle_deg` is not mirrored.

    The count divides the poles; the first groove belongs to the first pole.

    A dog-bone key has a neck of `width_mm` and a wider head, `head_width_mm` by `head_depth_mm`,
    at the bottom of its groove.
    """

    kind: Literal["keyway", "dog_bone"] = "keyway"
    count: Annotated[int, Field(ge=1)]
    angle_deg: NotNegative = 0.0
    width_mm: Positive
    depth_mm: Positive  # on the groove's middle, from the bore
    corner_radius_mm: Positive = 0.5
    head_width_mm: Positive | None = None  # dog_bone only
    head_depth_mm: Positive | None = None  # dog_bone only
    key: Literal["air", "steel"] = "steel"  # what lies in the groove
    key_relative_permeability: Permeability | None = None  # default that of the shaft


class ContourDesign(Table):
    """A rim that is no circle; `rotor.gap_mm` is then the least gap, on the d axis.

    `eccentric`: the gap grows to `q_axis_gap_mm` on the q axis; arcs with centres on the d and the
    q axis that join tangentially. `step`: within `end_angle_deg` of the q axis the radius is
    `step_mm` smaller, with transitions of two arcs of `step_radius_mm` each.
    """

    kind: Literal["eccentric", "step"]
    q_axis_gap_mm: Positive | None = None
    step_mm: Positive | None = None
    end_angle_deg: Positive | None = None
    step_radius_mm: Positive | None = None
