"""The folder that a page may see: names inside it, its designs and studies, drafts, saving.

A name is a posix path counted from the folder. It is resolved with all links before it is used, so
that neither `..` nor a link leads outside; what begins with a dot is the page's or another
program's own and has no name here.
"""

import contextlib
import errno
import hashlib
import json
import os
import re
import stat
import tomllib
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path, PurePosixPath
from typing import IO, Any, Literal

from lamwright.geometry.design_faults import shown
from lamwright.geometry.design_file import LARGEST_FILE, Machine, read_machine
from lamwright.geometry.errors import DesignError, LamwrightError
from lamwright.geometry.whole_file import write_text

CACHE = ".lamwright-page"  # drafts and results; may be removed while no page is open
DRAFTS = "drafts"
DEEPEST = 4  # folders below the given one that are searched for designs
MOST_LISTED = 400  # files; a larger folder is listed in part
LONGEST_NAME = 400  # characters of a name
LONGEST_PART = 240  # bytes of one file's or folder's: with a temporary file's ending below 255
# Of new names: a folder that is taken to another system must hold there what it held here.
NOT_PORTABLE = re.compile(
    r'[<>:"|?*]|[ .]$|^(con|prn|aux|nul|com[0-9]|lpt[0-9])(\.|$)', re.IGNORECASE
)
# Tables and keys of a design that name other files.
NAMING = (
    ("steel", "rotor_card"),
    ("steel", "stator_card"),
    ("magnet", "card"),
    ("stator", "outline_dxf"),
    ("rotor", "outline_dxf"),
)


class Outside(LamwrightError, ValueError):
    """A name that leads out of the folder, or is none."""


class ChangedOnDisk(LamwrightError, RuntimeError):
    """A file that is no longer what was opened."""


@dataclass(frozen=True, slots=True)
class Listed:
    """A file of the folder that the page can open."""

    path: str
    name: str
    kind: Literal["design", "study"]


@dataclass(frozen=True, slots=True)
class Draft:
    """A text that was kept and not saved."""

    text: str
    sha256: str | None  # of the file it began from; None of one that was not there


