"""Fatigue data of a steel card that cannot be are refused in one line."""

from pathlib import Path

import pytest

from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.errors import DesignError

STEEL = Path(__file__).parents[2] / "designs" / "steel"
CARD = (STEEL / "demo_050.toml").read_text()


def refused(tmp_path, old, new):
    """The one line that the demo's card with one change is refused with, and the row it names."""
    assert CARD.count(old) == 1
    path = tmp_path / "card.toml"
    path.write_text(CARD.replace(old, new))
    with pytest.raises(DesignError) as raised:
        read_steel_card(path)
    (line,) = str(raised.value).splitlines()
    row = int(line.rsplit("card.toml:", 1)[1].split(":")[0])
    return line, path.read_text().splitlines()[row - 1]


def test_one_demo_card_has_fatigue_data_and_one_has_not():
    """Both cases are shipped: a life, and a life that is not given."""
    data = read_steel_card(STEEL / "demo_050.toml").fatigue
    assert data is not None
    assert data.method == "smith-watson-topper"
    assert "invented" in data.source
    assert read_steel_card(STEEL / "demo_035.toml").fatigue is None


@pytest.mark.parametrize(
    ("old", "new", "fault"),
    [
        ("_mpa = 850.0", "_mpa = 0.85", "coefficient_mpa = 0.85: not a line of a steel with 500"),
        ("exponent = -0.09", "exponent = 0.09", "fatigue.strength_exponent = 0.09: "),
        ("edge_factor = 0.75", "edge_factor = 75.0", "fatigue.cut_edge_factor = 75"),
        ("log10_life = 0.25", "log10_life = 0.0", "fatigue.scatter_log10_life = 0"),
        ("cyclic_exponent = 0.12\n", "", "cyclic_strength_mpa = 800: half of a cyclic curve"),
        ("cyclic_strength_mpa = 800.0\n", "", "cyclic_exponent = 0.12: half of a cyclic curve"),
        ("strength_mpa = 800.0", "strength_mpa = 300.0", "mpa = 300: below the yield strength"),
        ("smith-watson-topper", "smith", 'fatigue.method = "smith": not one of the choices'),
        ("tested_to_cycles = 1e7", "tested_to_cycles = 7.0", "fatigue.tested_to_cycles = 7"),
    ],
)
def test_impossible_data_are_refused(old, new, fault, tmp_path):
    """Place, key, value, fault and remedy on one line; the line is that of the key."""
    line, row = refused(tmp_path, old, new)
    assert fault in line
    assert "accepted" in line
    assert line.split("fatigue.")[1].split(" ")[0] == row.split(" ")[0]


def test_scatter_must_be_stated(tmp_path):
    """No life without its scatter: the card is refused, not completed."""
    line, _ = refused(tmp_path, "scatter_log10_life = 0.25\n", "")
    assert "fatigue.scatter_log10_life" in line
