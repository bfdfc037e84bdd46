"""The conditions of `--where`: a small safe language, turned into SQL with parameters.

`saliency_ratio > 6 and passes`, `outcome == "rejected" or not torque_nm / rotor_mass_kg < 3`,
`1 < rotor.barrier[2].end_angle_deg <= 20`, `yield_margin is None`: names of columns, numbers, texts
in quotes, comparisons, + - * /, and, or, not, brackets. A row without a value that is compared
does not fulfil the comparison, nor its opposite.
"""

import ast
import warnings
from dataclasses import dataclass, replace
from typing import Literal

from lamwright.geometry.errors import LamwrightError

from .ledger_rows import Columns, Kind

LONGEST = 1000  # characters; bounds the depth of brackets too
LARGEST = 1e18  # whole numbers of SQLite end above

_COMPARISONS = {
    ast.Lt: "<",
    ast.LtE: "<=",
    ast.Gt: ">",
    ast.GtE: ">=",
    ast.Eq: "=",
    ast.NotEq: "<>",
}
_SUMS = {ast.Add: "+", ast.Sub: "-", ast.Mult: "*", ast.Div: "/"}
_WORDS = 'accepted names, numbers, "texts", < <= > >= == !=, + - * /, and, or, not, brackets'


@dataclass(frozen=True, slots=True)
class Condition:
    """A condition as SQL with a question mark for each parameter."""

    sql: str
    parameters: tuple[float | int | str, ...]


@dataclass(frozen=True, slots=True)
class _Part:
    """A value or a truth in SQL."""

    sql: str
    parameters: tuple[float | int | str, ...]
    kind: Kind | Literal["truth", "nothing"]


def parsed(text: str, columns: Columns) -> Condition:
    """The condition of a text.

    Raises:
        LamwrightError: it is not understood; with the word, and the nearest name there is.
    """
    if len(text) > LONGEST:
        raise LamwrightError(f"--where: {len(text)} characters long; accepted up to {LONGEST}")
    try:
        with warnings.catch_warnings(action="ignore"):  # of `6or`
            tree = ast.parse(text.strip().replace("[*]", "[...]"), mode="eval")
    except (SyntaxError, ValueError, RecursionError, MemoryError) as error:
        raise LamwrightError(f"--where {_one_line(text)}: {_syntax(error, text)}") from None
    try:
        part = _truth(tree.body, columns)
    except _Refusal as refusal:
        raise LamwrightError(f"--where {_one_line(text)}: {refusal}") from None
    return Condition(part.sql, part.parameters)


def condition_of(where: str | None, columns: Columns) -> Condition:
    """The condition of a text; None for all rows.

    Raises:
        LamwrightError: it is not understood.
    """
    return Condition("1", ()) if where is None else parsed(where, columns)


def ordered(where: str | None, sort: str, limit: int | None, columns: Columns) -> Condition:
    """The end of a select: which rows, in the order of a column, and how many at most.

    Raises:
        LamwrightError: the condition or the name of the column is not understood.
    """
    condition = condition_of(where, columns)
    name = sort.removeprefix("-")
    column = columns.found(name)
    if column is None:
        raise LamwrightError(f"--sort {name}: no such column; {columns.nearest(name)}")
    turn = "desc" if sort.startswith("-") else "asc"
    # Rows lie by their number, which all have: nothing is to be sorted then.
    nulls = "" if name == "number" else f"{column[0]} is null, "
    order = f"order by {nulls}{column[0]} {turn}, number limit ?"
    most = -1 if limit is None else limit
    return Condition(f"where {condition.sql} {order}", (*condition.parameters, most))


class _Refusal(Exception):
    """What is not understood, as the end of the error's line."""


