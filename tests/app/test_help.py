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
from lamwright.app.guide import SECTIONS, pointer
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
    child, terminal = pty.fork()
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


@pytest.mark.parametrize("start", SECTIONS)
def test_each_section_that_an_error_names_is_in_its_guide(start: str):
    """A heading of that text, and the key or its table somewhere in the file."""
    file, section = SECTIONS[start]
    text = (ROOT / file).read_text(encoding="utf-8")
    assert re.search(rf"^#+ {re.escape(section)}$", text, re.MULTILINE)
    assert start.split(".")[-1] in text


@pytest.mark.parametrize(
    ("fault", "told"),
    [
        ("a.toml:9: rotor.gap_mm = -1: too small", 'designs/README.md, section "Rotor"'),
        ("a.toml:9: rotor.barrier[2].thicknes_mm: unknown key; did", '"Barriers"'),
        ("a.toml:9: rotor.barrier[2].shape = 'x': not known", '"What its sides are"'),
        ("a.toml:9: rotor.barrier[1].magnet.width_mm = 0: too small", '"Magnets in barriers"'),
        ("ends.toml:5: vary[1].key = 'x': no such key", 'studies/README.md, section "Keys that'),
        ("a.toml:1: limits: missing; accepted one table [limits]", '"Limits"'),
        ("a.toml:1: the file is empty; accepted a TOML file", ""),
        ("a.toml: no such file; accepted a TOML file", ""),
        ("a.toml:3: column 4 of x: not TOML, rotor: a", ""),
    ],
)
def test_a_fault_points_to_its_section(fault: str, told: str):
    """By the key that the line names, as geometry's errors write it."""
    assert told in "".join(pointer(DesignError(fault)))
    assert bool(told) == bool(pointer(DesignError(fault)))
    assert pointer(LamwrightError(fault)) == ()


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
