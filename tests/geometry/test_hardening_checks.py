"""Hardening curves of a steel card that cannot be are refused in one line."""

from pathlib import Path

import pytest

from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.errors import DesignError

CARD = (Path(__file__).parents[2] / "designs" / "steel" / "demo_050.toml").read_text()
GOOD = """
[hardening]
plastic_strain = [0.0, 0.02, 0.1]
true_stress_mpa = [380.0, 420.0, 500.0]
source = "invented for this test"
"""


def written(folder, text):
    """The card with a hardening curve."""
    path = folder / "card.toml"
    path.write_text(CARD + text)
    return path


def test_a_curve_from_yield_on_is_read(tmp_path):
    """What is written is what is read; a card without has none."""
    curve = read_steel_card(written(tmp_path, GOOD)).hardening
    assert curve is not None
    assert curve.plastic_strain == (0.0, 0.02, 0.1)
    assert curve.true_stress_mpa == (380.0, 420.0, 500.0)
    assert read_steel_card(written(tmp_path, "")).hardening is None


@pytest.mark.parametrize(
    ("old", "new", "fault"),
    [
        ("0.02, 0.1", "0.1", "hardening.true_stress_mpa = 3: number of points, but"),
        ("[0.0, 0.02", "[0.01, 0.02", "hardening.plastic_strain[1] = 0.01: the curve does not"),
        ("0.1]", "10.0]", "hardening.plastic_strain[3] = 10: beyond any sheet steel"),
        ("[380.0", "[350.0", "hardening.true_stress_mpa[1] = 350: not the yield strength (380)"),
        ("500.0]", "400.0]", "hardening.true_stress_mpa[3] = 400: below the value before it (420)"),
        ("0.1]", "0.02]", "hardening.plastic_strain[3] = 0.02: not above the value before it"),
        ("0.02,", "-0.02,", "accepted"),
    ],
)
def test_impossible_curves_are_refused(old, new, fault, tmp_path):
    """Place, key, value, fault and remedy on one line; the line is that of the key."""
    assert old in GOOD
    path = written(tmp_path, GOOD.replace(old, new, 1))
    with pytest.raises(DesignError) as raised:
        read_steel_card(path)
    lines = str(raised.value).splitlines()
    assert len(lines) == 1
    assert fault in lines[0]
    assert "accepted" in lines[0]
    key = "true_stress_mpa" if "true_stress" in fault else "plastic_strain"
    row = int(lines[0].rsplit("card.toml:", 1)[1].split(":")[0])
    assert path.read_text().splitlines()[row - 1].startswith(key)
