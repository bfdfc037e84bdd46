"""Files of results: whole or none.

A run's files are made in a hidden folder inside the asked one and moved out by rename, the verdict
last: where a `verdict.json` stands, all files beside it belong to it.
"""

import csv
import io
import json
import shutil
import tempfile
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path

from lamwright.geometry.errors import LamwrightError

VERDICT_FILE = "verdict.json"


def json_text(record: Mapping[str, object]) -> str:
    """The record as JSON.

    Raises:
        ValueError: a number is not finite; such a file is never written.
    """
    return json.dumps(record, indent=2, allow_nan=False, ensure_ascii=False) + "\n"


def prepared_folder(folder: Path) -> Path:
    """The folder, made where it is missing and tried by writing.

    Raises:
        LamwrightError: it is a file, or cannot be made or written.
    """
    if folder.exists() and not folder.is_dir():
        raise LamwrightError(f"--out {folder}: is a file; accepted a folder, new or existing")
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=folder):
            pass
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise LamwrightError(f"--out {folder}: cannot be written: {reason.lower()}") from None
    return folder


@contextmanager
def staged(folder: Path, last: str = VERDICT_FILE) -> Iterator[Path]:
    """A hidden folder whose files move to `folder` when the block ends well, `last` as the last.

    Files below it move to the same place below `folder`.
    """
    stage = Path(tempfile.mkdtemp(prefix=".unfinished-", dir=folder))
    try:
        yield stage
        (folder / last).unlink(missing_ok=True)
        files = [file for file in stage.rglob("*") if not file.is_dir()]
        for file in sorted(files, key=lambda file: (file == stage / last, file)):
            target = folder / file.relative_to(stage)
            target.parent.mkdir(parents=True, exist_ok=True)
            file.replace(target)
    finally:
        shutil.rmtree(stage, ignore_errors=True)


def csv_text(header: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """Comma-separated values with a header row."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    return stream.getvalue()
