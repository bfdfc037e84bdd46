"""Design files that must be refused: small breaks of a shipped design, each with its clear line.

`BROKEN` is read by the tests of the reader and of the command line, so that both refuse the same
files with the same words. `line` is the error's text after the file's name.
"""

import shutil
from dataclasses import dataclass
from pathlib import Path

DESIGNS = Path(__file__).parent.parent / "designs"
DEMO = (DESIGNS / "demo_24s4p_arc.toml").read_text()


@dataclass(frozen=True, slots=True)
class Broken:
    """One broken file: its bytes, and the part of the error's text that must be there."""

    name: str
    data: bytes
    line: str

    def write(self, folder: Path) -> Path:
        """Write it as demo.toml into `folder`, beside the steel cards it names."""
        shutil.copytree(DESIGNS / "steel", folder / "steel", dirs_exist_ok=True)
        path = folder / "demo.toml"
        path.write_bytes(self.data)
        return path


def _swap(name: str, old: str, new: str, line: str) -> Broken:
    """The demo with the first `old` replaced; `old` must be there."""
    assert old in DEMO, old
    return Broken(name, DEMO.replace(old, new, 1).encode(), line)


def _barriers(name: str, text: str, line: str) -> Broken:
    """The demo with all its barriers replaced by `text`."""
    return Broken(name, (_HEAD + text + _TAIL).encode(), line)


_HEAD, _REST = DEMO.split("[[rotor.barrier]]", 1)
_TAIL = _REST[_REST.index("[steel]") :]
_ONE = "[[rotor.barrier]]" + _REST.split("[[rotor.barrier]]", 1)[0]

_KEYS = (
    _swap(
        "misspelt key",
        "gap_mm = 0.4",
        "gap_m = 0.4",
        ":27: rotor.gap_m: unknown key; did you mean gap_mm?",
    ),
    _swap(
        "misspelt key of a barrier",
        "thickness_mm = 2.6",
        "thicknes_mm = 2.6",
        ":34: rotor.barrier[1].thicknes_mm: unknown key; did you mean thickness_mm?",
    ),
    _swap(
        "misspelt table",
        "[winding]",
        "[windings]",
        ":18: windings: unknown key; did you mean winding?",
    ),
    _swap(
        "key of another table",
        "poles = 4",
        "poles = 4\nslots = 24",
        ":27: rotor.slots: unknown key; slots belongs in [stator]",
    ),
    _swap(
        "unheard-of key",
        "layers = 1",
        "layers = 1\ncolour = 3",
        ":20: winding.colour: unknown key; accepted layers, coil_span_slots, turns_per_coil",
    ),
    _swap(
        "missing key",
        "gap_mm = 0.4\n",
        "",
        ":25: rotor.gap_mm: missing; accepted a number above 0",
    ),
    _swap(
        "key twice",
        "gap_mm = 0.4",
        "gap_mm = 0.4\ngap_mm = 0.5",
        ":28: column 13 of gap_mm = 0.5: not TOML, this key or table stands twice; "
        "accepted each once, and [[table]] for each of several barriers",
    ),
    Broken(
        "missing table",
        DEMO[: DEMO.index("[limits]")].encode(),
        ":1: limits: missing; accepted one table [limits]",
    ),
    _swap(
        "table twice",
        "[duty]",
        "[duty]\n[duty]",
        ":57: column 6 of [duty]: not TOML, this key or table stands twice",
    ),
    _swap(
        "array for a table",
        "[stator]",
        "[[stator]]",
        ":5: stator: this is an array; accepted one table [stator]",
    ),
)

