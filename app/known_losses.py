"""The losses of a mapped machine by currents and speed, and what is not known of them."""

from functools import partial

import numpy as np

from lamwright.postprocess.ac_copper import SlotStrands, closed_factor, slot_strands
from lamwright.postprocess.efficiency import KnownLosses
from lamwright.postprocess.iron_loss_map import iron_loss
from lamwright.postprocess.windage import Turning, bearing_loss, windage_loss
from lamwright.solver.types import FloatArray

from .mapped import Mapped


def known_losses(mapped: Mapped) -> KnownLosses:
    """What is known of the machine's losses beside the DC copper's.

    AC copper by closed form, in the slots' part of the copper; windage always, the friction of
    bearings where its torque is stated.
    """
    design, missing = mapped.machine.design, []
    iron = None
    if isinstance(mapped.losses, str):
        missing.append("iron loss of stator and rotor")
    else:
        iron = partial(iron_loss, mapped.losses)
    strands = slot_strands(design, mapped.model, mapped.section.rotor_period)
    factor = None
    if strands is None:
        missing.append("AC copper loss")
    else:
        stack, end = design.stator.stack_length_mm, design.winding.end_turn_length_mm
        factor = partial(_whole_factor, strands, stack / (stack + end))
    if design.losses.bearing_friction_nm is None:
        missing.append("friction of bearings")
    friction = partial(_friction, turning_of(mapped), design.losses.bearing_friction_nm or 0.0)
    return KnownLosses(iron, factor, friction, tuple(missing))


def turning_of(mapped: Mapped) -> Turning:
    """The rotor in its gap."""
    section = mapped.section
    return Turning(
        radius=section.rotor_radius,
        gap=section.stator_bore_radius - section.rotor_radius,
        length=section.stack_length,
        shaft_radius=section.shaft_radius,
        air_temperature_c=mapped.machine.design.losses.air_temperature_c,
    )


def _whole_factor(strands: SlotStrands, share: float, omega_e: FloatArray) -> FloatArray:
    """AC over DC loss of the whole winding, of whose length a share lies in slots."""
    return 1.0 + share * (closed_factor(strands, omega_e) - 1.0)


def _friction(turning: Turning, torque: float, speed: FloatArray) -> FloatArray:
    """Windage and bearings in W at mechanical speeds in rad/s, any shape."""
    flat = np.ravel(speed)
    loss = windage_loss(turning, flat) + bearing_loss(torque, flat)
    return loss.reshape(np.shape(speed))
