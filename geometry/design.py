"""The design of a machine as its file states it: strict, frozen, a unit in every name.

Lengths in mm and angles in mechanical degrees here and only here; the modules that build
outlines convert to SI. Limits of single values are declared on the fields; limits that depend on
several values are the business of `checks`.
"""

from typing import TYPE_CHECKING, Annotated, Literal, Self

from pydantic import BeforeValidator, Field, PrivateAttr, model_validator
from pydantic_core import PydanticCustomError

from .design_details import ContourDesign, HoleDesign, KeywayDesign, NotchDesign
from .design_drawing import OutlineKeys
from .design_fatigue import FatigueData
from .design_fit import FitDesign, HotDesign, HotSteel
from .design_hardening import HardeningCurve
from .design_loss import LossesDesign, LossPoints, StrandDesign
from .design_slots import KEYS_OF_SHAPE, slot_key_faults
from .design_table import NotNegative, Positive
from .design_table import Table as _Table
from .design_table import whole as _whole
from .design_tolerance import ToleranceDesign

if TYPE_CHECKING:
    from .outline_report import RotorOutline, StatorOutline


class StatorDesign(OutlineKeys):
    """The stator as it exists: slots all alike, symmetric about their centre lines.

    Which keys a slot has is said by its sides, bottom and mouth, see `design_slots`.
    """

    outer_diameter_mm: Positive
    bore_diameter_mm: Positive
    stack_length_mm: Positive
    slots: Annotated[int, Field(ge=3, le=144)]
    slot_sides: Literal["parallel_tooth", "parallel_slot"] = "parallel_tooth"
    slot_bottom: Literal["concentric", "flat", "round"] = "concentric"
    slot_mouth: Literal["semi_closed", "open", "closed"] = "semi_closed"
    tooth_width_mm: Positive | None = None  # teeth with parallel sides
    slot_width_mm: Positive | None = None  # slots with parallel sides
    slot_depth_mm: Positive  # from the bore to the slot bottom, on the centre line
    slot_opening_mm: Positive | None = None  # semi-closed
    opening_depth_mm: Positive | None = None  # semi-closed: straight mouth at the bore
    bridge_mm: Positive | None = None  # closed: iron between bore and slot
    wedge_angle_deg: Annotated[float, Field(ge=0.0, le=60.0)] = 30.0  # of the tooth tip's underside
    wedge_depth_mm: NotNegative = 0.0  # depth kept free of copper under tooth tip, bore or bridge
    slot_corner_radius_mm: NotNegative = 1.0  # at a concentric or flat slot bottom
    _outline: "StatorOutline | None" = PrivateAttr(default=None)

    @property
    def outline(self) -> "StatorOutline | None":
        """What was recognised in the drawing; its dimensions then stand in the keys."""
        return self._outline

    def drawn(self, outline: "StatorOutline") -> Self:
        """The same table with the slots of a drawing."""
        copy = self.model_copy()
        copy._outline = outline
        return copy

    @model_validator(mode="after")
    def _keys_of_the_slot(self) -> Self:
        fields = type(self).model_fields
        stated = [key for key, field in fields.items() if getattr(self, key) != field.default]
        found = slot_key_faults(self.slot_choices, stated)
        if found:
            raise PydanticCustomError(KEYS_OF_SHAPE, "keys of another shape", {"found": found})
        return self

    @property
    def slot_choices(self) -> tuple[str, str, str]:
        """Sides, bottom and mouth of the slots."""
        return self.slot_sides, self.slot_bottom, self.slot_mouth


class WindingDesign(_Table):
    """A balanced three-phase winding: distributed, fractional-slot or of tooth coils (span 1)."""

    layers: Annotated[Literal[1, 2], BeforeValidator(_whole)]
    coil_span_slots: Annotated[int, Field(ge=1)]
    turns_per_coil: Annotated[int, Field(ge=1)]
    parallel_paths: Annotated[int, Field(ge=1)] = 1
    conductor_area_mm2: Positive  # copper of one turn, all strands together
    end_turn_length_mm: Positive  # one end turn, one side of the stack
    end_permeance_coefficient: Annotated[float, Field(ge=0.0, le=1.0)] = 0.3
    temperature_c: Annotated[float, Field(ge=-40.0, le=220.0)] = 100.0
    strands: StrandDesign | None = None  # needed for the AC copper loss


class BarrierMagnetDesign(_Table):
    """A magnet block in a barrier, or two that mirror each other, magnetised across the barrier.

    Inward means from rim to shaft, against the flux that a positive q-axis current makes: the
    polarity that raises the torque of motoring currents i_d, i_q > 0.
    """

    width_mm: Positive  # along the barrier
    thickness_mm: Positive | None = None  # across; default what the clearance leaves
    clearance_mm: Annotated[float, Field(ge=0.02)] = 0.1  # least distance to every wall
    offset_mm: NotNegative = 0.0  # q axis to the middle of each of a pair; 0: one on the q axis
    polarity: Literal["inward", "outward"] = "inward"


