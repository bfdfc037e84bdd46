"""Loss points of a steel card and strands of a winding that cannot be are refused in one line."""

from pathlib import Path

import pytest

from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.design_loss import StrandDesign
from lamwright.geometry.errors import DesignError
from lamwright.geometry.loss_checks import strand_area_mm2

CARD = (Path(__file__).parents[2] / "designs" / "steel" / "demo_050.toml").read_text()


@pytest.mark.parametrize(
    ("old", "new", "fault"),
    [
        ("0.0273, 0.0938", "0.0938", "loss.loss_w_per_kg = 65: number of points, but"),
        ("0.0273, 0.0938", "0.0273, 0.0273", "loss.loss_w_per_kg[2] = 0.0273: not above 0.0273"),
        ("6.67, 22.5", "1.67, 22.5", "loss.loss_w_per_kg[62] = 1.67: not above 2.14 at a freq"),
        ("2000.0, 2000.0,", "2000.0, 2e6,", "loss.frequency_hz[63] = 2e+06: beyond any sheet"),
        ("loss_w_per_kg = [\n    0.0273", "loss_w_per_kg = [\n    -1.0", "too small; accepted"),
        ("resistivity_uohm_m = 0.45", "resistivity_uohm_m = 45.0", "too large; accepted"),
    ],
)
def test_impossible_loss_points_are_refused(old, new, fault, tmp_path):
    """Place, key, value, fault and remedy on one line."""
    assert CARD.count(old) >= 1
    path = tmp_path / "card.toml"
    path.write_text(CARD.replace(old, new, 1))
    with pytest.raises(DesignError) as raised:
        read_steel_card(path)
    lines = str(raised.value).splitlines()
    assert any(fault in line for line in lines)
    assert all("accepted" in line for line in lines)


def test_one_frequency_is_refused(tmp_path):
    """Hysteresis and eddy currents cannot be told apart from it."""
    head = CARD[: CARD.index("[loss]")]
    table = "[loss]\nfrequency_hz = [50, 50, 50, 50]\nb_t = [0.5, 1, 1.3, 1.5]\n"
    table += "loss_w_per_kg = [0.5, 1.6, 2.6, 3.5]\nsheet_thickness_mm = 0.5\n"
    table += "resistivity_uohm_m = 0.45\nsource = 'test'\n"
    path = tmp_path / "card.toml"
    path.write_text(head + table)
    with pytest.raises(DesignError, match="one frequency cannot part hysteresis from eddy"):
        read_steel_card(path)


@pytest.mark.parametrize(
    ("keys", "area"),
    [
        ({"round_diameter_mm": 2.0}, 3.141592653589793),
        ({"width_mm": 5.0, "height_mm": 2.0, "layers": 4}, 10.0),
        ({"width_mm": 5.0, "height_mm": 2.0}, None),
        ({"round_diameter_mm": 2.0, "width_mm": 5.0}, None),
        ({}, None),
    ],
)
def test_area_of_a_strand(keys, area):
    """Round, rectangular, or not fully stated."""
    found = strand_area_mm2(StrandDesign(**keys))
    assert found is None if area is None else found == pytest.approx(area, rel=1e-12)
