"""The commands from outside: exit codes, one clear line a fault, what lands in the folder."""

import dataclasses
import json
import os
import signal
import subprocess
import sys
from pathlib import Path

import invented_verdict as invented
import pytest
from click.testing import CliRunner

import broken_designs
from lamwright.app import run
from lamwright.app.cli import main
from lamwright.app.point import read_machine, solve
from lamwright.geometry.design_file import read_design
from lamwright.geometry.errors import NotConverged

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
COMMANDS = {
    "assess": ("--out", "{out}"),
    "outline": ("--out", "{out}"),
    "point": ("--i-d", "8", "--i-q", "4", "--angle", "2.5"),
}
POINT = ("point", str(DEMO), *COMMANDS["point"])
BROKEN = [*broken_designs.READER, *broken_designs.SHAPES]
TIMEOUT = 120.0  # s


def invoke(*args):
    """A command in this process."""
    return CliRunner().invoke(main, [str(arg) for arg in args])


def command(name, design, out):
    return invoke(name, design, *(part.format(out=out) for part in COMMANDS[name]))


def python(code, *args):
    """A statement in an interpreter of its own."""
    line = [sys.executable, "-c", code, *(str(arg) for arg in args)]
    return subprocess.run(line, capture_output=True, text=True, timeout=TIMEOUT)


@pytest.mark.parametrize("name", COMMANDS)
@pytest.mark.parametrize("broken", BROKEN, ids=lambda broken: broken.name)
def test_broken_design_ends_with_2_and_one_clear_line_a_fault(broken, name, tmp_path):
    """Whatever is wrong with the file: exit 2, its place and fault on stderr, nothing else."""
    path = broken.write(tmp_path)
    out = tmp_path / "out"
    result = command(name, path, out)
    assert result.exit_code == 2
    assert result.stdout == ""
    lines = result.stderr.splitlines()
    assert any(line.startswith(f"{path}{broken.line}") for line in lines)
    if lines[-1].startswith("more: "):  # where a guide tells of it
        lines.pop()
    assert all(line.startswith(f"{path}:") and line.isprintable() for line in lines)
    assert not out.exists()


@pytest.mark.parametrize("name", COMMANDS)
def test_missing_design_is_bad_input(name, tmp_path):
    """A path that is not there, or is a folder: one line."""
    for path, fault in ((tmp_path / "none.toml", "no such file"), (tmp_path, "this is a folder")):
        result = command(name, path, tmp_path / "out")
        assert result.exit_code == 2
        assert result.stderr == f"{path}: {fault}; accepted a TOML file\n"


@pytest.mark.parametrize("name", ["assess", "outline"])
def test_out_must_be_a_folder(name, tmp_path):
    """A file in the place of the folder, or above it: one line that names --out."""
    file = tmp_path / "file"
    file.write_text("")
    for out in (file, file / "below"):
        result = command(name, DEMO, out)
        assert result.exit_code == 2
        assert result.stderr.startswith(f"--out {out}: ")
        assert len(result.stderr.splitlines()) == 1


@pytest.mark.parametrize("value", ["nan", "inf", "-inf"])
@pytest.mark.parametrize("option", ["--i-d", "--i-q", "--angle"])
def test_point_refuses_what_is_no_number(option, value):
    """Click takes nan and inf for numbers; the field has no answer to them."""
    args = list(POINT)
    args[args.index(option) + 1] = value
    result = invoke(*args)
    assert result.exit_code == 2
    assert "not a finite number" in result.stderr


def test_misspelt_option_is_bad_input():
    """Exit 2 as for any bad input, with the near option named."""
    result = invoke("point", DEMO, "--i-d", "8", "--i-q", "4", "--angel", "2.5")
    assert result.exit_code == 2
    assert "--angle" in result.stderr


