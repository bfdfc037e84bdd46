"""Which ribs move together, and that the drawn ribs follow the groups' widths."""

from pathlib import Path

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_design
from lamwright.geometry.rib_groups import members, rib_groups, rounded_up, with_least
from lamwright.geometry.section import rotor_cell

GALLERY = Path(__file__).parents[2] / "designs" / "gallery"
# Unlike halves, unlike poles, a taper, and several radial ribs.
STEMS = ("lift_27s6p", "mill_48s4p", "hoist_60s10p", "blower_36s2p")


@pytest.mark.parametrize("stem", STEMS)
def test_every_rib_is_in_one_group(stem):
    """A partition, and none is empty."""
    design = read_design(GALLERY / f"{stem}.toml")
    ribs = rotor_cell(cross_section(design)).ribs
    groups = [members(design, group, ribs) for group in rib_groups(design)]
    assert all(groups)
    assert sorted(k for group in groups for k in group) == list(range(len(ribs)))


@pytest.mark.parametrize("stem", STEMS)
def test_a_group_moves_its_ribs_and_no_others(stem):
    """Two percent wider: its drawn ribs follow within the taper, all others stay to 1 nm."""
    design = read_design(GALLERY / f"{stem}.toml")
    before = rotor_cell(cross_section(design)).ribs
    for group in rib_groups(design):
        moved = with_least(design, group, 1.02 * group.least_mm(design))
        after = rotor_cell(cross_section(moved)).ribs
        own = set(members(design, group, before))
        for k, (old, new) in enumerate(zip(before, after, strict=True)):
            if k in own:
                assert new.width / old.width == pytest.approx(1.02, abs=0.003)
            else:
                assert new.width == pytest.approx(old.width, abs=1e-9)


def test_widths_are_whole_micrometres():
    """Rounded up, and what is whole already stays."""
    assert rounded_up(0.6) == 0.6
    assert rounded_up(0.6000001) == 0.601
    assert rounded_up(1.2345) == 1.235
