"""Iron loss of a machine's flux map: what is computed at each point, and the map of it.

laws = iron_laws_of(machine, section, model)   # a line of text where it is not given
harvest = partial(loss_coefficients, laws=laws)  # for each point's fields
losses = iron_loss_map(i_d, i_q, harvested, laws, mirrored)
"""

from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.iron_loss import IronLaws, iron_laws
from lamwright.postprocess.loss_surface import loss_surface
from lamwright.solver.model import MagneticModel


def iron_laws_of(machine: Machine, section: CrossSection, model: MagneticModel) -> IronLaws | str:
    """Loss surfaces and masses of a machine, or one line that says why there is no iron loss."""
    cards = (("rotor", machine.rotor_steel), ("stator", machine.stator_steel))
    for part, card in cards:
        if card.loss is None:
            return f"iron loss: the {part}'s steel card {card.name!r} holds no [loss] points"
    rotor = loss_surface(machine.rotor_steel)
    same = machine.stator_steel == machine.rotor_steel
    try:
        return iron_laws(
            model,
            rotor,
            rotor if same else loss_surface(machine.stator_steel),
            slots=section.slots,
            rotor_period=section.rotor_period,
            stacking_factor=machine.design.rotor.stacking_factor,
        )
    except LamwrightError as error:
        return f"iron loss: {error}"
