"""Where a package is made before it stands: a hidden folder with a journal inside the asked one.

Files are moved out by rename, the manifest last. A run killed before that leaves its hidden folder;
by the journal in it the next run knows which files are of a release, its own or an earlier one's,
and replaces them. A file that no journal and no manifest knows is never touched.
"""

import shutil
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.files import json_text

from .ledger_file import LOCK_FILE, is_locked, locked
from .release_manifest import MANIFEST_FILE, file_sha256, read_record

PREFIX = ".unfinished-"
JOURNAL_FILE = "journal.json"
INNER = "package"  # folder of the stage that the package is made in
MARK = "lamination package in the making"
AN_EARLIER = "an empty folder, or that of an earlier package"


def hashes(folder: Path) -> dict[str, str]:
    """SHA-256 of every file below a folder, by its name there."""
    return {
        file.relative_to(folder).as_posix(): file_sha256(file)
        for file in sorted(folder.rglob("*"))
        if file.is_file()
    }


def earlier_files(folder: Path) -> dict[str, str]:
    """Hashes of what an earlier release left in the folder, whole or half done, by name.

    Raises:
        LamwrightError: the folder holds anything else, or another release is at work in it.
    """
    stages = _stages(folder)
    if any(is_locked(stage) for stage in stages):
        raise LamwrightError(f"--out {folder}: another release is at work in it; wait for its end")
    inside = {stage.name for stage in stages}
    present = sorted(
        name
        for file in folder.rglob("*")
        if file.is_symlink() or not file.is_dir()
        for name in (file.relative_to(folder).as_posix(),)
        if name.partition("/")[0] not in inside
    )
    ours = {MANIFEST_FILE}
    if MANIFEST_FILE in present:
        files = read_record(folder / MANIFEST_FILE, AN_EARLIER).get("files")
        ours |= set(files) if isinstance(files, dict) else set()
    journals = [_journal(stage) for stage in stages]
    found: dict[str, str] = {}
    for name in present:
        file = folder / name
        digests = {digest for journal in journals for digest in journal.get(name, ())}
        is_known = not file.is_symlink() and (name in ours or bool(digests))
        digest = file_sha256(file) if is_known else ""
        if not is_known or (name not in ours and digest not in digests):
            raise LamwrightError(
                f"--out {folder}: holds {name}, which is of no package; accepted {AN_EARLIER}"
            )
        found[name] = digest
    return found


@contextmanager
def staged_package(folder: Path, earlier: dict[str, str]) -> Iterator[Path]:
    """A hidden folder whose files replace the earlier ones when the block ends well.

    Args:
        folder: of the package.
        earlier: what stands there now, from `earlier_files`.
    """
    left = _stages(folder)
    stage = Path(tempfile.mkdtemp(prefix=PREFIX, dir=folder))
    _note(stage, earlier)
    lock = locked(stage)
    try:
        for one in left:  # what their journals know is in this one's now
            shutil.rmtree(one, ignore_errors=True)
        inner = stage / INNER
        inner.mkdir()
        try:
            yield inner
            made = hashes(inner)
            _note(stage, earlier, made)
        except BaseException:
            shutil.rmtree(inner, ignore_errors=True)
            if not earlier or (folder / MANIFEST_FILE).is_file():
                shutil.rmtree(stage, ignore_errors=True)
            raise  # else the journal stays, for the half-done package is still there
        # An end by force or a full disk from here on leaves the journal to the next run.
        _move(inner, folder, set(made), set(earlier))
        shutil.rmtree(stage, ignore_errors=True)
    finally:
        lock.close()


def _move(inner: Path, folder: Path, made: set[str], earlier: set[str]) -> None:
    """All files to their places, what is left of the earlier package out, the manifest last."""
    (folder / MANIFEST_FILE).unlink(missing_ok=True)
    for name in sorted(made - {MANIFEST_FILE}):
        target = folder / name
        target.parent.mkdir(parents=True, exist_ok=True)
        (inner / name).replace(target)
    for name in sorted(earlier - made):
        (folder / name).unlink(missing_ok=True)
        with suppress(OSError):  # not empty, or not there
            (folder / name).parent.rmdir()
    (inner / MANIFEST_FILE).replace(folder / MANIFEST_FILE)


def _note(stage: Path, *known: dict[str, str]) -> None:
    """Write the journal: every name with the hashes its file may have."""
    files: dict[str, list[str]] = {}
    for hashed in known:
        for name, digest in hashed.items():
            files.setdefault(name, []).append(digest)
    write_text(stage / JOURNAL_FILE, json_text({"of": MARK, "files": files}))


def _journal(stage: Path) -> dict[str, list[str]]:
    """Names of files that releases put or found in the folder, with the hashes each may have."""
    if not (stage / JOURNAL_FILE).is_file():
        return {}
    files = read_record(stage / JOURNAL_FILE, AN_EARLIER).get("files")
    return files if isinstance(files, dict) else {}


def _stages(folder: Path) -> list[Path]:
    """Folders that releases made and did not clear away."""
    found = (stage for stage in sorted(folder.glob(f"{PREFIX}*")) if not stage.is_symlink())
    return [stage for stage in found if stage.is_dir() and _is_ours(stage)]


def _is_ours(stage: Path) -> bool:
    """Whether there is a journal of a release, or nothing but the beginning of one."""
    journal = stage / JOURNAL_FILE
    if journal.is_file():
        try:
            return read_record(journal, AN_EARLIER).get("of") == MARK
        except LamwrightError:
            return False
    names = [file.name for file in stage.rglob("*") if not file.is_dir()]
    return all(name == LOCK_FILE or name.startswith(f".{JOURNAL_FILE}.") for name in names)
