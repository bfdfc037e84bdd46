"""Where the polish of a front stands, in plain numbers for the ledger, as `search_state`."""

import json
import zlib
from dataclasses import asdict

from .search_polish import Line, PolishState
from .search_worth import Worth

FORM = 1


def packed_polish(state: PolishState) -> bytes:
    """The state as bytes for the ledger."""
    return zlib.compress(json.dumps({"form": FORM, **asdict(state)}).encode(), 6)


def unpacked_polish(data: bytes | None, designs: int, members: int) -> PolishState | None:
    """The state from the ledger; None where there is none that belongs to this search.

    Args:
        data: what was kept.
        designs: that the search has asked for: a polish of an earlier front is begun anew.
        members: of the front that are to be polished.
    """
    if data is None:
        return None
    try:
        record = json.loads(zlib.decompress(data))
        if record.pop("form") != FORM or record["designs"] != designs:
            return None
        lines = tuple(_line(line) for line in record["lines"])
        if record["members"] != members:
            return None
        return PolishState(
            designs,
            members,
            lines,
            tuple(tuple(point) for point in record["points"]),
            tuple(_worth(worth) for worth in record["worths"]),
            tuple(record["hashes"]),
        )
    except (ValueError, KeyError, TypeError, zlib.error):
        return None


def _line(record: dict[str, object]) -> Line:
    made = dict(record)
    slopes = made.pop("slopes")
    if slopes is not None:
        assert isinstance(slopes, dict)
        slopes = {figure: tuple(row) for figure, row in slopes.items()}
    point = made.pop("point")
    assert isinstance(point, list)
    return Line(
        point=tuple(point),
        worth=_worth(made.pop("worth")),
        slopes=slopes,
        **made,  # type: ignore[arg-type]
    )


def _worth(record: object) -> Worth:
    assert isinstance(record, dict)
    return Worth(tuple(record["goals"]), record["violation"])
