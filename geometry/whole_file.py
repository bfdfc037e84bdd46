"""Files that appear whole or not at all."""

import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path


@contextmanager
def whole_file(path: Path) -> Iterator[Path]:
    """A temporary file beside `path` that takes its place when the block ends well."""
    temporary = path.with_name(f".{path.name}.{os.getpid()}.tmp")
    try:
        yield temporary
        temporary.replace(path)
    finally:
        temporary.unlink(missing_ok=True)


def write_text(path: Path, text: str) -> None:
    """Write or replace a whole file: UTF-8 with Unix line ends. Its folder must exist."""
    with whole_file(path) as temporary:
        temporary.write_text(text, encoding="utf-8", newline="\n")
