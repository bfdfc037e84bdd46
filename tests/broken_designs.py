"""Design files that must be refused: small breaks of a shipped design, each with its clear line.

`READER` and `SHAPES` are read by the tests of the geometry room and of the command line, so that
both refuse the same files with the same words. `line` is the start of one line of the error's
text, after the file's name. Line numbers are counted here from the text around the break, not by
the reader that is tested.
"""

import shutil
from dataclasses import dataclass
from pathlib import Path

DESIGNS = Path(__file__).parent.parent / "designs"
DEMO = (DESIGNS / "demo_24s4p_arc.toml").read_text()


@dataclass(frozen=True, slots=True)
class Broken:
    """One broken file: its bytes, and how a line of the error's text must begin."""

    name: str
    data: bytes
    line: str

    def write(self, folder: Path) -> Path:
        """Write it as demo.toml into `folder`, beside the steel cards it names."""
        for cards in ("steel", "magnet"):
            shutil.copytree(DESIGNS / cards, folder / cards, dirs_exist_ok=True)
        path = folder / "demo.toml"
        path.write_bytes(self.data)
        return path


def row_of(key: str, number: int = 1, text: str = DEMO) -> int:
    """Line of the `number`th statement of `key`, or of that header where key is `[table]`."""
    rows = text.splitlines()
    return [k for k, row in enumerate(rows, 1) if row.split(" = ")[0] == key][number - 1]


def with_row(key: str, row: str, number: int = 1) -> str:
    """The demo with the `number`th statement of `key` replaced by `row`, which may be several."""
    rows = DEMO.splitlines()
    rows[row_of(key, number) - 1] = row
    return "\n".join(rows) + "\n"


def _row(name: str, key: str, row: str, fault: str, down: int = 0) -> Broken:
    """One statement replaced, the fault there, or `down` rows below."""
    return Broken(name, with_row(key, row).encode(), f":{row_of(key) + down}: {fault}")


def _value(name: str, table: str, key: str, value: str, fault: str, number: int = 1) -> Broken:
    """One value replaced; the line names key, value and fault."""
    text = with_row(key, f"{key} = {value}", number)
    return Broken(name, text.encode(), f":{row_of(key, number)}: {table}{key} = {value}: {fault}")


def _barriers(name: str, barriers: str, fault: str, down: int = 0) -> Broken:
    """All barriers replaced, the fault at the first of them, or `down` rows below."""
    line = row_of("[[rotor.barrier]]") + down
    return Broken(name, (_HEAD + barriers + _TAIL).encode(), f":{line}: {fault}")


_HEAD, _REST = DEMO.split("[[rotor.barrier]]", 1)
_TAIL = _REST[_REST.index("[steel]") :]
_ONE = "[[rotor.barrier]]" + _REST.split("[[rotor.barrier]]", 1)[0]
_ABOVE_0 = "a number above 0"
_ROWS = "accepted lines like [table] and key = 1.5"

_KEYS = (
    _row("misspelt key", "gap_mm", "gap_m = 1", "rotor.gap_m: unknown key; did you mean gap_mm?"),
    _row(
        "misspelt key of a barrier",
        "thickness_mm",
        "thicknes_mm = 2.6",
        "rotor.barrier[1].thicknes_mm: unknown key; did you mean thickness_mm?",
    ),
    _row(
        "misspelt table", "[winding]", "[windings]", "windings: unknown key; did you mean winding?"
    ),
    _row(
        "key of another table",
        "poles",
        "poles = 4\nslots = 24",
        "rotor.slots: unknown key; slots belongs in [stator]",
        down=1,
    ),
    _row(
        "unheard-of key",
        "layers",
        "layers = 1\ncolour = 3",
        "winding.colour: unknown key; accepted layers, coil_span_slots, turns_per_coil",
        down=1,
    ),
    Broken(
        "missing key",
        with_row("gap_mm", "").encode(),
        f":{row_of('[rotor]')}: rotor.gap_mm: missing; accepted {_ABOVE_0}",
    ),
    _row(
        "key twice",
        "gap_mm",
        "gap_mm = 0.4\ngap_mm = 0.5",
        "column 13 of gap_mm = 0.5: not TOML, this key or table stands twice; "
        "accepted each once, and [[table]] for each of several barriers",
        down=1,
    ),
    Broken(
        "missing table",
        DEMO[: DEMO.index("[limits]")].encode(),
        ":1: limits: missing; accepted one table [limits]",
    ),
    _row(
        "table twice",
        "[duty]",
        "[duty]\n[duty]",
        "column 6 of [duty]: not TOML, this key or table stands twice",
        down=1,
    ),
    _row(
        "array for a table",
        "[stator]",
        "[[stator]]",
        "stator: this is an array; accepted one table [stator]",
    ),
)

