"""The coarse verdict of a design, made in a worker process that stays warm."""

import ctypes
import json
import os
import time
from pathlib import Path

from lamwright.geometry.design_file import design_hash
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import whole_file, write_text

from .page_folder import Folder
from .page_outline import outlined

RESULT_FILE, FIELD_FILE = "result.json", "field.bin"


class CoarseDesk:
    """What a worker has imported; nothing of a design stays in it."""

    def warm(self) -> None:
        """Answer once all is imported."""

    def verdict(self, root: Path, path: str, text: str, due: str, out: Path) -> None:
        """Compute a design's coarse verdict and write it to the folder `out`.

        Args:
            root: the page's folder.
            path: name of the design there.
            text: of the design.
            due: its hash, by the cards as they were when it was asked for.
            out: made here; the result's file comes last.

        Raises:
            LamwrightError: as of `study_quick`, or a card has changed.
        """
        from .page_field import drawn_field, drawn_stress, field_as_drawn, field_file
        from .page_result import coarse_record
        from .study_quick import quick_work

        began = time.perf_counter()
        one = outlined(Folder(root), path, text)
        if one.machine is None or one.section is None:
            raise LamwrightError(one.found[0].text)
        if design_hash(one.machine.design, one.machine.cards) != due:
            raise LamwrightError(f"{path}: a card was changed meanwhile; ask again")
        work = quick_work(one.machine, one.section)
        design, section = one.machine.design, one.section
        solution, sign = field_as_drawn(design, section, work.field)
        field = drawn_field(section, work.field, solution, sign)
        data = field_file(section, field, drawn_stress(section, work.solution))
        out.mkdir(parents=True, exist_ok=True)
        with whole_file(out / FIELD_FILE) as temporary:
            temporary.write_bytes(data)
        record = coarse_record(one.machine, work, time.perf_counter() - began)
        write_text(out / RESULT_FILE, json.dumps(record, allow_nan=False))
        del work, field, solution, data
        _give_back()


def coarse_desk() -> CoarseDesk:
    """A desk with everything imported that the first verdict would else wait for."""
    from . import page_field, page_result, study_quick  # noqa: F401

    return CoarseDesk()


def _give_back() -> None:
    """Give freed memory back to the system, where the C library has a way (glibc).

    It keeps it else, in pieces: 170 verdicts of different designs took the process from 166 to
    196 MB, with this from 115 to 118 MB (measured).
    """
    trim = getattr(ctypes.CDLL(None), "malloc_trim", None) if os.name == "posix" else None
    if trim is not None:
        trim(0)
