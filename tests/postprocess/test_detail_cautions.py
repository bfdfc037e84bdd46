"""Cautions about rivets and keys: there where they are, with a load that a hand can check."""

import math
from pathlib import Path

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_details import HoleDesign, KeywayDesign
from lamwright.geometry.design_file import read_machine
from lamwright.postprocess.detail_cautions import detail_cautions, rivet_pressure

MACHINE = read_machine(Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml")


def section_of(**details):
    rotor = MACHINE.design.rotor.model_copy(update=details)
    return cross_section(MACHINE.design.model_copy(update={"rotor": rotor}))


@pytest.mark.parametrize("angle_deg", [45.0, 28.0])
def test_pressure_of_a_round_rivet(angle_deg):
    """By hand: rho pi/4 d r omega^2, whole or in halves; rounding."""
    hole = HoleDesign(place_radius_mm=19.0, angle_deg=angle_deg, diameter_mm=3.0, material="rivet")
    wanted = 7800.0 * 0.25 * math.pi * 3e-3 * 19e-3 * 700.0**2
    found = [r for r in section_of(hole=(hole,)).rotor if r.material == "rivet"]
    assert len(found) == 2
    for rivet in found:
        assert rivet_pressure(rivet, 7800.0, 700.0) == pytest.approx(wanted, rel=1e-12)


def test_there_only_where_there_is_something_to_say():
    """Nothing for empty holes and grooves; one line each for rivets and keys."""
    hole = HoleDesign(place_radius_mm=25.0, angle_deg=45.0, diameter_mm=4.0)
    rivet = hole.model_copy(update={"material": "rivet"})
    key = KeywayDesign(count=4, width_mm=4.0, depth_mm=2.0)
    empty = key.model_copy(update={"key": "air"})
    card = MACHINE.rotor_steel
    assert detail_cautions(section_of(hole=(hole,), keyway=empty), card, 700.0) == ()
    both = detail_cautions(section_of(hole=(rivet,), keyway=key), card, 700.0)
    assert ["rivets" in line for line in both] == [True, False]
    assert "0.29 MPa" in both[0]  # 7650 pi/4 0.004 0.025 700^2 Pa: 0.294 MPa by hand
