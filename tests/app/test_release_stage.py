"""A package stands whole or is known as half done; nothing of anybody else is ever deleted."""

import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest
from released import DEMO, demo_package, demo_verdict

from lamwright.app.release_manifest import MANIFEST_FILE
from lamwright.app.release_stage import earlier_files, hashes, staged_package
from lamwright.app.verify import verify
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.files import json_text

FIRST = {"rotor.dxf": "one", "source/steel/old.toml": "card", "verdict.json": "{}"}
SECOND = {"rotor.dxf": "two", "source/design.toml": "design", "verdict.json": "{ }"}
ENDS = ("unlink", "replace", "rmdir", "mkdir")  # what touches the disk between making and standing


class KilledError(BaseException):
    """Stands for an end by force: caught by nobody."""


def made(folder, texts):
    """A release of these files."""
    with staged_package(folder, earlier_files(folder)) as stage:
        for name, text in texts.items():
            file = stage / name
            file.parent.mkdir(parents=True, exist_ok=True)
            file.write_text(text)
        record = {"files": hashes(stage)}
        (stage / MANIFEST_FILE).write_text(json_text(record))


def texts_of(folder):
    """All files but the manifest, by name."""
    return {name: (folder / name).read_text() for name in hashes(folder) if name != MANIFEST_FILE}


def killed_at(monkeypatch, count):
    """Let the process end before the `count`-th touch of the disk; says when none was left."""
    touched = []
    for name in ENDS:
        plain = getattr(Path, name)

        def guarded(self, *args, _plain=plain, **kwargs):
            touched.append(self)
            if len(touched) > count:
                raise KilledError
            return _plain(self, *args, **kwargs)

        monkeypatch.setattr(Path, name, guarded)
    return touched


def test_an_end_by_force_at_any_moment_is_mended_by_the_next_release(tmp_path, monkeypatch):
    """Before every touch of the disk: either package stands whole, or the next run replaces it."""
    for count in range(1000):
        folder = tmp_path / str(count)
        folder.mkdir()
        made(folder, FIRST)
        with monkeypatch.context() as patch:
            touched = killed_at(patch, count)
            try:
                made(folder, SECOND)
                break
            except KilledError:
                assert len(touched) > count
        if (folder / MANIFEST_FILE).is_file():
            own = (FIRST, SECOND)
            kept = {k: v for k, v in texts_of(folder).items() if not k.startswith(".unfinished-")}
            assert kept in own
        made(folder, SECOND)
        assert texts_of(folder) == SECOND
    assert texts_of(folder) == SECOND
    assert not (folder / "source" / "steel").exists()
    assert count > 10


def half_done(folder, monkeypatch):
    """A folder in which the second release was ended after its first file was moved."""
    made(folder, FIRST)
    plain = Path.replace

    def ended(self, target):
        if Path(target) == folder / "source" / "design.toml":
            raise KilledError
        return plain(self, target)

    with monkeypatch.context() as patch:
        patch.setattr(Path, "replace", ended)
        with pytest.raises(KilledError):
            made(folder, SECOND)
    assert not (folder / MANIFEST_FILE).exists()


def test_a_file_of_somebody_else_in_a_half_done_package_is_left_alone(tmp_path, monkeypatch):
    """Refused by name, and everything stays: a new file, a changed one, a link."""
    half_done(tmp_path, monkeypatch)
    before = hashes(tmp_path)
    stranger = tmp_path / "letter.txt"
    stranger.write_text("mine")
    with pytest.raises(LamwrightError, match=r"holds letter\.txt, which is of no package"):
        made(tmp_path, SECOND)
    stranger.unlink()
    stranger.symlink_to(tmp_path / "rotor.dxf")
    with pytest.raises(LamwrightError, match=r"holds letter\.txt, which is of no package"):
        made(tmp_path, SECOND)
    stranger.unlink()
    (tmp_path / "rotor.dxf").write_text("worked on by hand")
    with pytest.raises(LamwrightError, match=r"holds rotor\.dxf, which is of no package"):
        made(tmp_path, SECOND)
    assert {k: v for k, v in hashes(tmp_path).items() if k != "rotor.dxf"} == {
        k: v for k, v in before.items() if k != "rotor.dxf"
    }


def test_a_run_that_fails_keeps_what_it_found(tmp_path, monkeypatch):
    """An earlier package stands as before; a half-done one can still be replaced."""
    (tmp_path / "whole").mkdir()
    made(tmp_path / "whole", FIRST)
    (tmp_path / "half").mkdir()
    half_done(tmp_path / "half", monkeypatch)
    before = hashes(tmp_path / "whole")
    for name in ("whole", "half"):
        with pytest.raises(ValueError, match="null"):
            made(tmp_path / name, {**SECOND, "no\0name": ""})
    assert hashes(tmp_path / "whole") == before
    made(tmp_path / "half", SECOND)
    assert texts_of(tmp_path / "half") == SECOND


def test_two_releases_into_one_folder_do_not_mix(tmp_path):
    """The second is refused while the first is at work."""
    with staged_package(tmp_path, {}) as stage:
        (stage / MANIFEST_FILE).write_text(json_text({"files": {}}))
        with pytest.raises(LamwrightError, match="at work in it; wait"):
            earlier_files(tmp_path)
    assert earlier_files(tmp_path).keys() == {MANIFEST_FILE}


@pytest.mark.slow
def test_a_release_killed_while_it_moves_files_is_replaced(tmp_path):
    """SIGKILL, no exception: before the sixth file is moved; then the same command again."""
    code = (
        "import os, signal, sys, itertools\n"
        "from pathlib import Path\n"
        "from lamwright.app.cli import main\n"
        f"out, plain, moved = Path({str(tmp_path / 'out')!r}), Path.replace, itertools.count()\n"
        "def ended(self, target):\n"
        "    if Path(target).parent == out and next(moved) == 5:\n"
        "        os.kill(os.getpid(), signal.SIGKILL)\n"
        "    return plain(self, target)\n"
        "if sys.argv.pop(1) == 'kill': Path.replace = ended\n"
        "main()\n"
    )
    args = ["release", str(DEMO), "--out", str(tmp_path / "out"), "--verdict", str(demo_verdict())]
    args += ["--strip-width", "300", "--strip-edge", "3"]

    def run(how):
        line = [sys.executable, "-c", code, how, *args]
        return subprocess.run(line, capture_output=True, text=True, env=os.environ, check=False)

    assert run("kill").returncode == -signal.SIGKILL
    assert not (tmp_path / "out" / MANIFEST_FILE).exists()
    assert (tmp_path / "out" / "rotor.pdf").exists()
    again = run("go")
    assert (again.returncode, "Traceback" in again.stderr) == (0, False)
    assert hashes(tmp_path / "out") == hashes(demo_package())
    assert verify(tmp_path / "out").changes == ()
