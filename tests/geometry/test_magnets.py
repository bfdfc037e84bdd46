"""Magnet blocks: closed forms of their places, exact tiling, and what is refused."""

import cmath
import itertools
import math
from pathlib import Path as FilePath

import numpy as np
import pytest

from lamwright.geometry.checks import check_design
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.design import BarrierMagnetDesign, MachineDesign
from lamwright.geometry.design_file import read_design, read_machine
from lamwright.geometry.distances import distance
from lamwright.geometry.errors import DesignError
from lamwright.geometry.magnet_checks import magnet_faults
from lamwright.geometry.rotor import rotor_regions
from lamwright.geometry.section import Region
from tests.random_designs import random_design

DESIGNS = FilePath(__file__).parents[2] / "designs"
MM = 1e-3  # m


def with_magnet(name: str, magnets: dict[int, BarrierMagnetDesign]) -> MachineDesign:
    """A shipped design with magnets in some of its barriers (from 1)."""
    design = read_design(DESIGNS / f"{name}.toml")
    barriers = [
        barrier.model_copy(update={"magnet": magnets.get(k)})
        for k, barrier in enumerate(design.rotor.barrier, start=1)
    ]
    rotor = design.rotor.model_copy(update={"barrier": tuple(barriers)})
    magnet = read_design(DESIGNS / "demo_36s4p_magnet.toml").magnet
    return design.model_copy(update={"rotor": rotor, "magnet": magnet})


def magnets_of(design: MachineDesign) -> dict[str, Region]:
    """The magnets of a design's pole, turned back into the q axis's frame, by name."""
    turn = cmath.exp(-0.5j * math.pi / design.pole_pairs)
    found = {}
    for region in rotor_regions(design)[0]:
        if region.material == "magnet":
            corners = [edge.start * turn for edge in region.outer.edges]
            assert all(edge.is_line for edge in region.outer.edges)
            found[region.name] = (corners, region.magnetisation * turn)
    return found


def test_block_in_a_straight_bottom() -> None:
    """Its thickness is the barrier's less both clearances, on the q axis, inward; exact (1e-12 m).

    Barrier 1 of the demo: rotor radius 59.5 mm or so less depth 5.5 mm, 3.6 mm thick.
    """
    magnet = BarrierMagnetDesign(width_mm=10.0, clearance_mm=0.15)
    design = with_magnet("demo_36s4p_straight", {1: magnet})
    rim = 0.5 * design.stator.bore_diameter_mm - design.rotor.gap_mm
    outer = rim - design.rotor.barrier[0].depth_mm - 0.15
    inner = outer + 0.30 - design.rotor.barrier[0].thickness_mm
    corners, along = magnets_of(design)["magnet_1"]
    expected = [complex(inner, -5), complex(outer, -5), complex(outer, 5), complex(inner, 5)]
    assert [abs(c / MM - e) for c, e in zip(corners, expected, strict=True)] == pytest.approx(
        [0.0] * 4, abs=1e-9
    )
    assert along == pytest.approx(-1.0)


@pytest.mark.parametrize("offset", [0.0, 6.0])
def test_block_in_an_arc_touches_both_parallels(offset: float) -> None:
    """The rim's face touches the arc's parallel in its middle, the shaft's face in its corners.

    Walls of radii R -+ T/2 about a common centre (derived): the faces lie R - T/2 + c and
    sqrt((R + T/2 - c)^2 - (w/2)^2) from the centre, on the ray through the block's middle.
    """
    width, clearance = 9.0, 0.2
    magnet = BarrierMagnetDesign(width_mm=width, clearance_mm=clearance, offset_mm=offset)
    design = with_magnet("demo_24s4p_arc", {3: magnet})
    own = magnets_of(design)
    corners, along = own["magnet_3" if offset == 0.0 else "magnet_3_b"]
    barrier = design.rotor.barrier[2]
    rim = 0.5 * design.stator.bore_diameter_mm - design.rotor.gap_mm
    bottom = rim - barrier.depth_mm - 0.5 * barrier.thickness_mm
    cap = cmath.rect(
        rim - barrier.tangential_rib_mm - 0.5 * barrier.thickness_mm,
        math.radians(barrier.end_angle_deg),
    )
    centre = 0.5 * (abs(cap) ** 2 - bottom**2) / (cap.real - bottom)
    radius = centre - bottom
    rim_face = radius - 0.5 * barrier.thickness_mm + clearance
    shaft_face = math.hypot(radius + 0.5 * barrier.thickness_mm - clearance, 0.0)
    shaft_face = math.sqrt(shaft_face**2 - (0.5 * width) ** 2)
    assert abs(corners[1] - corners[0]) / MM == pytest.approx(shaft_face - rim_face, abs=1e-9)
    ray = 0.5 * (corners[1] + corners[2]) / MM - centre  # middle of the rim's face
    assert abs(ray) == pytest.approx(rim_face, abs=1e-9)
    assert ray / abs(ray) == pytest.approx(along, abs=1e-12)  # inward: along the ray from the rim
    assert (sum(corners) / 4.0 / MM).imag == pytest.approx(offset, abs=0.02 * radius)


