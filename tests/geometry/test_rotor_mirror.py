"""Which rotors mirror in their q axis: those drawn so, whatever their outlines are cut into."""

from pathlib import Path

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_design
from lamwright.geometry.rotor_mirror import is_mirrored

DESIGNS = Path(__file__).parents[2] / "designs"


@pytest.mark.parametrize(
    ("name", "mirrored"),
    [
        ("demo_24s4p_arc", True),
        ("demo_36s4p_magnet", True),
        ("gallery/mill_48s4p", True),  # unlike neighbours, each a mirror image of itself
        ("gallery/servo_12s10p", True),  # a sector of five poles
        ("gallery/lift_27s6p", False),  # unlike halves
        ("gallery/compressor_24s4p", False),  # a keyway in one pole, off its q axis
    ],
)
def test_rotors_as_drawn(name, mirrored):
    """By the design: no other_half and nothing off the q axis alone."""
    assert is_mirrored(cross_section(read_design(DESIGNS / f"{name}.toml"))) is mirrored


def test_a_tenth_of_a_millimetre_is_seen():
    """One half's end moved by 0.1 degrees, 0.07 mm at the rim."""
    design = read_design(DESIGNS / "gallery/lift_27s6p.toml")
    barriers = tuple(
        barrier.model_copy(update={"other_half": None}) for barrier in design.rotor.barrier
    )

    def with_first(barrier):
        rotor = design.rotor.model_copy(update={"barrier": (barrier, *barriers[1:])})
        return cross_section(design.model_copy(update={"rotor": rotor}))

    assert is_mirrored(with_first(barriers[0]))
    half = next(b.other_half for b in design.rotor.barrier if b.other_half is not None)
    angle = barriers[0].end_angle_deg + 0.1
    moved = half.model_copy(
        update={
            **{name: None for name in type(half).model_fields},
            "end_angle_deg": angle,
        }
    )
    assert not is_mirrored(with_first(barriers[0].model_copy(update={"other_half": moved})))