_WHOLE_SLOTS = "accepted a whole number from 3 to 144"
_TYPES = (
    _value("text for a whole number", "stator.", "slots", '"24"', f"this is text; {_WHOLE_SLOTS}"),
    _value(
        "fraction for a whole number",
        "stator.",
        "slots",
        "24.5",
        f"this is a number with a decimal point; {_WHOLE_SLOTS}",
    ),
    _value(
        "true for a whole number",
        "rotor.",
        "poles",
        "true",
        "this is true or false; accepted a whole number from 2 to 24",
    ),
    _value(
        "true for a choice",
        "winding.",
        "layers",
        "true",
        "this is true or false; accepted 1 or 2",
    ),
    _value(
        "false for a length",
        "rotor.",
        "gap_mm",
        "false",
        f"this is true or false; accepted {_ABOVE_0}",
    ),
    _value(
        "number for a name", "", "name", "24", "this is a whole number; accepted text in quotes"
    ),
    _row(
        "array for a length",
        "gap_mm",
        "gap_mm = [0.4, 0.5]",
        f"rotor.gap_mm: this is an array; accepted {_ABOVE_0}",
    ),
    _value(
        "date for a speed",
        "duty.",
        "maximum_speed_rpm",
        "2026-01-31",
        f"this is a date or time; accepted {_ABOVE_0}",
    ),
    _value(
        "unknown choice",
        "rotor.barrier[1].",
        "shape",
        '"arch"',
        'not one of the choices; accepted "arc" or "straight"',
    ),
)

_VALUES = (
    _value("not a number", "rotor.", "gap_mm", "nan", f"not a number; accepted {_ABOVE_0}"),
    _value(
        "infinity",
        "stator.",
        "outer_diameter_mm",
        "inf",
        f"not a finite number; accepted {_ABOVE_0}",
    ),
    _value(
        "minus infinity",
        "duty.",
        "rated_current_a",
        "-inf",
        f"not a finite number; accepted {_ABOVE_0}",
    ),
    _value(
        "negative length",
        "stator.",
        "stack_length_mm",
        "-100.0",
        f"too small; accepted {_ABOVE_0}",
    ),
    _value(
        "rib of 0 mm",
        "rotor.barrier[1].",
        "tangential_rib_mm",
        "0",
        f"too small; accepted {_ABOVE_0}",
    ),
    _value(
        "angle beyond its range",
        "stator.",
        "wedge_angle_deg",
        "60.5",
        "too large; accepted a number from 0 to 60",
    ),
    _value(
        "too many poles",
        "rotor.",
        "poles",
        "400",
        "too large; accepted a whole number from 2 to 24",
    ),
    _value(
        "whole number beyond 64 bits",
        "winding.",
        "turns_per_coil",
        "99999999999999999999",
        "too large; accepted up to 9223372036854775807",
    ),
    _barriers(
        "no barrier",
        "barrier = []\n",
        "rotor.barrier has 0: too few; accepted 1 to 6 tables [[rotor.barrier]]",
    ),
    _barriers(
        "7 barriers",
        _ONE * 7,
        "rotor.barrier has 7: too many; accepted 1 to 6 tables [[rotor.barrier]]",
        down=6 * _ONE.count("\n"),
    ),
    _barriers(
        "single brackets",
        _ONE.replace("[[", "[").replace("]]", "]"),
        "rotor.barrier: this is a single table; accepted 1 to 6 tables [[rotor.barrier]]",
    ),
    _value(
        "no such steel card",
        "steel.",
        "rotor_card",
        '"steel/demo_50.toml"',
        'no such file; did you mean "steel/demo_050.toml"?',
    ),
)