class OtherHalfDesign(_Table):
    """What the clockwise half of a barrier has unlike the other one."""

    end_angle_deg: Positive | None = None
    end_thickness_mm: Positive | None = None
    tangential_rib_mm: Positive | None = None
    tangential_rib_inner_mm: Positive | None = None
    end_fillet_mm: Positive | None = None
    arm_angle_deg: Annotated[float, Field(ge=0.0, lt=90.0)] | None = None
    bend_radius_mm: Positive | None = None


class BarrierDesign(_Table):
    """One flux barrier; barriers are listed from the rim inward.

    `depth_mm` is the distance on the q axis from the rim to the barrier's outer edge,
    `thickness_mm` its thickness there and `end_thickness_mm` that at its end,
    `end_angle_deg` the angle from the q axis to the centre of its end: the middle of the end's
    thickness, half of it inside the tangential rib, the iron left between barrier and rim.

    Families: an `arc` has circular sides about points of the q axis; a `straight` one a bottom
    across the q axis and two arms that make `arm_angle_deg` with it, joined by bends of inner
    radius `bend_radius_mm`; a `vee` two arms and a nose of that inner radius; the sides of a
    `hyperbolic` one are hyperbolas about the shaft axis, those of a `streamline` one flux lines of
    a solid disc (`flux_lines`).

    Ends: `round`; `flat`, along the rim; `square`, across the barrier; the last two with fillets.
    """

    shape: Literal["arc", "straight", "vee", "hyperbolic", "streamline"]
    end_angle_deg: Positive
    thickness_mm: Positive
    end_thickness_mm: Positive | None = None  # default the thickness
    depth_mm: Positive
    tangential_rib_mm: Positive
    tangential_rib_inner_mm: Positive | None = None  # flat end: at the inner carrier's side
    end_shape: Literal["round", "flat", "square"] = "round"
    end_fillet_mm: Positive | None = None  # flat, square; default a quarter of the end's thickness
    radial_ribs: Annotated[int, Field(ge=0, le=4)] = 0
    radial_rib_mm: Positive | None = None  # width of each radial rib; needed when there is one
    radial_rib_offset_mm: Positive | None = None  # q axis to the middle of each of two ribs
    # Heights of all ribs off the q axis, positive on the counter-clockwise half.
    radial_rib_places_mm: Annotated[tuple[float, ...], Field(max_length=4)] | None = None
    # Of ribs that do not stand on the q axis, positive where the rim's end leans away from it.
    radial_rib_tilt_deg: Annotated[float, Field(gt=-90.0, lt=90.0)] = 0.0
    fillet_mm: Positive = 0.5  # corners beside radial ribs
    arm_angle_deg: Annotated[float, Field(ge=0.0, lt=90.0)] | None = (
        None  # straight; default 90/pole_pairs
    )
    bend_radius_mm: Positive | None = None  # straight, vee; default the thickness
    magnet: BarrierMagnetDesign | None = None
    other_half: OtherHalfDesign | None = None  # default: the mirror image


class RotorDesign(OutlineKeys):
    """The rotor lamination: a disc with a bore, and the barriers of one pole."""

    q_axis_deg: float | None = None  # of a drawn rotor, in the drawing; found where not stated
    poles: Annotated[int, Field(ge=2, le=24)]
    gap_mm: Positive
    shaft_diameter_mm: Positive
    shaft_relative_permeability: Annotated[float, Field(ge=1.0)] = 1.0
    sheet_thickness_mm: Positive
    stacking_factor: Annotated[float, Field(gt=0.8, le=1.0)] = 0.97  # rotor and stator
    skew_steps: Annotated[int, Field(ge=1, le=12)] = 1  # equal parts of the stack
    # Of the continuous skew that the steps stand for, mechanical: each step is turned by the
    # angle over the number of steps against the one before.
    skew_angle_deg: NotNegative = 0.0
    barrier: Annotated[tuple[BarrierDesign, ...], Field(min_length=1, max_length=6)]
    # Of every second pole; without them all poles are alike.
    alternate_barrier: Annotated[tuple[BarrierDesign, ...], Field(max_length=6)] = ()
    notch: Annotated[tuple[NotchDesign, ...], Field(max_length=12)] = ()
    hole: Annotated[tuple[HoleDesign, ...], Field(max_length=12)] = ()
    keyway: KeywayDesign | None = None
    contour: ContourDesign | None = None
    fit: FitDesign | None = None  # of the shaft; without it the bore is free
    _outline: "RotorOutline | None" = PrivateAttr(default=None)

    @property
    def outline(self) -> "RotorOutline | None":
        """What was recognised in the drawing; there are no tables of barriers then."""
        return self._outline

    def drawn(self, outline: "RotorOutline") -> Self:
        """The same table with the poles of a drawing."""
        copy = self.model_copy(update={"barrier": ()})
        copy._outline = outline
        return copy


