"""The frame of a sector's picture: where it is broken off, and that names point into it."""

import cmath
import math

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.postprocess.figures_section import section_callouts
from lamwright.postprocess.figures_sector import break_radius, pole_silhouette
from lamwright.postprocess.figures_style import upright
from tests.gallery_pictures import GALLERY

MM = 1e3  # mm per m


def section_of(name):
    return cross_section(read_machine(GALLERY / f"{name}.toml").design)


@pytest.mark.parametrize("name", ["fan_12s4p", "washer_12s8p", "servo_12s10p"])
def test_names_point_into_the_sector(name):
    """With three slots in the sector, names one slot beside the named one still lie inside it."""
    section = section_of(name)
    half = 0.5 * section.sector_angle
    for callout in section_callouts(section, upright(section)):
        aside = abs(cmath.phase(callout.anchor / 1j))
        assert aside < half + 1e-9, callout
        assert abs(callout.anchor) < MM * section.stator_outer_radius


def test_only_a_large_shaft_is_broken_off():
    """A quarter of the height from bore to outside is shown of it; 190 - 175 / 4 mm = 146.25 mm."""
    assert break_radius(section_of("direct_144s16p")) == pytest.approx(0.14625, rel=1e-12)
    assert break_radius(section_of("fan_12s4p")) == 0.0  # a small shaft
    assert break_radius(section_of("servo_12s10p")) == 0.0  # half a circle gains nothing


def test_the_silhouette_holds_sector_and_letters():
    """The broken sector's lowest point is its corner; letters of several poles reach beyond it."""
    section = section_of("direct_144s16p")
    inner, half = break_radius(section), 0.5 * section.sector_angle
    low = pole_silhouette(section, inner).imag.min()
    corner = MM * inner * math.cos(half)
    assert 0.8 * corner < low < corner
    wide = section_of("servo_12s10p")
    assert abs(pole_silhouette(wide).real).max() > 1.2 * MM * wide.stator_outer_radius
