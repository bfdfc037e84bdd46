"""Iron loss over a map: named as not given where a steel card has no measured points."""

from dataclasses import replace
from pathlib import Path

import numpy as np
from flux_laws import linear_map
from shipped import shipped_model

from lamwright.app.lamination import section_of
from lamwright.app.map_losses import harvest_of, laws_of, loss_map_of
from lamwright.app.point import read_machine
from lamwright.postprocess.coenergy_surface import coenergy_surface

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"


def test_a_steel_card_without_losses_is_named():
    """No table loss in one card: one line with the card's name, no harvest, no map of losses."""
    machine = read_machine(DEMO)
    bare = machine.rotor_steel.model_copy(update={"loss": None})
    machine = replace(machine, rotor_steel=bare)
    laws = laws_of(machine, section_of(machine), shipped_model("demo_24s4p_arc", 2.0))
    assert laws == f"iron loss: the steel card has no table loss: {bare.name}"
    assert harvest_of(laws) is None
    grid = np.linspace(0.0, 5.0, 4)
    flux_map = linear_map(2, 0.05, 0.01, grid, grid)
    assert loss_map_of(laws, flux_map, coenergy_surface(flux_map), np.zeros((4, 4, 0))) == laws


def test_cards_with_losses_give_what_is_kept_of_each_point():
    """The shipped cards have points: the harvest is a call of the model and its fields."""
    machine = read_machine(DEMO)
    laws = laws_of(machine, section_of(machine), shipped_model("demo_24s4p_arc", 2.0))
    assert not isinstance(laws, str)
    assert harvest_of(laws) is not None