class SteelChoice(_Table):
    """Steel cards, as file names relative to the design file."""

    rotor_card: str
    stator_card: str


class MagnetChoice(_Table):
    """The magnet card, a file name relative to the design file, and what the magnets run at."""

    card: str
    temperature_c: Annotated[float, Field(ge=-60.0, le=250.0)]
    # At which they must bear the demagnetising current; default the same.
    demagnetising_temperature_c: Annotated[float, Field(ge=-60.0, le=250.0)] | None = None

    @property
    def worst_temperature_c(self) -> float:
        """Temperature of the demagnetisation check in C."""
        stated = self.demagnetising_temperature_c
        return self.temperature_c if stated is None else stated


class DutyDesign(_Table):
    """What the machine is run at. Currents are peak values of a phase's terminal current."""

    rated_current_a: Positive
    rated_speed_rpm: Positive
    maximum_speed_rpm: Positive
    overspeed_factor: Annotated[float, Field(ge=1.0, le=2.0)] = 1.2
    supply_voltage_v: Positive  # rms between lines, the most the supply gives
    maximum_current_a: Positive | None = None  # that the supply gives; default the rated
    demagnetising_current_a: Positive | None = None  # that magnets must bear; default the rated

    @property
    def most_current_a(self) -> float:
        """The most current that the supply gives, A peak."""
        stated = self.maximum_current_a
        return self.rated_current_a if stated is None else stated


class LimitsDesign(_Table):
    """What `passes` is judged by."""

    least_torque_nm: NotNegative
    most_ripple_percent: Positive
    least_saliency_ratio: Positive
    least_yield_margin: Positive


class MachineDesign(_Table):
    """One design file, validated."""

    name: str
    note: str = ""
    stator: StatorDesign
    winding: WindingDesign
    rotor: RotorDesign
    steel: SteelChoice
    duty: DutyDesign
    limits: LimitsDesign
    magnet: MagnetChoice | None = None  # needed where a barrier holds a magnet
    losses: LossesDesign = LossesDesign()
    hot: HotDesign | None = None  # without it all parts are as cold as the drawing
    tolerance: ToleranceDesign = ToleranceDesign()

    @property
    def pole_pairs(self) -> int:
        """Pole pairs of the rotor."""
        return self.rotor.poles // 2

    def _repr_html_(self) -> str:
        """The drawing of a pole and the main figures, as a notebook shows them."""
        from .notebook import design_html  # it draws, so it needs all that is above

        return design_html(self)


class Sourced(_Table):
    """A value of a steel card and where it is from."""

    value: Positive
    source: Annotated[str, Field(min_length=3)]


class MagnetisationCurve(_Table):
    """B-H points of a steel card, from low to high; (0, 0) is understood."""

    b_t: Annotated[tuple[Positive, ...], Field(min_length=3)]
    h_a_per_m: Annotated[tuple[Positive, ...], Field(min_length=3)]
    source: Annotated[str, Field(min_length=3)]


class SteelCard(_Table):
    """One steel card: magnetic and mechanical data, each with its source."""

    name: str
    note: str = ""
    density_kg_per_m3: Sourced
    youngs_modulus_gpa: Sourced
    poissons_ratio: Sourced
    yield_strength_mpa: Sourced
    tensile_strength_mpa: Sourced
    magnetisation: MagnetisationCurve
    loss: LossPoints | None = None  # needed for the iron loss
    expansion_um_per_m_k: Sourced | None = None  # needed where temperatures are stated
    hot: HotSteel | None = None  # without it strength and stiffness stay
    hardening: HardeningCurve | None = None  # perfectly plastic at the yield strength without
    fatigue: FatigueData | None = None  # needed for the life


class SourcedNumber(_Table):
    """A value of a card that may be negative, and where it is from."""

    value: float
    source: Annotated[str, Field(min_length=3)]


class MagnetCard(_Table):
    """One magnet card at 20 C: a straight demagnetisation curve down to its knee.

    The knee is the opposing field strength at which the straight part ends and the magnet begins
    to lose magnetisation for good. Coefficients are changes in percent of the value at 20 C.
    """

    name: str
    note: str = ""
    remanence_t: Sourced
    recoil_relative_permeability: Sourced
    remanence_coefficient_percent_per_k: SourcedNumber
    knee_field_ka_per_m: Sourced
    knee_coefficient_percent_per_k: SourcedNumber
    density_kg_per_m3: Sourced
