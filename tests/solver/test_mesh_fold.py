"""Folding a pole: how many equal wedges, and that points and areas come back."""

import cmath
import math
from dataclasses import replace

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area, circle, reversed_path
from lamwright.geometry.design_file import read_design
from lamwright.geometry.section import Region
from lamwright.solver.mesh_fold import fold, folded_points
from tests import machine_m24
from tests.outlines import DESIGNS

POLE = math.pi / 2.0  # of both machines, rad


def region_area(region: Region) -> float:
    return area(region.outer) + sum(area(hole) for hole in region.holes)


def test_stator_folds_to_half_a_slot_pitch():
    """Six equal symmetric slots a pole: twelve wedges, each slot's copper in two of them."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    fan = fold(section.stator, POLE, (12, 2))
    assert fan.copies == 12
    copper = next(k for k, region in enumerate(fan.regions) if region.material == "copper")
    names = [section.stator[k].name for k in fan.owner[:, copper]]
    assert names == [f"slot_{s}_layer_0" for s in range(6) for _ in range(2)]


@pytest.mark.parametrize("rotor", [machine_m24.r0, machine_m24.r1, machine_m24.r2, machine_m24.b1])
def test_pieces_tile_the_regions(rotor):
    """Areas of a region's pieces over all copies add up to the region's, to rounding."""
    regions = rotor().rotor
    fan = fold(regions, POLE, (2,))
    assert fan.copies == 2
    pieces = np.array([region_area(piece) for piece in fan.regions])
    summed = np.zeros(len(regions))
    for owner in fan.owner:
        np.add.at(summed, owner, pieces)
    assert summed == pytest.approx([region_area(region) for region in regions], rel=1e-12)


def test_points_fold_onto_the_first_wedge():
    """A point of wedge 0, carried to each copy by turning or mirroring, comes back to itself."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    fan = fold(section.stator, POLE, (12, 2))
    point = 0.05 * cmath.exp(0.3j * fan.angle)
    for j in range(fan.copies):
        there = point * cmath.exp(1j * j * fan.angle)
        if j % 2:
            there = point.conjugate() * cmath.exp(1j * (j + 1) * fan.angle)
        assert abs(folded_points(fan, np.array([there]))[0] - point) < 1e-15


def test_lopsided_rotor_is_not_folded():
    """One vent beside the pole's middle: the two halves differ."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    vent = circle(20e-3 * cmath.exp(0.15j), 1.5e-3)
    iron = section.rotor[0]
    lopsided = replace(iron, holes=(*iron.holes, reversed_path(vent)))
    regions = (lopsided, Region("vent", "air", vent), *section.rotor[1:])
    assert fold(regions, POLE, (2,)).copies == 1


def test_unlike_materials_are_not_folded():
    """The same outline with other stuff in one slot is another machine."""
    section = cross_section(read_design(DESIGNS / "demo_24s4p_arc.toml"))
    changed = tuple(
        replace(region, material="air") if region.name == "slot_0_layer_0" else region
        for region in section.stator
    )
    assert fold(changed, POLE, (12, 2)).copies == 1
