"""What the page asks for, as functions of JSON objects; `page_server` gives them their addresses.

Everything that comes in is data: a name is looked up in the folder, a text is read as a design, and
nothing of it is ever put into markup, a command or a path outside.
"""

import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from lamwright.geometry.errors import LamwrightError

from .page_drawing import Record
from .page_folder import Folder
from .page_outline import key_records, timed_outline
from .study import Value
from .version import version

LONGEST_KEY = 200
MOST_CHANGES = 200
LARGEST_CHANGE = 1e300  # JSON's 1e400 reads as infinite


class BadRequest(LamwrightError, ValueError):
    """A request that lacks something, or has it in another form."""


@dataclass(frozen=True, slots=True)
class Page:
    """What the server works on."""

    folder: Folder
    start: str | None  # the design that the page was started with


def opened_page(design: Path | None, folder: Path | None) -> Page:
    """The page of a design, of a folder, or of the working folder.

    Raises:
        LamwrightError: one of them is not there, or the design or a file that it names lies
            outside the folder.
    """
    if folder is None:
        folder = Path() if design is None else design.parent
    page = Folder.of(folder)
    if design is None:
        return Page(page, None)
    if not design.is_file():
        raise LamwrightError(f"{design}: no such file; accepted a design file")
    name = page.name_of(design)
    page.keep_inside(name, page.text(name)[0])
    return Page(page, name)


def page_record(page: Page) -> Record:
    """What there is to open."""
    listed = page.folder.listed()
    return {
        "version": version(),
        "folder": page.folder.root.name,
        "start": page.start,
        "designs": [
            *({"path": o.path, "name": o.name} for o in listed if o.kind == "design"),
            *({"path": name, "name": "not saved"} for name in page.folder.unsaved()),
        ],
        "studies": [{"path": o.path, "name": o.name} for o in listed if o.kind == "study"],
    }


def design_record(page: Page, path: str) -> Record:
    """A design file's text, and its draft where that says something else.

    One that is a draft only, as a study's design before it is saved, has no text and no SHA-256.
    """
    draft = page.folder.draft(path)
    is_new = draft is not None and not page.folder.design_file(path).exists()
    text, sha256 = ("", None) if is_new else page.folder.text(path)
    kept: Record | None = None
    if draft is not None and draft.text != text:
        kept = {"text": draft.text, "sha256": draft.sha256, "is_stale": draft.sha256 != sha256}
    return {
        "path": path,
        "name": Path(path).name,
        "text": text,
        "sha256": sha256,
        "draft": kept,
        "keys": key_records(text),
    }


def name_record(page: Page, query: Mapping[str, str]) -> Record:
    """What is wrong with a name that something is to be written to, in the words of the refusal.

    Asked before it is tried, an answer like any other: what a user mistyped is no failed request.
    """
    name, use = query["path"], query["use"]
    try:
        if use == "design":
            page.folder.design_file(name)
        path = page.folder.new_file(name) if use == "design" else page.folder.new_folder(name)
    except LamwrightError as error:
        return {"fault": str(error), "exists": False}
    return {"fault": None, "exists": path.exists()}


def outline(page: Page, body: Mapping[str, object]) -> Record:
    """The outline of a text with some values changed; kept as a draft where that is asked for."""
    path, text = text_of(body, "path"), text_of(body, "text")
    record = timed_outline(
        page.folder, path, text, _changes(body), remedies=flag_of(body, "remedies")
    )
    if flag_of(body, "keep"):
        page.folder.keep(path, str(record["text"]), maybe_text_of(body, "sha256"))
    return record


def keep_draft(page: Page, body: Mapping[str, object]) -> Record:
    """Keep a text, whatever it says."""
    page.folder.keep(text_of(body, "path"), text_of(body, "text"), maybe_text_of(body, "sha256"))
    return {"kept": True}


def discard_draft(page: Page, body: Mapping[str, object]) -> Record:
    """Drop a draft."""
    page.folder.design_file(path := text_of(body, "path"))
    page.folder.discard(path)
    return {"discarded": True}


def save(page: Page, body: Mapping[str, object]) -> Record:
    """Write a design file."""
    path, text = text_of(body, "path"), text_of(body, "text")
    sha256 = maybe_text_of(body, "sha256")
    done = page.folder.save(path, text, sha256, replace=flag_of(body, "replace"))
    return {"path": path, "sha256": done}


def json_object(data: bytes | str) -> dict[str, object]:
    """The JSON object in a body or frame.

    Raises:
        BadRequest: it is none.
    """
    try:
        body = json.loads(data, parse_constant=_no_number)
    except (ValueError, RecursionError):
        raise BadRequest("not JSON; accepted an object") from None
    if not isinstance(body, dict):
        raise BadRequest("not a JSON object")
    escape = "\\u"  # which halves of characters need
    if escape.encode() in data if isinstance(data, bytes) else escape in data:
        try:
            json.dumps(body, ensure_ascii=False).encode()
        except ValueError:
            raise BadRequest("a text holds half a character; accepted Unicode") from None
    return body


def _no_number(name: str) -> float:
    raise ValueError(name)


def text_of(body: Mapping[str, object], name: str) -> str:
    """A text of a request.

    Raises:
        BadRequest: there is none.
    """
    value = body.get(name)
    if not isinstance(value, str):
        raise BadRequest(f"{name}: missing; accepted a text")
    return value


def maybe_text_of(body: Mapping[str, object], name: str) -> str | None:
    """A text of a request, None where it has none."""
    return None if body.get(name) is None else text_of(body, name)


def whole_of(body: Mapping[str, object], name: str) -> int:
    """A whole number, at least 0, of a request.

    Raises:
        BadRequest: there is none.
    """
    value = body.get(name)
    if isinstance(value, bool) or not isinstance(value, int) or not 0 <= value < 2**53:
        raise BadRequest(f"{name}: missing; accepted a whole number from 0")
    return value


def flag_of(body: Mapping[str, object], name: str) -> bool:
    """Whether a request says yes to something; no is understood."""
    value = body.get(name, False)
    if not isinstance(value, bool):
        raise BadRequest(f"{name}: accepted true or false")
    return value


def _changes(body: Mapping[str, object]) -> dict[str, Value]:
    changes = body.get("changes") or {}
    if not isinstance(changes, dict) or len(changes) > MOST_CHANGES:
        raise BadRequest("changes: accepted up to 200 values by their keys")
    for key, value in changes.items():
        is_value = isinstance(value, str | int | float) and not isinstance(value, bool)
        is_value = is_value and (isinstance(value, str) or abs(value) < LARGEST_CHANGE)
        if len(key) > LONGEST_KEY or not is_value:
            raise BadRequest("changes: accepted numbers and file names by the design's keys")
    return changes
