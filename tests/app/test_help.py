"""Help, examples, completion, and where errors point: what a newcomer meets first."""

import os
import re
import select
import shlex
import shutil
import subprocess
import sys
import time
from pathlib import Path

import click
import pytest
from click.shell_completion import ShellComplete
from click.testing import CliRunner

from lamwright.app.cli import main
from lamwright.app.examples import EXAMPLES
from lamwright.app.guide import (
    CARD_SECTIONS,
    MAGNET_SECTIONS,
    SECTIONS,
    STUDY_SECTIONS,
    pointer,
)
from lamwright.app.lamination import section_of
from lamwright.app.study_file import read_study
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.errors import DesignError, LamwrightError

ROOT = Path(__file__).parents[2]
PATIENCE = 60.0  # s, for a shell on a busy machine; nothing is measured


def help_of(name: str) -> str:
    result = CliRunner().invoke(main, [name, "--help"])
    assert result.exit_code == 0
    return result.output


def examples_of(name: str) -> list[str]:
    """The lines of the example as a user copies them from the help."""
    return [line.strip() for line in help_of(name).partition("Example:\n")[2].splitlines()]


def test_every_command_has_an_example_and_no_other():
    """A new command needs its line in `examples`."""
    assert sorted(EXAMPLES) == sorted(main.commands)


@pytest.mark.parametrize("name", sorted(main.commands))
def test_an_example_parses_and_names_files_that_are_there(name: str):
    """Each line as the shell splits it goes through the command's own parser; it is not run."""
    lines = examples_of(name)
    assert lines == list(EXAMPLES[name])
    made: set[str] = set()
    existing = 0
    for line in lines:
        program, command, *args = shlex.split(line)
        assert program == "lamwright"
        context = main.commands[command].make_context(command, list(args), parent=None)
        for word in args:
            if word.startswith("designs/"):
                assert (ROOT / word).is_file()
                existing += 1
        for key, value in context.params.items():
            if isinstance(value, Path) and key not in ("out", "folder"):
                is_made = str(value) in made
                assert is_made or (ROOT / value).exists(), value
            if key == "folder" and value is not None:
                assert str(value) in made
        made.add(str(context.params.get("out")))
    assert existing
    assert any(shlex.split(line)[1] == name for line in lines)


@pytest.mark.parametrize("name", sorted(main.commands))
def test_files_that_a_help_names_are_there(name: str):
    """Paths below `designs` anywhere in the text: study files above all."""
    for word in re.findall(r"designs/[\w./-]*\w", help_of(name)):
        assert (ROOT / word).exists(), word


def completed(*args: str, incomplete: str) -> list[str]:
    shell = ShellComplete(main, {}, "lamwright", "_LAMWRIGHT_COMPLETE")
    return [item.value for item in shell.get_completions(list(args), incomplete)]


def test_commands_options_and_choices_are_completed():
    """What click offers to any shell."""
    assert completed(incomplete="ou") == ["outline"]
    assert sorted(completed(incomplete="")) == sorted(main.commands)
    assert completed("assess", incomplete="--tol") == ["--tolerance"]
    assert completed("assess", "--tolerance", incomplete="") == ["coarse", "normal", "fine"]


@pytest.mark.parametrize("name", sorted(main.commands))
def test_every_path_is_left_to_the_shells_own_completion(name: str):
    """Designs, studies, folders: an argument of type `file` is what shells complete themselves."""
    shell = ShellComplete(main, {}, "lamwright", "_LAMWRIGHT_COMPLETE")
    for option in main.commands[name].params:
        if isinstance(option.type, click.Path):
            given = [name]
            if isinstance(option, click.Option):
                given += [option.opts[0]]
            kinds = {item.type for item in shell.get_completions(given, "designs/")}
            assert kinds == {"file"}


@pytest.mark.skipif(shutil.which("bash") is None, reason="no bash here")
def test_bash_completes_commands_and_design_files(tmp_path):
    """Keys typed into a real bash, as app/README.md says it is set up."""
    import pty

    shim = tmp_path / "lamwright"
    shim.write_text(f'#!/bin/sh\nexec {sys.executable} -m lamwright.app "$@"\n')
    shim.chmod(0o755)
    setup = re.search(r'eval "\$\(_LAMWRIGHT_COMPLETE=bash_source lamwright\)"', GUIDE)
    assert setup
    path = f"{tmp_path}{os.pathsep}{os.environ['PATH']}"
    try:
        child, terminal = pty.fork()
    except OSError as missing:
        pytest.skip(f"no terminal to type into here: {missing}")
    if child == 0:
        os.chdir(ROOT)
        os.environ.update(PATH=path, PS1="ready> ", TERM="dumb", INPUTRC="/dev/null")
        os.execvp("bash", ["bash", "--norc", "--noprofile", "-i"])
    try:
        _typed(terminal, "bind 'set enable-bracketed-paste off'\n", "ready> ")
        _typed(terminal, f"{setup[0]}; echo set-up-$((1+1))\n", "set-up-2")
        _typed(terminal, "lamwright asse\t", "lamwright assess ")
        _typed(terminal, "designs/demo_24\t", "designs/demo_24s4p_arc.toml ")
        _typed(terminal, "--toler\t", "--tolerance ")
    finally:
        os.close(terminal)
        os.waitpid(child, 0)