def test_polarity_turns_the_magnetisation() -> None:
    """Outward is the negative of inward; a pair is its own mirror image (1e-12)."""
    for polarity, sign in (("inward", -1.0), ("outward", 1.0)):
        magnet = BarrierMagnetDesign(width_mm=8.0, offset_mm=8.0, polarity=polarity)
        own = magnets_of(with_magnet("demo_24s4p_arc", {3: magnet}))
        (lower, along_a), (upper, along_b) = own["magnet_3_a"], own["magnet_3_b"]
        assert along_b.real * sign > 0.9
        assert along_a == pytest.approx(along_b.conjugate(), abs=1e-12)
        gaps = [min(abs(c.conjugate() - d) for d in upper) for c in lower]
        assert max(gaps) < 1e-12


def test_regions_still_tile_the_sector() -> None:
    """Cavities are holed by their magnets: all areas sum to the circular sector's, 1e-12."""
    design = read_design(DESIGNS / "demo_36s4p_magnet.toml")
    section = cross_section(design)
    total = sum(area(r.outer) + sum(map(area, r.holes)) for r in section.rotor)
    sector = 0.5 * section.circle_radius**2 * math.pi / section.pole_pairs
    assert total == pytest.approx(sector, rel=1e-12)
    assert sum(r.material == "magnet" for r in section.rotor) == 5


def test_every_magnet_keeps_its_clearance() -> None:
    """The nearest distance to the walls is the stated 0.1 mm, to a nanometre."""
    section = cross_section(read_design(DESIGNS / "demo_36s4p_magnet.toml"))
    for magnet in (r for r in section.rotor if r.material == "magnet"):
        start = magnet.outer.edges[0].start
        (host,) = [
            r
            for r in section.rotor
            if any(edge.start == start for hole in r.holes for edge in hole.edges)
            and r.material == "air"
        ]
        assert distance(magnet.outer.edges, host.outer.edges) == pytest.approx(0.1e-3, abs=1e-9)


@pytest.mark.parametrize(
    ("barrier", "magnet", "code"),
    [
        (1, BarrierMagnetDesign(width_mm=60.0), "magnet_fit"),
        (1, BarrierMagnetDesign(width_mm=10.0, thickness_mm=3.5), "magnet_fit"),
        (1, BarrierMagnetDesign(width_mm=10.0, clearance_mm=1.6), "magnet_thin"),
        (1, BarrierMagnetDesign(width_mm=10.0, clearance_mm=2.0), "magnet_place"),
        (1, BarrierMagnetDesign(width_mm=6.0, offset_mm=3.0), "magnets_close"),
        (2, BarrierMagnetDesign(width_mm=6.0), "magnet_place"),  # a radial rib stands there
    ],
)
def test_what_does_not_fit_is_refused(barrier: int, magnet: BarrierMagnetDesign, code: str) -> None:
    """One finding with its code, and a range that mends it: taken, the design is sound."""
    design = with_magnet("demo_36s4p_straight", {barrier: magnet})
    (finding,) = check_design(design)
    assert finding.code == code
    assert finding.key.startswith(f"rotor.barrier[{barrier}].magnet.")
    assert finding.remedy.startswith("accepted")


def test_range_of_the_width_is_that_of_the_bottom() -> None:
    """The widest block of the demo's first barrier is told to 0.01 mm: accepted, and no wider."""
    design = with_magnet("demo_36s4p_straight", {1: BarrierMagnetDesign(width_mm=60.0)})
    (finding,) = check_design(design)
    widest = float(finding.remedy.split()[-1])
    for width, count in ((widest, 0), (widest + 0.02, 1)):
        magnet = BarrierMagnetDesign(width_mm=width)
        assert len(check_design(with_magnet("demo_36s4p_straight", {1: magnet}))) == count


