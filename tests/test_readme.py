"""README says what is: its Python runs, guides list keys and commands, no link leads nowhere."""

import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest
from pydantic import BaseModel

from lamwright.geometry.design import (
    BarrierDesign,
    BarrierMagnetDesign,
    DutyDesign,
    LimitsDesign,
    MachineDesign,
    MagnetCard,
    MagnetChoice,
    OtherHalfDesign,
    RotorDesign,
    StatorDesign,
    SteelCard,
    SteelChoice,
    WindingDesign,
)
from lamwright.geometry.design_details import (
    ContourDesign,
    HoleDesign,
    KeywayDesign,
    NotchDesign,
)
from lamwright.geometry.design_fatigue import FatigueData
from lamwright.geometry.design_fit import FitDesign, HotDesign
from lamwright.geometry.design_loss import LossesDesign, StrandDesign
from lamwright.geometry.design_tolerance import KeyTolerance, ToleranceDesign

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
KEYS = (ROOT / "designs" / "README.md").read_text(encoding="utf-8")
NUMBER = re.compile(r"-?\d+\.\d+")


def _block(language: str) -> str:
    found = re.search(rf"```{language}\n(.*?)```", README, re.DOTALL)
    assert found
    return found[1]


def test_the_two_commands_are_where_ci_looks_for_them():
    """`.ci/run` runs the lines that begin so: the main job, then the tests, and no third."""
    lines = [line for line in README.splitlines() if line.startswith("bash app/ready.sh ")]
    assert len(lines) == 2
    assert lines == _block("sh").splitlines()
    assert "lamwright assess designs/" in lines[0]
    assert lines[1].split()[2:] == ["pytest"]


def test_the_python_lines_print_what_is_printed_there():
    """Run as a user would, from the checkout. 0.2 %: another version of the mesher may differ."""
    line = [sys.executable, "-c", _block("python")]
    run = subprocess.run(line, capture_output=True, text=True, check=True, cwd=ROOT)
    told = _block("text")
    assert NUMBER.sub("", run.stdout) == NUMBER.sub("", told)
    numbers = [[float(number) for number in NUMBER.findall(text)] for text in (run.stdout, told)]
    assert numbers[0] == pytest.approx(numbers[1], rel=2e-3)


@pytest.mark.parametrize(
    ("header", "model"),
    [
        ("`[stator]`", StatorDesign),
        ("`[winding]`", WindingDesign),
        ("`[winding.strands]`", StrandDesign),
        ("`[rotor]`", RotorDesign),
        ("`[[rotor.barrier]]`", BarrierDesign),
        ("`[rotor.barrier.other_half]`", OtherHalfDesign),
        ("`[rotor.barrier.magnet]`", BarrierMagnetDesign),
        ("`[[rotor.notch]]`", NotchDesign),
        ("`[[rotor.hole]]`", HoleDesign),
        ("`[rotor.keyway]`", KeywayDesign),
        ("`[rotor.contour]`", ContourDesign),
        ("`[steel]`", SteelChoice),
        ("`[magnet]`", MagnetChoice),
        ("`[duty]`", DutyDesign),
        ("`[losses]`", LossesDesign),
        ("`[fatigue]`", FatigueData),
        ("`[rotor.fit]`", FitDesign),
        ("`[hot]`", HotDesign),
        ("`[tolerance]`", ToleranceDesign),
        ("`[[tolerance.key]]`", KeyTolerance),
        ("`[limits]`", LimitsDesign),
    ],
)
def test_each_key_of_a_design_has_its_row(header: str, model: type[BaseModel]):
    """Every key in its order, with its default where it has one."""
    table = KEYS[KEYS.index(f"| {header}") :].split("\n\n", 1)[0]
    rows = [row.split("|")[1:3] for row in table.splitlines()[2:]]
    fields = {key: field for key, field in model.model_fields.items() if "barrier" not in key}
    assert [key.strip() for key, _ in rows] == [f"`{key}`" for key in fields]
    for (_, told), field in zip(rows, fields.values(), strict=True):
        if isinstance(field.default, int | float):
            assert f"default {field.default:g}" in told


def test_each_table_of_a_design_and_key_of_a_card_is_named():
    """What is left: the tables themselves, and the keys of the cards in their paragraphs."""
    for key in MachineDesign.model_fields:
        assert f"`{key}`" in KEYS or f"`[{key}]`" in KEYS
    for key in (*SteelCard.model_fields, *MagnetCard.model_fields):
        assert f"`{key}`" in KEYS


def test_every_command_is_listed():
    """The table has all commands of the program and no other."""
    from lamwright.app.cli import main

    listed = re.findall(r"^\| `lamwright ([a-z]+)[ `]", README, re.MULTILINE)
    assert sorted(listed) == sorted(main.commands)


@pytest.mark.parametrize("guide", sorted(ROOT.glob("[!.]*/**/*.md")) + sorted(ROOT.glob("*.md")))
def test_links_of_guides_lead_somewhere(guide):
    """Files and pictures that a guide names by a link are there."""
    text = guide.read_text(encoding="utf-8")
    for target in re.findall(r"\]\(([^)#]+)(?:#[^)]*)?\)", text):
        assert target.startswith("http") or (guide.parent / target).exists(), target


GUIDES = sorted(
    path
    for path in ROOT.glob("**/*.md")
    if not {".venv", "tests"} & {*path.relative_to(ROOT).parts}
)


@pytest.mark.parametrize("guide", GUIDES, ids=lambda path: str(path.relative_to(ROOT)))
def test_commands_of_guides_can_be_typed(guide):
    """Each goes through the command's own parser; designs that it names are there."""
    import click

    from lamwright.app.cli import main

    text = guide.read_text(encoding="utf-8").replace("\\\n", " ")
    lines = re.findall(r"^ *(?:bash app/ready.sh )?(lamwright [a-z]+ .*)$", text, re.MULTILINE)
    lines += [" ".join(code.split()) for code in re.findall(r"`(lamwright [a-z]+ [^`]*)`", text)]
    for line in lines:
        name, *words = shlex.split(re.sub(r"\[[^]]*\]", "", line), comments=True)[1:]
        assert all((ROOT / word).exists() for word in words if word.startswith("designs/"))
        try:
            main.commands[name].make_context(name, words)
        except click.MissingParameter:
            continue  # named in running text without its folder