def _typed(terminal: int, keys: str, expected: str) -> None:
    """Type, then read until the terminal shows what is expected."""
    os.write(terminal, keys.encode())
    seen, end = "", time.monotonic() + PATIENCE
    while expected not in seen:
        assert time.monotonic() < end, seen
        if select.select([terminal], [], [], 0.5)[0]:
            seen += os.read(terminal, 4096).decode(errors="replace")


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_a_shells_script_is_printed(shell: str):
    """The three shells that app/README.md names."""
    line = [sys.executable, "-m", "lamwright.app"]
    environment = {**os.environ, "_LAMWRIGHT_COMPLETE": f"{shell}_source"}
    run = subprocess.run(line, capture_output=True, text=True, env=environment, timeout=PATIENCE)
    assert "_LAMWRIGHT_COMPLETE" in run.stdout
    assert f"_LAMWRIGHT_COMPLETE={shell}_source lamwright" in GUIDE


GUIDE = (ROOT / "app" / "README.md").read_text(encoding="utf-8")


TABLES = (SECTIONS, CARD_SECTIONS, MAGNET_SECTIONS, STUDY_SECTIONS)


@pytest.mark.parametrize(
    ("start", "where"), [(start, where) for table in TABLES for start, where in table.items()]
)
def test_each_section_that_an_error_names_is_in_its_guide(start: str, where: tuple[str, str]):
    """A heading of that text, and below it, before the next, the key or its table."""
    file, section = where
    text = (ROOT / file).read_text(encoding="utf-8")
    below = re.split(rf"^#+ {re.escape(section)}$", text, maxsplit=1, flags=re.MULTILINE)
    assert len(below) == 2
    if start not in ("name", "note"):  # told at the head of the guide
        assert start.split(".")[-1] in re.split(r"^#", below[1], maxsplit=1, flags=re.MULTILINE)[0]


def _pointed(path: Path, read) -> str:
    with pytest.raises(DesignError) as error:
        read(path)
    return "".join(pointer(error.value))


@pytest.mark.parametrize(
    ("old", "new", "section"),
    [
        ("gap_mm = 0.4", "gap_mm = -0.4", "Rotor"),
        ("poles = 4", "poles = 5", "Rotor"),
        ("slots = 24", "slots = 1", "Stator"),
        ("slots = 24", "slots = 25", "Stator"),
        ("tooth_width_mm = 5.4", "tooth_widht_mm = 5.4", "Stator"),
        ("turns_per_coil = 34", "turns_per_coil = 0", "Winding"),
        ("conductor_area_mm2 = 1.4", "conductor_area_mm2 = 0", "Winding"),
        ("in_hand = 2", "in_hand = 0", "Winding"),
        ("end_angle_deg = 16.3", "end_angle_deg = 0", "Barriers"),
        ("depth_mm = 3.6", "depth = 3.6", "Barriers"),
        ('shape = "arc"', 'shape = "ark"', "What its sides are"),
        ("depth_mm = 3.6", 'depth_mm = 3.6\nend_shape = "x"', "How it ends"),
        ("depth_mm = 3.6", "depth_mm = 3.6\nmagnet = { width_mm = 0 }", "Magnets in barriers"),
        ("[steel]", "[[rotor.notch]]\nangle_deg = 1.0\n[steel]", "Notches, holes, keyways and rim"),
        ("[steel]", "[rotor.fit]\nshaft_density = 1.0\n[steel]", "Shaft fit"),
        ("steel/demo_050.toml", "steel/demo_055.toml", "Steel and magnets"),
        ("supply_voltage_v = 400.0", "supply_voltage_v = 0", "Duty"),
        ("[limits]", "[losses]\nair_temperature_c = 999.0\n[limits]", "Losses and heat"),
        ("[limits]", "[hot]\nrotor_temperatur_c = 80.0\n[limits]", "Losses and heat"),
        ("[limits]", "[tolerance]\ncut_mm = -1.0\n[limits]", "Tolerances"),
        ("least_torque_nm = 9.0", "least_torque_nm = -9.0", "Limits"),
        ('name = "demo', 'title = "demo', "From your motor to a design file"),
    ],
)
def test_faults_of_a_design_point_to_what_helps(old, new, section, tmp_path):
    """From the file through its reader: the section where the key of the first fault is told."""
    text = (ROOT / "designs" / "demo_24s4p_arc.toml").read_text()
    assert old in text
    (tmp_path / "a.toml").write_text(text.replace(old, new, 1))
    shutil.copytree(ROOT / "designs" / "steel", tmp_path / "steel")
    assert f'section "{section}"' in _pointed(
        tmp_path / "a.toml", lambda path: section_of(read_machine(path))
    )


