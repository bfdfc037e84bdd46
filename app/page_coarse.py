"""The coarse verdict of a design, made in a worker process that stays warm."""

import json
import time
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry import dxf
from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.section import CrossSection
from lamwright.geometry.whole_file import whole_file, write_text

from .page_folder import Folder
from .page_outline import outlined
from .pool import Crew, WorkerLost, spare_cores

if TYPE_CHECKING:
    from .coarse_work import CoarseWork, Hand

RESULT_FILE, FIELD_FILE = "result.json", "field.bin"


class CoarseDesk:
    """What a worker has imported, and its second process; nothing of a design stays in it."""

    def __init__(self) -> None:
        """Start the second process, where there is a core for it."""
        self._crew = _hired_crew()

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
            LamwrightError: as of `coarse_work`, or a card has changed.
        """
        from .coarse_work import give_back
        from .page_field import drawn_field, drawn_stress, field_file
        from .page_result import coarse_record

        began = time.perf_counter()
        one = outlined(Folder(root), path, text)
        if one.machine is None or one.section is None:
            raise LamwrightError(one.found[0].text)
        if design_hash(one.machine.design, one.machine.cards) != due:
            raise LamwrightError(f"{path}: a card was changed meanwhile; ask again")
        work = self._work(one.machine, one.section)
        quick = work.quick
        field = drawn_field(one.section, quick.field, work.drawn, work.sign)
        data = field_file(one.section, field, drawn_stress(one.section, quick.solution))
        out.mkdir(parents=True, exist_ok=True)
        with whole_file(out / FIELD_FILE) as temporary:
            temporary.write_bytes(data)
        record = coarse_record(one.machine, quick, time.perf_counter() - began)
        write_text(out / RESULT_FILE, json.dumps(record, allow_nan=False))
        del work, quick, field, data
        give_back()

    def _work(self, machine: Machine, section: CrossSection) -> "CoarseWork":
        from .coarse_work import Hand, coarse_work

        try:
            return coarse_work(machine, section, self._crew)
        except WorkerLost:  # memory ran out there, perhaps; this process does it all, once
            self._crew.__exit__()
            work = coarse_work(machine, section, Crew(Hand, 0))
            self._crew = _hired_crew()
            return work


def coarse_desk() -> CoarseDesk:
    """A desk with everything imported that the first verdict would else wait for.

    What reads drawn parts takes 16 MB and two thirds of a second, while a browser opens.
    """
    from . import page_field, page_result  # noqa: F401

    desk = CoarseDesk()  # its second process gets on meanwhile
    dxf.load()
    return desk


def make_hand() -> "Hand":
    """An empty hand, in a process that has imported what it needs."""
    from .coarse_work import Hand

    return Hand()


def _hired_crew() -> "Crew[Hand]":
    return Crew(make_hand, min(1, spare_cores()))
