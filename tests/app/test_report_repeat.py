"""What a report lists, saved by its own words into an empty folder, is the same design again."""

import html
import re
import shlex
from pathlib import Path

import pytest

from lamwright.app.cli import main
from lamwright.app.report_repeat import repeat_section, study_section, together
from lamwright.app.study_file import read_study
from lamwright.geometry.design_file import design_hash, read_machine
from lamwright.postprocess.report import Report
from lamwright.postprocess.report_html import report_html

DESIGNS = Path(__file__).parents[2] / "designs"
KINDS = "Design file|Card|Study file|Base design"


def saved(page: str, folder: Path) -> list[str]:
    """Each listing under the name in its heading; the command's words."""
    command = ""
    for head, text in re.findall(r"<h3>(.*?)</h3>\s*<pre[^>]*>(.*?)</pre>", page, re.DOTALL):
        title, content = html.unescape(head), html.unescape(text)
        if title == "Command":
            command = content
            continue
        kind, name = re.fullmatch(f"({KINDS}) (.*)", title).groups()
        assert kind
        path = (folder / name).resolve()
        assert path.is_relative_to(folder)  # nothing beside the empty folder
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(content)
    return shlex.split(command)


def page_of(section) -> str:
    return report_html(Report("a", "b", "c", "good", (section,), "d"), Path())


@pytest.mark.parametrize(
    "name",
    ["demo_24s4p_arc.toml", "demo_36s4p_magnet.toml", "gallery/servo_12s10p.toml"],
)
def test_a_design_is_the_same_again(name, tmp_path):
    """Cards above the design's folder too: the hash is that of the original, the command parses."""
    machine = read_machine(DESIGNS / name)
    digest = design_hash(machine.design, machine.cards)
    page = page_of(repeat_section("assess", "--out FOLDER --ribs", machine, digest))
    program, command, *words = saved(page, tmp_path)
    assert program == "lamwright"
    asked = main.commands[command].make_context(command, words).params
    again = read_machine(tmp_path / asked["design"])
    assert design_hash(again.design, again.cards) == digest
    assert digest in page
    assert str(DESIGNS) not in page


def test_a_name_with_a_space_is_quoted(tmp_path):
    """As it is typed in a shell."""
    path = tmp_path / "my motor.toml"
    path.write_text((DESIGNS / "demo_24s4p_arc.toml").read_text().replace("steel/", "./"))
    (tmp_path / "demo_050.toml").write_bytes((DESIGNS / "steel" / "demo_050.toml").read_bytes())
    folder = tmp_path / "empty"
    folder.mkdir()
    words = saved(page_of(repeat_section("map", "", read_machine(path), "0")), folder)
    assert words == ["lamwright", "map", "my motor.toml"]
    assert read_machine(folder / "my motor.toml")


def test_drawings_are_named_with_their_hashes():
    """They cannot be listed, so that a second person must be able to tell them."""
    machine = read_machine(DESIGNS / "gallery" / "retrofit_48s4p.toml")
    section = repeat_section("assess", "", machine, "0")
    told = section.blocks[0].text
    assert machine.design.stator.outline.source.sha256 in told
    assert "measured/stator.dxf" in told


def test_a_study_is_the_same_again(tmp_path):
    """Base and cards lie above the study's folder; the hash is that of the original."""
    study = read_study(DESIGNS / "studies" / "barriers_by_end_angle.toml")
    words = saved(page_of(study_section(study, "sweep", "--out FOLDER")), tmp_path)
    assert words[:2] == ["lamwright", "sweep"]
    assert read_study(tmp_path / words[2]).hash == study.hash


@pytest.mark.parametrize(
    ("names", "expected"),
    [
        (["a.toml", "steel/b.toml"], ["a.toml", "steel/b.toml"]),
        (["a.toml", "../steel/b.toml"], ["design/a.toml", "steel/b.toml"]),
        (
            ["a.toml", "../../b.toml", "c.toml"],
            ["design/design/a.toml", "b.toml", "design/design/c.toml"],
        ),
        (["a.toml", "/cards/b.toml"], ["a.toml", "/cards/b.toml"]),
    ],
)
def test_names_lie_below_one_folder(names, expected):
    """Their places to each other stay; folders above get a plain name."""
    assert together(names) == expected