@pytest.mark.parametrize(
    ("card", "old", "new", "section"),
    [
        (
            "steel/demo_050.toml",
            "yield_strength_mpa = [400.0",
            "yield_strength_mpa = [-1",
            "Steel c",
        ),
        ("steel/demo_050.toml", "[hot]", "[heat]", "Steel cards"),
        ("steel/demo_050.toml", "sheet_thickness_mm = 0.5", "", "Steel cards"),
        ("steel/demo_050.toml", 'method = "smith', 'method = "smyth', "Life in starts"),
        ("magnet/demo_ferrite.toml", "value = 4900.0", "value = -1", "Magnet cards"),
        ("magnet/demo_ferrite.toml", "[remanence_t]", "[remanence]", "Magnet cards"),
    ],
)
def test_faults_of_a_card_point_to_cards(card, old, new, section, tmp_path):
    """Cards have words that a design has too: `hot` of a card is no `hot` of a design."""
    for folder in ("steel", "magnet"):
        shutil.copytree(ROOT / "designs" / folder, tmp_path / folder)
    shutil.copy(ROOT / "designs" / "demo_36s4p_magnet.toml", tmp_path)
    text = (tmp_path / card).read_text()
    assert old in text
    for path in (tmp_path / card).parent.iterdir():
        path.write_text(text.replace(old, new, 1))
    assert f'section "{section}' in _pointed(tmp_path / "demo_36s4p_magnet.toml", read_machine)


@pytest.mark.parametrize(
    ("old", "new", "section"),
    [
        ("layout.barriers", "layout.barrier", "Keys that vary"),
        ('effort = "quick"', 'tolerance = "rough"', "The study file"),
        ('figure = "torque_nm"', 'figure = "torque"', "The study file"),
    ],
)
def test_faults_of_a_study_point_to_its_guide(old, new, section, tmp_path):
    """`tolerance` of a study is no table of a design."""
    text = (ROOT / "designs" / "studies" / "barriers_by_end_angle.toml").read_text()
    assert old in text
    base = (ROOT / "designs" / "demo_24s4p_arc.toml").as_posix()
    text = text.replace(old, new, 1).replace("../demo_24s4p_arc.toml", base)
    (tmp_path / "a.toml").write_text(text)
    told = _pointed(tmp_path / "a.toml", read_study)
    assert told == f'more: designs/studies/README.md, section "{section}"'


def test_a_fault_without_a_key_points_nowhere():
    """A file that is none, and faults of other kinds."""
    for text in ("a.toml: no such file; accepted a TOML file", "a.toml:3: not TOML, rotor: a"):
        assert pointer(DesignError(text)) == ()
    assert pointer(LamwrightError("a.toml:9: rotor.gap_mm = -1: too small")) == ()


def test_bad_input_ends_with_one_pointer_however_many_faults(tmp_path):
    """From outside: every fault on a line of its own, then the one line."""
    text = (ROOT / "designs" / "demo_24s4p_arc.toml").read_text()
    broken = text.replace("gap_mm = ", "gap_mm = -").replace("poles = 4", "poles = 50")
    shutil.copytree(ROOT / "designs" / "steel", tmp_path / "steel")
    path = tmp_path / "two.toml"
    path.write_text(broken)
    result = CliRunner().invoke(main, ["outline", str(path), "--out", str(tmp_path / "out")])
    assert result.exit_code == 2
    *faults, last = result.stderr.splitlines()
    assert len(faults) == 2
    assert all(line.startswith(f"{path}:") for line in faults)
    assert last == 'more: designs/README.md, section "Rotor"'


THEORY = (ROOT / "solver" / "README.md").read_text(encoding="utf-8")
ENTRIES = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8").partition("\n## References\n")[2]
CITED = re.compile(
    r"\b([A-Z][a-z]+)(?:(?:, [A-Z][a-z]+(?: [A-Z][a-z]+)?)*| and others) (1[89]\d\d|20\d\d)\b"
)


def test_every_source_of_the_theory_has_its_entry():
    """First author and year of each citation in one entry of DEVELOPERS, References."""
    entries = [" ".join(entry.split()) for entry in ENTRIES.split("\n- ")[1:]]
    cited = set(CITED.findall(THEORY))
    assert len(cited) > 25
    missing = [
        (author, year)
        for author, year in sorted(cited)
        if not any(author.lower() in entry.lower() and year in entry for entry in entries)
    ]
    assert missing == []