@pytest.mark.parametrize(("ripple", "code"), [(0.2, 0), (0.3, 1)])
def test_exit_code_tells_whether_every_limit_holds(ripple, code, tmp_path, monkeypatch):
    """0 when all hold, 1 when one is missed, which the table names; figures invented."""
    magnetic = dataclasses.replace(invented.MAGNETIC, ripple=ripple)
    monkeypatch.setattr(run, "assess", lambda *_: invented.verdict(magnetic))
    result = command("assess", DEMO, tmp_path)
    assert result.exit_code == code
    assert ("fails: torque ripple" if code else "passes: every limit holds") in result.stdout
    assert ("missed" in result.stdout) == bool(code)


@pytest.mark.parametrize("name", ["coarse", "normal", "fine"])
def test_tolerance_reaches_the_assessment(name, tmp_path, monkeypatch):
    """The name asked for is the one assessed with; another is bad input that lists the three."""
    asked = []
    monkeypatch.setattr(
        run, "assess", lambda *given: asked.append(given[3:5]) or invented.verdict()
    )
    assert invoke("assess", DEMO, "--out", tmp_path, "--tolerance", name).exit_code == 0
    without = invoke("assess", DEMO, "--out", tmp_path, "--tolerance", name, "--no-pictures")
    assert without.exit_code == 0
    assert asked == [(name, True), (name, False)]
    result = invoke("assess", DEMO, "--out", tmp_path, "--tolerance", "finest")
    assert result.exit_code == 2
    assert "'coarse', 'normal', 'fine'" in result.stderr


def test_failed_iteration_ends_with_3(tmp_path, monkeypatch):
    """Not converged is neither bad input nor a missed limit."""

    def fail(*_):
        raise NotConverged("residual 1e-2 after 60 steps")

    monkeypatch.setattr(run, "assess", fail)
    result = command("assess", DEMO, tmp_path)
    assert result.exit_code == 3
    assert result.stderr == "residual 1e-2 after 60 steps\n"


def test_a_full_disk_is_told_in_one_line(tmp_path, monkeypatch):
    """An error of the system names the file as written and the reason."""

    def fail(*_):
        raise OSError(28, "No space left on device", "Results/torque.csv")

    monkeypatch.setattr(run, "assess", fail)
    result = command("assess", DEMO, tmp_path)
    assert result.exit_code == 2
    assert result.stderr == "Results/torque.csv: no space left on device\n"


def test_a_fault_of_the_program_is_not_a_missed_limit(tmp_path, monkeypatch):
    """An error that nobody expected keeps its traceback and ends with 70, not with 1."""

    def fail(*_):
        raise ZeroDivisionError("division by zero")

    monkeypatch.setattr(run, "assess", fail)
    result = command("assess", DEMO, tmp_path)
    assert result.exit_code == 70
    assert "ZeroDivisionError: division by zero" in result.stderr
    assert result.stderr.endswith("a fault of the program: please report it with the design\n")


def test_interrupt_key_ends_with_130_and_one_line(tmp_path):
    """Pressed in the middle of the work: the group gets the signal, as from a terminal.

    No traceback, nobody left behind in the session, nothing in the folder.
    """
    line = [sys.executable, "-m", "lamwright.app", "assess", DEMO, "--out", tmp_path / "out"]
    with subprocess.Popen(
        line, stderr=subprocess.PIPE, stdout=subprocess.PIPE, text=True, start_new_session=True
    ) as process:
        for told in process.stderr:
            if "current angle" in told:
                break
        os.killpg(process.pid, signal.SIGINT)
        stdout, stderr = process.communicate(timeout=TIMEOUT)
    assert process.returncode == 130
    assert stderr.splitlines()[-1] == "interrupted, nothing was written"
    assert "Traceback" not in stderr
    assert stdout == ""
    assert list((tmp_path / "out").iterdir()) == []
    with pytest.raises(ProcessLookupError):
        os.killpg(process.pid, 0)


def test_version_and_help_come_without_numpy():
    """What is asked often must be quick: nothing heavy is loaded for it."""
    code = (
        "import sys; from lamwright.app.cli import main\n"
        "main(sys.argv[1:], standalone_mode=False)\n"
        "print(sorted({'numpy', 'scipy', 'pydantic', 'rich', 'gmsh'} & set(sys.modules)))"
    )
    for args, text in ((["--version"], "0."), (["--help"], "assess"), (["point", "--help"], "A")):
        done = python(code, *args)
        assert done.returncode == 0
        assert text in done.stdout
        assert done.stdout.endswith("[]\n")