@dataclass(frozen=True, slots=True)
class Folder:
    """A folder, resolved."""

    root: Path

    @classmethod
    def of(cls, path: Path) -> "Folder":
        """The folder at `path`.

        Raises:
            LamwrightError: there is none.
        """
        if not path.is_dir():
            raise LamwrightError(f"--folder {path}: no such folder")
        return cls(path.resolve())

    @property
    def cache(self) -> Path:
        """Where drafts and results are kept; made where it is missing."""
        cache = self.root / CACHE
        for place in (cache, *(cache / one for one in (DRAFTS, "coarse", "full"))):
            if place.is_symlink():
                raise Outside(f"{place.relative_to(self.root)}: is a link; remove it")
        try:
            cache.mkdir(exist_ok=True)
        except OSError as error:
            reason = (error.strerror or "unknown reason").lower()
            raise LamwrightError(f"{cache}: cannot be made, {reason}") from None
        return cache

    def file(self, name: str) -> Path:
        """The file of a name, which need not exist.

        Raises:
            Outside: the name leads out of the folder, or is none.
        """
        fault = Outside(f"{shown(name)}: outside the page's folder, or no name in it")
        parts = PurePosixPath(name).parts
        is_name = 0 < len(name) <= LONGEST_NAME and name.isprintable() and "\\" not in name
        if not is_name or not parts or any(part.startswith((".", "/")) for part in parts):
            raise fault
        if any(len(part.encode()) > LONGEST_PART for part in parts):
            raise Outside(f"{shown(name)}: too long; accepted names up to {LONGEST_PART} bytes")
        try:
            path = self.root.joinpath(*parts).resolve()
        except (OSError, ValueError, RuntimeError):
            raise fault from None
        if not path.is_relative_to(self.root):
            raise fault
        return path

    def new_file(self, name: str) -> Path:
        """The file of a name that is to be written: one that is there, or could be anywhere.

        Raises:
            Outside: as of `file`.
            LamwrightError: there is something else than a file, or no folder for it, or the name
                is none on another system.
        """
        path = self._new(name)
        if not path.parent.is_dir():
            raise LamwrightError(f"{shown(name)}: no such folder; accepted one that is there")
        if path.exists() and not path.is_file():
            raise LamwrightError(f"{shown(name)}: is no file; accepted a file, new or existing")
        return path

    def new_folder(self, name: str) -> Path:
        """The folder of a name that results are to be written to: there, or to be made.

        Raises:
            Outside: as of `file`.
            LamwrightError: there is a file, also on its way, or the name is none elsewhere.
        """
        path = self._new(name)
        there = next(place for place in (path, *path.parents) if place.exists())
        if not there.is_dir():
            where = there.relative_to(self.root).as_posix()
            raise LamwrightError(f"{where}: is a file; accepted a folder, new or existing")
        return path

    def _new(self, name: str) -> Path:
        path = self.file(name)
        parts = PurePosixPath(name).parts
        if not path.exists() and (odd := next(filter(NOT_PORTABLE.search, parts), None)):
            raise LamwrightError(
                f'{shown(odd)}: a name that other systems refuse; accepted none with < > : " | ? '
                "*, with a dot or space at its end, or of a device"
            )
        return path

    def name_of(self, path: Path) -> str:
        """The name of a file in the folder.

        Raises:
            Outside: it lies elsewhere.
        """
        path = path.resolve()
        if not path.is_relative_to(self.root):
            raise Outside(f"{path}: outside the page's folder {self.root}; state --folder")
        return path.relative_to(self.root).as_posix()

    def design_file(self, name: str) -> Path:
        """The file of a name that ends as designs and studies do.

        Raises:
            Outside: it leads out of the folder, or ends in another way.
        """
        if not name.endswith(".toml"):
            raise Outside(f"{shown(name)}: accepted names that end in .toml")
        return self.file(name)

    def text(self, name: str) -> tuple[str, str]:
        """The text of a design or study, and the SHA-256 in hex of its bytes.

        Raises:
            LamwrightError: it cannot be read, or leads out of the folder.
        """
        path = self.design_file(name)
        try:
            with _opened(path) as file:
                data = file.read(LARGEST_FILE + 1)
            if len(data) > LARGEST_FILE:
                raise LamwrightError(f"{name}: too large; accepted {LARGEST_FILE // 1000} kB")
            text = data.decode("utf-8-sig").replace("\r\n", "\n")
        except UnicodeDecodeError:
            raise LamwrightError(f"{name}: not UTF-8 text") from None
        except OSError as error:
            reason = (error.strerror or "unknown reason").lower()
            raise LamwrightError(f"{name}: cannot be read, {reason}") from None
        return text, hashlib.sha256(data).hexdigest()

    def machine(self, name: str, text: str) -> Machine:
        """The machine of a text that stands for the design file of that name.

        Raises:
            DesignError: it cannot be used; one line for each fault, as of the file's bare name.
            Outside: it names a file outside the folder.
        """
        path = self.design_file(name)
        self.keep_inside(name, text)
        try:
            return read_machine(path, text)
        except DesignError as error:
            raise DesignError(str(error).replace(f"{path.parent}/", "")) from None

    def keep_inside(self, name: str, text: str) -> None:
        """Refuse a design that names files outside; what is not TOML is told by its reader.

        Raises:
            Outside: it does.
        """
        path = self.design_file(name)
        try:
            data = tomllib.loads(text)
        except (ValueError, RecursionError):
            return
        for table, key in NAMING:
            named = data.get(table)
            file = named.get(key) if isinstance(named, dict) else None
            if not isinstance(file, str):
                continue
            with contextlib.suppress(OSError, ValueError, RuntimeError):
                # With its links followed, and as `mirrored` copies it, by its parts.
                places = (path.parent / file).resolve(), Path(os.path.normpath(path.parent / file))
                if all(place.is_relative_to(self.root) for place in places):
                    continue
            raise Outside(
                f"{table}.{key} = {shown(file)}: outside the page's folder; start the page with "
                "a --folder that holds it"
            )

    def mirrored(self, name: str, text: str, target: Path) -> Path:
        """A copy of a text and of the files that it names, in their places to each other.

        Args:
            name: of the design.
            text: of the design, which can be used.
            target: folder, made here, that stands for this one.

        Returns:
            The copy's file.
        """
        path, data = self.design_file(name), tomllib.loads(text)
        for table, key in NAMING:
            file = data.get(table, {}).get(key)
            if isinstance(file, str):
                place = Path(os.path.normpath(path.parent / file))
                copy = target / place.relative_to(self.root)
                copy.parent.mkdir(parents=True, exist_ok=True)
                copy.write_bytes(place.read_bytes())
        copy = target / path.relative_to(self.root)
        copy.parent.mkdir(parents=True, exist_ok=True)
        copy.write_text(text, encoding="utf-8")
        return copy

    def listed(self) -> list[Listed]:
        """Designs and studies in the folder, by name."""
        found = []
        for path in sorted(self._toml_files()):
            with contextlib.suppress(OSError, ValueError, RecursionError):
                if path.stat().st_size <= LARGEST_FILE and (one := self._kind(path)):
                    found.append(one)
        return found

    def _toml_files(self) -> Iterator[Path]:
        count = 0
        for here, folders, files in os.walk(self.root):
            depth = len(Path(here).relative_to(self.root).parts)
            folders[:] = sorted(one for one in folders if not one.startswith("."))
            if depth >= DEEPEST:
                folders.clear()
            for file in sorted(files):
                path = Path(here, file)
                if file.endswith(".toml") and not file.startswith(".") and path.is_file():
                    count += 1
                    if count > MOST_LISTED:
                        return
                    with contextlib.suppress(Outside):  # as one with a backslash
                        if self.file(path.relative_to(self.root).as_posix()) == path.resolve():
                            yield path

    def _kind(self, path: Path) -> Listed | None:
        data = tomllib.loads(path.read_text(encoding="utf-8-sig"))
        name = path.relative_to(self.root).as_posix()
        shown = str(data.get("name", ""))[:LONGEST_NAME]
        if "stator" in data and "rotor" in data:
            return Listed(name, shown, "design")
        return Listed(name, shown, "study") if "vary" in data and "base" in data else None

    def save(self, name: str, text: str, sha256: str | None, *, replace: bool = False) -> str:
        """Write a design file as a whole, comments and all, and drop its draft.

        A change between the last look and the renaming, microseconds, is not seen.

        Args:
            name: of the file.
            text: its new text.
            sha256: of the file as it was opened, None of one that is to be new.
            replace: write it whatever is there.

        Returns:
            SHA-256 in hex of the new file.

        Raises:
            ChangedOnDisk: the file is another now.
            LamwrightError: it cannot be written, or leads out of the folder.
        """
        self.design_file(name)
        path = self.new_file(name)
        now = path.read_bytes() if path.is_file() else None
        if not replace and sha256 != (None if now is None else hashlib.sha256(now).hexdigest()):
            raise ChangedOnDisk(
                f"{name}: another file now than was opened; open it again, or save under another "
                "name, or replace it"
            )
        data = text.replace("\n", "\r\n") if now is not None and b"\r\n" in now else text
        try:
            write_text(path, data)
        except OSError as error:
            reason = (error.strerror or "unknown reason").lower()
            raise LamwrightError(
                f"{name}: cannot be written, {reason}; its draft is kept"
            ) from None
        self.discard(name)
        return hashlib.sha256(data.encode()).hexdigest()

    def keep(self, name: str, text: str, sha256: str | None) -> None:
        """Keep a text as the draft of a design file."""
        self.design_file(name)
        path = self._draft(name)
        path.parent.mkdir(exist_ok=True)
        write_text(path, json.dumps({"name": name, "text": text, "sha256": sha256}))

    def draft(self, name: str) -> Draft | None:
        """The draft of a design file, None where there is none that can be read."""
        try:
            record = _record(self._draft(name))
            return Draft(str(record["text"]), record["sha256"])
        except (OSError, ValueError, KeyError, TypeError):
            return None

    def unsaved(self) -> list[str]:
        """Names of drafts that were never a file."""
        found = []
        for path in sorted((self.cache / DRAFTS).glob("*.json")):
            with contextlib.suppress(OSError, ValueError, KeyError, TypeError, AttributeError):
                record = _record(path)
                name, is_new = str(record["name"]), record["sha256"] is None
                if is_new and self._draft(name) == path and not self.design_file(name).exists():
                    found.append(name)
        return found[:MOST_LISTED]

    def discard(self, name: str) -> None:
        """Drop the draft of a design file."""
        self._draft(name).unlink(missing_ok=True)

    def _draft(self, name: str) -> Path:
        return self.cache / DRAFTS / f"{hashlib.sha256(name.encode()).hexdigest()[:32]}.json"


def _opened(path: Path) -> IO[bytes]:
    """A file to read; a pipe or device, which might never answer, is refused as a folder is."""
    mode = path.stat().st_mode
    if not stat.S_ISREG(mode) and not stat.S_ISDIR(mode):
        raise OSError(errno.EINVAL, "not a regular file")
    return path.open("rb")


def _record(path: Path) -> dict[str, Any]:
    with _opened(path) as file:
        record = json.loads(file.read().decode())
    if not isinstance(record, dict):
        raise ValueError("no draft")
    return record
