"""The chapters of `ribs`: what lacks an input is not given, what does not survive is told."""

import dataclasses
from pathlib import Path

import pytest

from lamwright.app.elastic_chapter import elastic_chapter
from lamwright.app.life_chapter import life_chapter
from lamwright.app.plastic_chapter import plastic_chapter
from lamwright.app.progress import Stopwatch, silent
from lamwright.app.rib_work import RIBS_FILE, ribbed_machine, write_results
from lamwright.app.ribbed import Ribbed, RibWishes
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine, read_steel_card
from lamwright.geometry.design_fit import HotDesign
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.quantities import figures_of

DESIGNS = Path(__file__).parents[2] / "designs"
DEMO = DESIGNS / "demo_24s4p_arc.toml"


def spun(rpm: float) -> Ribbed:
    """The demo with another maximum speed, coarse, no pictures."""
    machine = read_machine(DEMO)
    duty = machine.design.duty.model_copy(update={"maximum_speed_rpm": rpm})
    machine = dataclasses.replace(machine, design=machine.design.model_copy(update={"duty": duty}))
    names = ("stress", "elastic", "plastic", "life", "absent")
    watch = Stopwatch(silent, dict.fromkeys(names, 0.2))
    section = cross_section(machine.design)
    return ribbed_machine(machine, section, watch, "coarse", RibWishes(), False)


@pytest.fixture(scope="module")
def slow_rotor() -> Ribbed:
    return spun(6000.0)


def values(chapter):
    return {figure.key: figure.value for group in chapter.figures for figure in figures_of(group)}


def test_the_stress_is_drawn_by_one_of_two(slow_rotor, tmp_path):
    """`assess --ribs` has drawn it already; by itself `ribs` draws it."""
    for has_picture in (True, False):
        ribbed = dataclasses.replace(slow_rotor, pictures=True, has_stress_picture=has_picture)
        elastic_chapter(ribbed, tmp_path)
        assert (tmp_path / "stress.png").exists() != has_picture


def test_no_life_without_fatigue_data(slow_rotor, tmp_path):
    """The other demo card has none: no figure, no column, one line that names what is missing."""
    card = read_steel_card(DESIGNS / "steel" / "demo_035.toml")
    machine = dataclasses.replace(slow_rotor.machine, rotor_steel=card)
    chapter = life_chapter(dataclasses.replace(slow_rotor, machine=machine), tmp_path)
    assert chapter.figures == chapter.of_ribs == ()
    assert chapter.not_given == ("life: steel card 'demo 0.35 mm sheet' has no table fatigue",)


def test_starts_to_overspeed_shorten_the_life(slow_rotor, tmp_path):
    """All of them: stress x 1.44, life / 1.44^(1/0.09) = 57; half: both damages' mean (Miner)."""
    none, half, every = (
        values(life_chapter(dataclasses.replace(slow_rotor, wishes=RibWishes(share)), tmp_path))[
            "life_shortest_50_percent_cycles"
        ]
        for share in (0.0, 0.5, 1.0)
    )
    assert none / every == pytest.approx(1.44 ** (1.0 / 0.09), rel=1e-9)
    assert 1.0 / half == pytest.approx(0.5 / none + 0.5 / every, rel=1e-9)


def test_life_has_its_scatter_and_error(slow_rotor, tmp_path):
    """2.3 and 97.7 % are 10^(2 x 0.25) beside the median; the mesh's error is told."""
    chapter = life_chapter(slow_rotor, tmp_path)
    found = values(chapter)
    median = found["life_shortest_50_percent_cycles"]
    assert found["life_shortest_2_3_percent_cycles"] == pytest.approx(median / 10**0.5)
    assert found["life_shortest_97_7_percent_cycles"] == pytest.approx(median * 10**0.5)
    assert 0.0 < chapter.errors["life_shortest_50_percent_cycles"] < 0.3 * median
    assert chapter.facts["life_local_stress"] == "elastic"
    assert len(chapter.of_ribs) == 6


def test_a_rotor_beyond_burst_has_no_growth_left(tmp_path):
    """Overspeed 1.2 x 15 000 above the 16 600 by limit load: said, not a figure; files are whole.

    The collapse takes whole sections: the ribs' yielded share is large, their strain has no end.
    """
    ribbed = spun(15_000.0)
    makers = (("elastic", elastic_chapter), ("plastic", plastic_chapter), ("life", life_chapter))
    report = write_results(ribbed, tmp_path, "coarse", makers)
    assert report.facts["overspeed_test_survived"] is False
    assert report.facts["start_stop"] == "collapse"
    assert "growth_left_um" not in report.figures
    assert any(line.startswith("growth left after the overspeed test") for line in report.not_given)
    assert any("do not run it" in line for line in report.cautions)
    assert not report.passes
    assert (tmp_path / RIBS_FILE).read_text().count('"plastic_strain_percent": null') >= 2
    assert max(row.values["yielded_section_percent"] for row in report.ribs) > 90.0


def test_a_chapter_that_cannot_be_leaves_the_others(slow_rotor, tmp_path):
    """Its one line stands among what is not given."""

    def absent(ribbed, stage):
        raise LamwrightError("nothing to say")

    makers = (("elastic", elastic_chapter), ("absent", absent))
    report = write_results(slow_rotor, tmp_path, "coarse", makers)
    assert "absent: nothing to say" in report.not_given
    assert report.figures["rib_stress_peak_mpa"].value > 0.0


def test_what_is_not_in_the_life_is_told(slow_rotor, tmp_path):
    """Magnets pull at the ribs in every start: no life. Fit and heat shift it: said beside it."""
    magnet = read_machine(DESIGNS / "demo_36s4p_magnet.toml").magnet
    machine = dataclasses.replace(slow_rotor.machine, magnet=magnet)
    chapter = life_chapter(dataclasses.replace(slow_rotor, machine=machine), tmp_path)
    assert chapter.figures == chapter.of_ribs == ()
    assert chapter.not_given[0].startswith("life: the magnets' load")
    hot = slow_rotor.machine.design.model_copy(update={"hot": HotDesign(rotor_temperature_c=90.0)})
    machine = dataclasses.replace(slow_rotor.machine, design=hot)
    chapter = life_chapter(dataclasses.replace(slow_rotor, machine=machine), tmp_path)
    assert chapter.cautions[0].startswith("life is that of the spin alone: heat shifts")
    assert chapter.figures


def test_magnets_load_is_told_to_be_missing(slow_rotor, tmp_path):
    """The elastic stress is the bare lamination's."""
    magnet = read_machine(DESIGNS / "demo_36s4p_magnet.toml").magnet
    machine = dataclasses.replace(slow_rotor.machine, magnet=magnet)
    chapter = elastic_chapter(dataclasses.replace(slow_rotor, machine=machine), tmp_path)
    assert any("load of the magnets is not in the stress" in line for line in chapter.cautions)
    assert not elastic_chapter(slow_rotor, tmp_path).cautions