_CUT = DEMO.index("sheet_thickness_mm =") + len("sheet_thickness_mm =")
_FILES = (
    Broken("empty file", b"", ": the file is empty; accepted a TOML file"),
    Broken(
        "comments only",
        b"# to be written\n",
        ": no key in the file; accepted the tables [stator], [winding], [rotor]",
    ),
    Broken(
        "cut in a line",
        DEMO[:_CUT].encode(),
        f":{row_of('sheet_thickness_mm')}: column 21 of sheet_thickness_mm =: "
        f"not TOML, invalid value; {_ROWS}",
    ),
    Broken(
        "cut between lines",
        DEMO[: DEMO.index("[steel]")].encode(),
        ":1: steel: missing; accepted one table [steel]",
    ),
    Broken(
        "Latin-1",
        with_row("note", 'note = "inventé"').encode("latin-1"),
        f":{row_of('note')}: byte 0xe9 is not UTF-8; accepted UTF-8 text",
    ),
    Broken("UTF-16", DEMO.encode("utf-16"), ":1: byte 0xff is not UTF-8; accepted UTF-8 text"),
    Broken(
        "a punch outline",
        b"  0\nSECTION\n  2\nHEADER\n  0\nENDSEC\n  0\nEOF\n",
        ":1: column 4 of 0: not TOML, expected '=' after a key in a key/value pair; accepted",
    ),
    Broken("null bytes", b"\0" * 4096, ":1: column 1 of "),
    Broken("over a megabyte", b"x = 1\n" * 200_000, ": file too large; accepted up to 1000 kB"),
    Broken("brackets without end", b"x = " + b"[" * 50_000, ": nested too deeply; accepted plain"),
)

READER = (*_KEYS, *_TYPES, *_VALUES, *_FILES)
"""Files that the reader refuses, with one line each; only 'cut between lines' has three."""

SHAPES = (
    _value(
        "barriers that cross",
        "rotor.barrier[2].",
        "thickness_mm",
        "12",
        "barriers 2 and 3 run into each other; accepted ",
        2,
    ),
    _value(
        "barrier into the bore",
        "rotor.barrier[3].",
        "depth_mm",
        "40",
        "no iron to the bore; accepted ",
        3,
    ),
    _value(
        "arms that leave the pole",
        "rotor.barrier[3].",
        "end_angle_deg",
        "50",
        "not within half the pole pitch (45); accepted ",
        3,
    ),
    _value(
        "rib thinner than the sheet",
        "rotor.barrier[1].",
        "tangential_rib_mm",
        "0.1",
        "thinner than the sheet (0.5 mm); accepted 0.5 to ",
    ),
    _row(
        "supply of less than the rated current",
        "rated_current_a",
        "rated_current_a = 12.0\nmaximum_current_a = 5.0",
        "duty.maximum_current_a = 5: below the rated current; accepted 12 or more",
        down=1,
    ),
    _row(
        "shaft of nothing but its bore",
        "sheet_thickness_mm",
        "sheet_thickness_mm = 0.5\nfit = { radial_interference_um = 10.0,"
        " shaft_bore_diameter_mm = 50.0 }",
        "rotor.fit.shaft_bore_diameter_mm = 50: nothing is left of the shaft; accepted from 0,",
        down=1,
    ),
    _value("gap wider than the rotor", "rotor.", "gap_mm", "60", "no rotor is left between "),
    _value("odd number of poles", "rotor.", "poles", "5", "poles come in pairs; accepted 4 or 6"),
    _value(
        "slots that suit no winding",
        "stator.",
        "slots",
        "25",
        "4 poles give no three like phases; accepted 24 or 30",
    ),
    _value(
        "slot through the yoke",
        "stator.",
        "slot_depth_mm",
        "40",
        "the yoke behind the slot is thinner than the sheet; accepted ",
    ),
    _value(
        "mouth wider than the slot",
        "stator.",
        "slot_opening_mm",
        "9",
        "the mouth leaves no tooth tip beside it; accepted ",
    ),
    _value(
        "short coils in a single layer",
        "winding.",
        "coil_span_slots",
        "5",
        "a single-layer winding has full-pitch coils; accepted 6",
    ),
    Broken(
        "strands of another area",
        with_row("strands", "strands = { round_diameter_mm = 1.0, in_hand = 2 }").encode(),
        f":{row_of('conductor_area_mm2')}: winding.conductor_area_mm2 = 1.4: not the strands'"
        " copper, 2 of 0.7854 mm2; accepted 1.571 within 2 %",
    ),
    _row(
        "strands of two shapes",
        "strands",
        "strands = { round_diameter_mm = 0.944, height_mm = 0.5 }",
        "winding.strands.round_diameter_mm = 0.944: a strand is either round or rectangular, and",
    ),
    _value(
        "bigger than any machine",
        "stator.",
        "outer_diameter_mm",
        "1e+308",
        "beyond any electrical machine; accepted ",
    ),
)
"""Files that the reader takes, whose shape or winding is impossible; some have several faults."""
