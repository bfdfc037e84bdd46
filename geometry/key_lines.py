"""Where each key of a TOML file stands, since the standard reader drops line numbers.

One pass over tokens of a text that the standard reader has accepted: a statement is a table
header or `key = value`, and it ends at the first newline outside brackets. Strings and comments
are single tokens, so nothing inside them is taken for a key. Keys inside inline tables and
elements of arrays have no entry; `line_of` falls back to the key that holds them.
"""

import re
import tomllib
from collections.abc import Mapping
from functools import lru_cache
from typing import Any

KeyPath = tuple[str | int, ...]

_TOKEN = re.compile(
    r'"""(?:\\.|[^\\])*?"{3,5}'  # strings over several lines may end in up to two quotes more
    r"|'''.*?'{3,5}"
    r'|"(?:\\.|[^"\\\n])*"'
    r"|'[^'\n]*'"
    r"|\#[^\n]*"
    r"|[A-Za-z0-9_-]+"
    r"|\[\[|\]\]"
    r"|.",
    re.DOTALL,
)


@lru_cache(maxsize=8)
def toml_read(text: str) -> Mapping[str, Any]:
    """What the standard reader makes of a text, to be looked at only: kept for the last texts.

    A design of a study is read by each step that changes it and by its hash, 0.5 ms each time.

    Raises:
        tomllib.TOMLDecodeError: it is no TOML.
    """
    return tomllib.loads(text)


@lru_cache(maxsize=8)
def key_lines(text: str) -> Mapping[KeyPath, int]:
    """Line (from 1) of every table header and key of the valid TOML `text`.

    Elements of an array of tables are counted from 0, as the reader counts them. An array of
    tables itself has the line of its first header.
    """
    lines: dict[KeyPath, int] = {}
    tables: dict[KeyPath, int] = {}  # how many tables each array of tables has so far
    here: KeyPath = ()
    for line, tokens in _statements(text):
        if tokens[0] not in ("[", "[["):
            equals = tokens.index("=")
            _note(lines, here, _parts(tokens[:equals]), line)
            continue
        *parents, last = _parts(tokens[1:-1])
        here = ()
        for part in parents:
            here = _entered((*here, part), tables)
        path = (*here, last)
        lines.setdefault(path, line)
        if tokens[0] == "[[":
            tables[path] = tables.get(path, 0) + 1
        here = _entered(path, tables)
        lines.setdefault(here, line)
    return lines


def line_of(lines: Mapping[KeyPath, int], path: KeyPath) -> int:
    """The line of `path`, or of the nearest table or key around it; 1 where there is none."""
    for length in range(len(path), 0, -1):
        if path[:length] in lines:
            return lines[path[:length]]
    return 1


def _entered(path: KeyPath, tables: Mapping[KeyPath, int]) -> KeyPath:
    """The path itself, or its newest table where it is an array of tables."""
    return (*path, tables[path] - 1) if path in tables else path


def _note(lines: dict[KeyPath, int], here: KeyPath, parts: list[str], line: int) -> None:
    """Enter a key, dotted or not, and the tables a dotted key opens."""
    for count in range(1, len(parts) + 1):
        lines.setdefault((*here, *parts[:count]), line)


def _parts(tokens: list[str]) -> list[str]:
    """Bare and quoted parts of a dotted key, unquoted."""
    return [_unquoted(token) for token in tokens if token != "."]


def _unquoted(token: str) -> str:
    return next(iter(tomllib.loads(f"{token} = 0"))) if token[0] in "\"'" else token


def _statements(text: str) -> list[tuple[int, list[str]]]:
    """First line and tokens of each statement, blanks and comments left out."""
    statements: list[tuple[int, list[str]]] = []
    tokens: list[str] = []
    line = start = 1
    depth = 0
    for token in (match.group() for match in _TOKEN.finditer(text)):
        if token == "\n" and depth == 0 and tokens:
            statements.append((start, tokens))
            tokens = []
        elif not token.isspace() and not token.startswith("#"):
            start = start if tokens else line
            tokens.append(token)
            if token[0] in "[{":
                depth += len(token)
            elif token[0] in "]}":
                depth -= len(token)
        line += token.count("\n")
    return [*statements, (start, tokens)] if tokens else statements
