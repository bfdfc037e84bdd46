"""A steel card over the temperature, and the temperatures that it refuses."""

import re
from pathlib import Path

import pytest

from lamwright.geometry.design_file import read_machine, read_steel_card
from lamwright.geometry.errors import DesignError
from lamwright.geometry.hot_steel import steel_at
from tests.broken_designs import DEMO, DESIGNS

# The card without its own table over the temperature, whose last line is its source.
CARD = re.sub(
    r"\[hot\]\n.*?source = [^\n]*\n",
    "",
    (DESIGNS / "steel" / "demo_050.toml").read_text(),
    flags=re.S,
)
HOT = """
[hot]
temperature_c = [20.0, 120.0, 220.0]
yield_strength_mpa = [380.0, 340.0, 280.0]
youngs_modulus_gpa = [210.0, 204.0, 196.0]
source = "invented"
"""


def written(folder: Path, card: str, hot: str = "") -> Path:
    (folder / "card.toml").write_text(card)
    design = folder / "demo.toml"
    design.write_text(DEMO.replace("steel/demo_050.toml", "card.toml") + hot)
    return design


def test_values_lie_straight_between_the_points(tmp_path):
    """70 C is half way between 20 and 120, 145 C a quarter between 120 and 220; exact."""
    written(tmp_path, CARD + HOT)
    card = read_steel_card(tmp_path / "card.toml")
    for celsius, strength, modulus in (
        (20.0, 380.0, 210.0),
        (70.0, 360.0, 207.0),
        (145.0, 325, 202),
    ):
        at = steel_at(card, celsius)
        assert at.yield_strength_mpa.value == pytest.approx(strength, rel=1e-12)
        assert at.youngs_modulus_gpa.value == pytest.approx(modulus, rel=1e-12)
        assert f"at {celsius:g} C" in at.yield_strength_mpa.source
        assert at.tensile_strength_mpa.value == pytest.approx(500.0 * strength / 380.0)


def test_a_card_without_a_table_stays():
    """Nothing is guessed."""
    card = read_steel_card(DESIGNS / "steel" / "demo_050.toml").model_copy(update={"hot": None})
    assert steel_at(card, 150.0) is card


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ("[20.0, 120.0, 220.0]", "[20.0, 120.0, 120.0]", "hot.temperature_c[3] = 120: not above"),
        ("[210.0, 204.0, 196.0]", "[210.0, 204.0]", "hot.youngs_modulus_gpa = 2: number of points"),
    ],
)
def test_a_table_that_is_none_is_refused(tmp_path, old, new, told):
    """One line, at its place."""
    written(tmp_path, CARD + HOT.replace(old, new))
    with pytest.raises(DesignError) as error:
        read_steel_card(tmp_path / "card.toml")
    assert told in str(error.value)
    assert len(str(error.value).splitlines()) == 1


@pytest.mark.parametrize("hot", ["rotor_temperature_c = 230.0", "rotor_temperature_c = -30.0"])
def test_a_rotor_beyond_its_card_is_refused(tmp_path, hot):
    """The table ends at 20 and 220 C."""
    path = written(tmp_path, CARD + HOT, f"\n[hot]\n{hot}\n")
    with pytest.raises(
        DesignError, match=r"hot.rotor_temperature_c = .*accepted temperatures from 20 to 220"
    ):
        read_machine(path)
    read_machine(written(tmp_path, CARD + HOT, "\n[hot]\nrotor_temperature_c = 120.0\n"))