def test_outline_loads_neither_mesh_nor_solver_nor_pictures(tmp_path):
    """The libraries that it must not wait for (half a second each)."""
    code = (
        "import sys; from lamwright.app.cli import main\n"
        "main(sys.argv[1:], standalone_mode=False)\n"
        "heavy = {'scipy', 'skfem', 'gmsh', 'matplotlib', 'cvxopt', 'rich'}\n"
        "print(sorted(heavy & set(sys.modules)))"
    )
    done = python(code, "outline", DEMO, "--out", tmp_path)
    assert done.returncode == 0, done.stderr
    assert done.stdout.endswith("[]\n")


def test_outline_reads_back_as_analysed(tmp_path):
    """The promise: area and perimeter to 1e-6, every vertex to 1 um, of the file written."""
    result = command("outline", DEMO, tmp_path / "out")
    assert result.exit_code == 0, result.stderr
    record = json.loads((tmp_path / "out" / "outline.json").read_text())
    assert (tmp_path / "out" / record["outline_dxf"]).stat().st_size > 1000
    assert record["dxf_area_difference_relative"] < 1e-6
    assert record["dxf_perimeter_difference_relative"] < 1e-6
    assert record["dxf_vertex_difference_um"] < 1.0
    for rib in record["ribs"]:
        barrier = read_design(DEMO).rotor.barrier[rib["barrier"] - 1]
        assert rib["width_mm"] == pytest.approx(barrier.tangential_rib_mm, abs=1e-6)


@pytest.fixture(scope="module")
def solution():
    """The five lines from Python."""
    machine = read_machine(str(DEMO))
    return solve(machine, i_d=8.0, i_q=4.0, angle_deg=2.5)


def test_point_prints_what_python_returns(solution):
    """In one process the same numbers to the last bit."""
    result = invoke(*POINT)
    assert result.exit_code == 0, result.stderr
    record = json.loads(result.stdout)
    assert record["psi_d_vs"] == solution.psi_d
    assert record["psi_q_vs"] == solution.psi_q
    assert [record[f"psi_{x}_vs"] for x in "abc"] == list(solution.psi_abc)
    assert record["torque_maxwell_nm"] == solution.torque
    assert record["energy_j"] == solution.energy
    assert record["coenergy_j"] == solution.coenergy


def test_point_as_a_program(solution):
    """As installed, from another folder; threads of BLAS may change the last digits only."""
    program = Path(sys.executable).parent / "lamwright"
    done = subprocess.run([program, *POINT], capture_output=True, text=True, timeout=TIMEOUT)
    assert done.returncode == 0, done.stderr
    record = json.loads(done.stdout)
    assert record["psi_d_vs"] == pytest.approx(solution.psi_d, rel=1e-9)
    assert record["torque_maxwell_nm"] == pytest.approx(solution.torque, rel=1e-9)


def test_point_meets_the_energy_identity(solution):
    """A8.5: W + W' = sum psi_k i_k = 3/2 (psi_d i_d + psi_q i_q), to Newton's tolerance."""
    work = 1.5 * (solution.psi_d * 8.0 + solution.psi_q * 4.0)
    assert solution.energy + solution.coenergy == pytest.approx(work, rel=1e-5)


def test_a_broken_pipe_stays_an_error_after_meshing():
    """The mesher's library makes it the end of the process; a program that calls us must live."""
    code = (
        "import os, sys; from lamwright.app.point import read_machine, solve\n"
        "solve(read_machine(sys.argv[1]), i_d=8.0, i_q=4.0, angle_deg=2.5)\n"
        "reader, writer = os.pipe(); os.close(reader)\n"
        "try: os.write(writer, b'x')\n"
        "except BrokenPipeError: print('alive')"
    )
    done = python(code, DEMO)
    assert (done.returncode, done.stdout) == (0, "alive\n"), done.stderr