def _truth(node: ast.expr, columns: Columns) -> _Part:
    if isinstance(node, ast.BoolOp):
        word = " and " if isinstance(node.op, ast.And) else " or "
        return _joined(word, [_truth(value, columns) for value in node.values])
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.Not):
        part = _truth(node.operand, columns)
        return _Part(f"(not {part.sql})", part.parameters, "truth")
    if isinstance(node, ast.Compare):
        sides = [_value(side, columns) for side in (node.left, *node.comparators)]
        pairs = zip(sides, node.ops, sides[1:], strict=False)
        return _joined(" and ", [_comparison(*pair) for pair in pairs])
    part = _value(node, columns)
    if part.kind != "flag":
        raise _Refusal(f"{_said(node)} is compared with nothing; write {_said(node)} > 0 or alike")
    return part


def _joined(word: str, parts: list[_Part]) -> _Part:
    parameters = tuple(value for part in parts for value in part.parameters)
    return _Part(f"({word.join(part.sql for part in parts)})", parameters, "truth")


def _comparison(left: _Part, op: ast.cmpop, right: _Part) -> _Part:
    parameters = (*left.parameters, *right.parameters)
    if "nothing" in (left.kind, right.kind):
        equal = isinstance(op, ast.Is | ast.Eq)
        if not (equal or isinstance(op, ast.IsNot | ast.NotEq)):
            raise _Refusal("None can be met by `is None` and `is not None` alone")
        return _Part(f"({left.sql} {'is' if equal else 'is not'} {right.sql})", parameters, "truth")
    sign = _COMPARISONS.get(type(op))
    if sign is None:
        raise _Refusal(_WORDS)
    if {left.kind, right.kind} == {"number", "text"}:
        raise _Refusal("a number is compared with a text")
    return _Part(f"({left.sql} {sign} {right.sql})", parameters, "truth")


def _value(node: ast.expr, columns: Columns) -> _Part:
    if isinstance(node, ast.Constant):
        return _constant(node.value)
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub | ast.UAdd):
        part = _number(node.operand, columns)
        return replace(part, sql=f"(- {part.sql})") if isinstance(node.op, ast.USub) else part
    if isinstance(node, ast.BinOp):
        sign = _SUMS.get(type(node.op))
        if sign is None:
            raise _Refusal(_WORDS)
        left, right = _number(node.left, columns), _number(node.right, columns)
        # A real left side: SQL would cut the quotient of whole numbers.
        sql = (
            f"(1.0 * {left.sql} {sign} {right.sql})"
            if sign == "/"
            else (f"({left.sql} {sign} {right.sql})")
        )
        return _Part(sql, (*left.parameters, *right.parameters), "number")
    if isinstance(node, ast.Name | ast.Attribute | ast.Subscript):
        name = ast.unparse(node).replace("[...]", "[*]")
        column = columns.found(name)
        if column is None:
            raise _Refusal(f"no column {name}; {columns.nearest(name)}")
        return _Part(column[0], (), column[1])
    raise _Refusal(f"{_said(node)} is not understood; {_WORDS}")


def _number(node: ast.expr, columns: Columns) -> _Part:
    part = _value(node, columns)
    if part.kind not in ("number", "any"):
        raise _Refusal(f"{_said(node)} is no number")
    return part


def _constant(value: object) -> _Part:
    if value is None:
        return _Part("null", (), "nothing")
    if isinstance(value, bool):
        return _Part("?", (int(value),), "flag")
    if isinstance(value, str):
        return _Part("?", (value,), "text")
    if isinstance(value, int | float) and abs(value) < LARGEST:
        return _Part("?", (value,), "number")
    raise _Refusal(f"{value!r} is no number that can be compared")


def _said(node: ast.expr) -> str:
    return ast.unparse(node)[:60]


def _one_line(text: str) -> str:
    return '"' + " ".join(text.split())[:80] + '"'


def _syntax(error: BaseException, text: str) -> str:
    place = getattr(error, "offset", None) or 1
    rest = text.strip()[place - 1 :].split()
    if rest and rest[0].startswith("="):
        return "= is not understood; write == to compare"
    at = f"is not understood at {rest[0][:40]!r}" if rest else "ends too soon"
    return f"{at}; {_WORDS}"
