"""Iron loss over a flux map: what of each point's fields is kept for it, or why it is not given."""

from functools import partial

from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.coenergy_surface import CoenergySurface
from lamwright.postprocess.flux_map import FluxMap
from lamwright.postprocess.iron_loss import IronLaws, iron_laws, loss_coefficients
from lamwright.postprocess.iron_loss_map import IronLossMap, iron_loss_map
from lamwright.postprocess.loss_surface import loss_surface
from lamwright.solver.field import MagneticModel
from lamwright.solver.types import FloatArray

from .map_point import Harvest


def laws_of(machine: Machine, section: CrossSection, model: MagneticModel) -> IronLaws | str:
    """What the iron loss is computed with, or why it is not given."""
    cards = dict(rotor=machine.rotor_steel, stator=machine.stator_steel)
    lacking = [part for part, card in cards.items() if card.loss is None]
    if lacking:
        names = " and ".join(dict.fromkeys(cards[part].name for part in lacking))
        return f"iron loss: the steel card has no table loss: {names}"
    try:
        return iron_laws(
            model,
            loss_surface(machine.rotor_steel),
            loss_surface(machine.stator_steel),
            slots=section.slots,
            rotor_period=section.rotor_period,
            stacking_factor=machine.design.rotor.stacking_factor,
        )
    except LamwrightError as error:
        return f"iron loss: {error}"


def harvest_of(laws: IronLaws | str) -> Harvest | None:
    """What a worker keeps of the fields of a point."""
    return None if isinstance(laws, str) else partial(loss_coefficients, laws=laws)


def loss_map_of(
    laws: IronLaws | str, flux_map: FluxMap, surface: CoenergySurface, harvest: FloatArray
) -> IronLossMap | str:
    """The loss over the map's currents, or why it is not given."""
    if isinstance(laws, str):
        return laws
    mirrored = (surface.even_d, surface.even_q)
    return iron_loss_map(flux_map.i_d, flux_map.i_q, harvest, laws, mirrored)