CARD = 'card = "magnet/demo_ferrite.toml"\n'


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        (CARD, 'card = "magnet/demo_ferite.toml"\n', 'did you mean "magnet/demo_ferrite.toml"?'),
        ("temperature_c = 80.0", "temperature_c = 300.0", "accepted a number from -60 to 250"),
        ("temperature_c = 80.0", "temperature_c = -60.0\n", None),
    ],
)
def test_card_and_temperature(tmp_path: FilePath, old: str, new: str, told: str | None) -> None:
    """A card that is not there and a temperature off its range are told; a cold one is read."""
    text = (DESIGNS / "demo_36s4p_magnet.toml").read_text()
    for folder in ("steel", "magnet"):
        (tmp_path / folder).symlink_to(DESIGNS / folder)
    path = tmp_path / "demo.toml"
    path.write_text(text.replace(old, new))
    if told is None:
        assert read_machine(path).magnet is not None
        return
    with pytest.raises(DesignError) as caught:
        read_machine(path)
    assert told in str(caught.value)


def test_hot_rare_earth_is_refused(tmp_path: FilePath) -> None:
    """At 250 C its coefficient of -0.55 %/K would leave a negative knee: a range is told."""
    text = (DESIGNS / "demo_36s4p_magnet.toml").read_text()
    for folder in ("steel", "magnet"):
        (tmp_path / folder).symlink_to(DESIGNS / folder)
    path = tmp_path / "demo.toml"
    hot = text.replace("demo_ferrite", "demo_rare_earth").replace("= -20.0", "= 250.0")
    path.write_text(hot)
    # 20 + 0.95 / 0.0055 = 192.7 C
    with pytest.raises(
        DesignError, match=r"magnet.demagnetising_temperature_c = 250: .*; accepted -60 to 193"
    ):
        read_machine(path)


@pytest.mark.parametrize(
    ("change", "key"),
    [
        ({"magnet": None}, "rotor.barrier[1].magnet.width_mm"),
        ({"rotor": None}, "magnet.temperature_c"),
    ],
)
def test_card_and_blocks_need_each_other(change: dict[str, object], key: str) -> None:
    """Blocks without [magnet], and [magnet] without blocks, are found by the check."""
    design = with_magnet("demo_36s4p_straight", {1: BarrierMagnetDesign(width_mm=10.0)})
    bare = read_design(DESIGNS / "demo_36s4p_straight.toml").rotor
    change = {name: bare if name == "rotor" else value for name, value in change.items()}
    (finding,) = check_design(design.model_copy(update=change))
    assert finding.key == key


def random_magnet(seed: int) -> tuple[MachineDesign, int, BarrierMagnetDesign]:
    """A random rotor with a random block, or pair, in one of its barriers."""
    rng = np.random.default_rng([7, seed])
    design = random_design(rng)
    number = int(rng.integers(1, len(design.rotor.barrier) + 1))
    barriers = list(design.rotor.barrier)
    thickness = barriers[number - 1].thickness_mm
    magnet = BarrierMagnetDesign(
        width_mm=float(thickness * rng.uniform(0.8, 5.0)),
        thickness_mm=float(thickness * rng.uniform(0.5, 1.0)) if rng.random() < 0.4 else None,
        clearance_mm=float(rng.uniform(0.02, 0.15)),
        offset_mm=float(thickness * rng.uniform(0.5, 4.0)) if rng.random() < 0.5 else 0.0,
    )
    barriers[number - 1] = barriers[number - 1].model_copy(update={"magnet": magnet})
    rotor = design.rotor.model_copy(update={"barrier": tuple(barriers)})
    return design.model_copy(update={"rotor": rotor}), number, magnet


def test_random_blocks_fit_or_are_refused() -> None:
    """Random blocks in 40 random rotors: refused with a fault, or sound.

    Sound: right angles to 1e-9, the clearance kept to a nanometre, areas that tile the sector to
    1e-9. Both happen often, or the test would say nothing.
    """
    kept = 0
    for seed in range(40):
        design, number, magnet = random_magnet(seed)
        faults = magnet_faults(design)
        assert all(fault.lack > 0.0 and fault.text for fault in faults)
        if faults:
            continue
        kept += 1
        regions, _ = rotor_regions(design)
        total = sum(area(r.outer) + sum(map(area, r.holes)) for r in regions)
        radius = 0.5 * MM * (design.stator.bore_diameter_mm - design.rotor.gap_mm)
        assert total == pytest.approx(0.5 * radius**2 * math.pi / design.pole_pairs, rel=1e-9)
        cavities = [r for r in regions if r.name.startswith(f"barrier_{number}")]
        for block in (r for r in regions if r.material == "magnet"):
            sides = [edge.end - edge.start for edge in block.outer.edges]
            for a, b in itertools.pairwise(sides):
                assert abs((a.conjugate() * b).real) < 1e-9 * abs(a) * abs(b)
            near = min(distance(block.outer.edges, cavity.outer.edges) for cavity in cavities)
            assert near > MM * magnet.clearance_mm - 1e-9
    assert 10 <= kept <= 34