_TYPES = (
    _swap(
        "text for a whole number",
        "slots = 24",
        'slots = "24"',
        ':9: stator.slots = "24": this is text; accepted a whole number from 6 to 144',
    ),
    _swap(
        "fraction for a whole number",
        "slots = 24",
        "slots = 24.5",
        ":9: stator.slots = 24.5: this is a number with a decimal point; "
        "accepted a whole number from 6 to 144",
    ),
    _swap(
        "true for a whole number",
        "poles = 4",
        "poles = true",
        ":26: rotor.poles = true: this is true or false; accepted a whole number from 2 to 24",
    ),
    _swap(
        "true for a choice",
        "layers = 1",
        "layers = true",
        ":19: winding.layers = true: this is true or false; accepted 1 or 2",
    ),
    _swap(
        "false for a length",
        "gap_mm = 0.4",
        "gap_mm = false",
        ":27: rotor.gap_mm = false: this is true or false; accepted a number above 0",
    ),
    _swap(
        "number for a name",
        'name = "demo 24/4 arc"',
        "name = 24",
        ":2: name = 24: this is a whole number; accepted text in quotes",
    ),
    _swap(
        "array for a length",
        "gap_mm = 0.4",
        "gap_mm = [0.4, 0.5]",
        ":27: rotor.gap_mm: this is an array; accepted a number above 0",
    ),
    _swap(
        "date for a speed",
        "maximum_speed_rpm = 6000.0",
        "maximum_speed_rpm = 2026-01-31",
        ":59: duty.maximum_speed_rpm = 2026-01-31: this is a date or time; "
        "accepted a number above 0",
    ),
    _swap(
        "unknown choice",
        'shape = "arc"',
        'shape = "arch"',
        ':32: rotor.barrier[1].shape = "arch": not one of the choices; '
        'accepted "arc" or "straight"',
    ),
)

_VALUES = (
    _swap(
        "not a number",
        "gap_mm = 0.4",
        "gap_mm = nan",
        ":27: rotor.gap_mm = nan: not a number; accepted a number above 0",
    ),
    _swap(
        "infinity",
        "outer_diameter_mm = 140.0",
        "outer_diameter_mm = inf",
        ":6: stator.outer_diameter_mm = inf: not a finite number; accepted a number above 0",
    ),
    _swap(
        "minus infinity",
        "rated_current_a = 12.0",
        "rated_current_a = -inf",
        ":57: duty.rated_current_a = -inf: not a finite number; accepted a number above 0",
    ),
    _swap(
        "negative length",
        "stack_length_mm = 100.0",
        "stack_length_mm = -100.0",
        ":8: stator.stack_length_mm = -100.0: too small; accepted a number above 0",
    ),
    _swap(
        "rib of 0 mm",
        "tangential_rib_mm = 0.6",
        "tangential_rib_mm = 0",
        ":36: rotor.barrier[1].tangential_rib_mm = 0: too small; accepted a number above 0",
    ),
    _swap(
        "angle beyond its range",
        "wedge_angle_deg = 30.0",
        "wedge_angle_deg = 60.5",
        ":14: stator.wedge_angle_deg = 60.5: too large; accepted a number from 0 to 60",
    ),
    _swap(
        "too many poles",
        "poles = 4",
        "poles = 400",
        ":26: rotor.poles = 400: too large; accepted a whole number from 2 to 24",
    ),
    _swap(
        "whole number beyond 64 bits",
        "turns_per_coil = 34",
        "turns_per_coil = 99999999999999999999",
        ":21: winding.turns_per_coil = 99999999999999999999: too large; "
        "accepted up to 9223372036854775807",
    ),
    _barriers(
        "no barrier",
        "barrier = []\n",
        ":31: rotor.barrier has 0: too few; accepted 1 to 6 tables [[rotor.barrier]]",
    ),
    _barriers(
        "7 barriers",
        _ONE * 7,
        ":73: rotor.barrier has 7: too many; accepted 1 to 6 tables [[rotor.barrier]]",
    ),
    _barriers(
        "single brackets",
        _ONE.replace("[[", "[").replace("]]", "]"),
        ":31: rotor.barrier: this is a single table; accepted 1 to 6 tables [[rotor.barrier]]",
    ),
    _swap(
        "no such steel card",
        'rotor_card = "steel/demo_050.toml"',
        'rotor_card = "steel/demo_50.toml"',
        ':53: steel.rotor_card = "steel/demo_50.toml": no such file; '
        'did you mean "steel/demo_050.toml"?',
    ),
)

_FILES = (
    Broken("empty file", b"", ": the file is empty; accepted a TOML file"),
    Broken(
        "comments only",
        b"# to be written\n",
        ": no key in the file; accepted the tables [stator], [winding], [rotor]",
    ),
    Broken(
        "cut in a line",
        DEMO[: DEMO.index("0.5\n\n[[rotor")].encode(),
        ":29: column 22 of sheet_thickness_mm =: not TOML, invalid value; "
        "accepted lines like [table] and key = 1.5",
    ),
    Broken(
        "cut between lines",
        DEMO[: DEMO.index("[steel]")].encode(),
        ":1: steel: missing; accepted one table [steel]",
    ),
    Broken("Latin-1", DEMO.replace("invented: ", "inventé: ").encode("latin-1"), ":3: byte 0xe9"),
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
"""Files that the reader refuses."""
