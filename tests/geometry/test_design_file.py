"""Design files and steel cards: what is read, what is refused, and where the faults are placed."""

import os
import tomllib
from pathlib import Path

import pytest

from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_file import (
    design_hash,
    placed,
    read_design,
    read_machine,
    read_steel_card,
)
from lamwright.geometry.errors import DesignError, Finding
from lamwright.geometry.key_lines import key_lines, line_of
from lamwright.geometry.steel_card import MU_0, curve_findings
from tests.broken_designs import DEMO, DESIGNS, row_of, with_row

DEMO_PATH = DESIGNS / "demo_24s4p_arc.toml"
SHIPPED = sorted(DESIGNS.glob("*.toml"))
CARD = (DESIGNS / "steel" / "demo_050.toml").read_text()


def _written(folder: Path, data: str | bytes, name: str = "demo.toml") -> Path:
    path = folder / name
    path.write_bytes(data if isinstance(data, bytes) else data.encode())
    return path


def _faults(read, path: Path) -> list[str]:
    """The lines of the error that `read` raises, without the file's name."""
    with pytest.raises(DesignError) as caught:
        read(path)
    return [line.removeprefix(str(path)) for line in str(caught.value).splitlines()]


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
def test_shipped_designs_and_their_cards_are_valid(path):
    """What is shipped is what is tested; the curves of its cards are steel throughout."""
    machine = read_machine(path)
    assert machine.design == read_design(path)
    assert machine.path == path
    assert curve_findings(machine.rotor_steel) == curve_findings(machine.stator_steel) == ()


def test_values_are_the_files_values():
    """Against the standard reader: whole numbers, lengths, barriers in order, then a default."""
    design = read_design(DEMO_PATH)
    raw = tomllib.loads(DEMO)
    assert (design.stator.slots, design.rotor.poles) == (raw["stator"]["slots"], 4)
    assert design.pole_pairs == 2
    for barrier, values in zip(design.rotor.barrier, raw["rotor"]["barrier"], strict=True):
        assert {key: getattr(barrier, key) for key in values} == values
    assert "parallel_paths" not in raw["winding"]
    assert design.winding.parallel_paths == 1


def test_whole_numbers_serve_as_lengths(tmp_path):
    """`82` and `82.0` are the same length, and give the same hash."""
    whole, decimal = (
        read_design(_written(tmp_path, with_row("bore_diameter_mm", f"bore_diameter_mm = {value}")))
        for value in ("82", "82.0")
    )
    assert whole == decimal
    assert design_hash(whole, ()) == design_hash(decimal, ())


@pytest.mark.parametrize(
    "data",
    [
        b"\xef\xbb\xbf" + DEMO.encode(),
        DEMO.replace("\n", "\r\n").encode(),
        DEMO.replace("[[rotor.barrier]]", "  [[ rotor . 'barrier' ]]  # next").encode(),
        DEMO.encode() + b"# no newline at the end",
    ],
    ids=["byte order mark", "carriage returns", "spaced headers", "comment at the end"],
)
def test_layout_does_not_matter(data, tmp_path):
    """TOML gives these the same meaning (TOML 1.0); editors write all of them."""
    path = _written(tmp_path, data)
    assert read_design(path) == read_design(DEMO_PATH)


def test_all_faults_come_at_once_in_the_files_words(tmp_path):
    """One round of corrections, not seven: four slips, four lines, each at its own line."""
    slips = (
        ("bore_diameter_mm", "bore_diameter_mm = -82.0", 1),
        ("gap_mm", "gapp_mm = 0.4", 1),
        ("depth_mm", 'depth_mm = "10.2"', 2),
        ("least_torque_nm", "", 1),
    )
    rows = DEMO.splitlines()
    for key, row, number in slips:
        rows[row_of(key, number) - 1] = row
    assert _faults(read_design, _written(tmp_path, "\n".join(rows))) == [
        f":{row_of('bore_diameter_mm')}: stator.bore_diameter_mm = -82.0: too small; "
        "accepted a number above 0",
        f":{row_of('gap_mm')}: rotor.gapp_mm: unknown key; did you mean gap_mm?",
        f':{row_of("depth_mm", 2)}: rotor.barrier[2].depth_mm = "10.2": this is text; '
        "accepted a number above 0",
        f":{row_of('[limits]')}: limits.least_torque_nm: missing; accepted a number from 0",
    ]


def test_hostile_text_stays_on_one_line(tmp_path):
    """Control characters and long values of a file must not reach a terminal."""
    text = '"a\\u001b[31m\\nb" = 1\n' + with_row("shape", f'shape = "{"x" * 500}\\u2028"')
    faults = _faults(read_design, _written(tmp_path, text))
    assert len(faults) == 2
    assert all(fault.isprintable() and len(fault) < 250 for fault in faults)


def test_what_is_not_a_file_is_said_plainly(tmp_path):
    """A folder, a missing file, a file used as a folder, a device, a name with a null."""
    inside = _written(tmp_path, DEMO) / "x.toml"
    assert _faults(read_design, tmp_path) == [": this is a folder; accepted a TOML file"]
    assert _faults(read_design, tmp_path / "no.toml") == [": no such file; accepted a TOML file"]
    assert _faults(read_design, inside) == [": no such file; accepted a TOML file"]
    with pytest.raises(DesignError, match="not a file name"):
        read_design(tmp_path / "a\0b")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes on this system")
def test_a_pipe_is_refused_rather_than_waited_for(tmp_path):
    """Opening a pipe without a writer would hang for ever."""
    os.mkfifo(tmp_path / "pipe.toml")
    faults = _faults(read_design, tmp_path / "pipe.toml")
    assert faults == [": not a regular file; accepted a TOML file"]


def test_an_unreadable_file_says_why(tmp_path, monkeypatch):
    """The system's own reason is passed on (denied by hand: root may read everything)."""
    path = _written(tmp_path, DEMO)

    def denied(*_args, **_kwargs):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "open", denied)
    assert _faults(read_design, path) == [
        ": cannot be read, permission denied; accepted a TOML file"
    ]


def test_cards_count_from_the_designs_folder(tmp_path, monkeypatch):
    """The same file means the same machine from any working directory."""
    monkeypatch.chdir(tmp_path)
    assert read_machine(DEMO_PATH.resolve()).rotor_steel.name


def test_faults_of_cards_name_the_cards_file_once(tmp_path):
    """Both keys name the same broken card: its faults are listed once, at its own lines."""
    path = _written(tmp_path, DEMO.replace("steel/demo_050.toml", "card.toml"))
    _written(tmp_path, CARD.replace("value = 210.0", "value = 210e9"), "card.toml")
    with pytest.raises(DesignError) as caught:
        read_machine(path)
    assert str(caught.value).splitlines() == [
        f"{tmp_path / 'card.toml'}:10: youngs_modulus_gpa.value = 2.1e+11: not a sheet steel; "
        "accepted 10 to 1000, in the unit of the key"
    ]


def test_hash_knows_values_not_layout(tmp_path):
    """Comments and order leave the hash alone; any value of design or card changes it."""
    card = read_steel_card(DESIGNS / "steel" / "demo_050.toml")
    demo = read_design(DEMO_PATH)
    top, _, rest = DEMO.partition("[stator]")
    stator, rest = rest.split("\n\n", 1)
    moved = read_design(_written(tmp_path, f"{top}{rest}\n# moved\n[stator]{stator}\n"))
    assert design_hash(moved, (card,)) == design_hash(demo, (card,))
    other = read_design(_written(tmp_path, with_row("depth_mm", "depth_mm = 99", 2)))
    softer = card.model_copy(update={"density_kg_per_m3": card.poissons_ratio})
    hashes = {
        design_hash(demo, (card,)),
        design_hash(other, (card,)),
        design_hash(demo, (softer,)),
        design_hash(demo, (card, card)),
    }
    assert len(hashes) == 4
    assert all(len(value) == 64 and int(value, 16) for value in hashes)


def test_findings_get_file_and_line(tmp_path):
    """A check's finding points at its key, or at the table when the key was left to its default."""
    path = _written(tmp_path, DEMO)
    findings = (
        Finding("a", "rotor.barrier[2].depth_mm", 10.2, "crosses barrier 1", "accepted 11 to 12"),
        Finding("b", "rotor.barrier[3].fillet_mm", 0.5, "too large", "accepted 0.1 to 0.3"),
    )
    depth, third = row_of("depth_mm", 2), row_of("[[rotor.barrier]]", 3)
    assert str(placed(findings, path)).splitlines() == [
        f"{path}:{depth}: rotor.barrier[2].depth_mm = 10.2: crosses barrier 1; accepted 11 to 12",
        f"{path}:{third}: rotor.barrier[3].fillet_mm = 0.5: too large; accepted 0.1 to 0.3",
    ]


def test_lines_of_keys_in_every_form_toml_has():
    """Dotted, quoted and inline keys, arrays of tables inside others, text that looks like keys."""
    text = "\n".join(
        [
            'a.b."c.d" = 1  # x = 2',  # 1
            "text = '''",  # 2
            "[not.a.table]",
            "no = 1'''",
            "list = [  # ]",  # 5
            "  1, 2,",
            "]",
            "inline = { p = 1, q = [2, 3] }",  # 8
            "[[t]]",  # 9
            "[[t.u]]",  # 10
            "v = 1",
            "[[t.u]]",  # 12
            "v = 2",
            "[[t]]",  # 14
            "[t.w]",  # 15
            'x = """a\\""""',  # 16
            "y = 1",  # 17
        ]
    )
    lines = key_lines(text)
    assert lines[("a", "b", "c.d")] == 1
    assert (lines[("text",)], lines[("list",)], lines[("inline",)]) == (2, 5, 8)
    assert (lines[("t", 0, "u", 1, "v")], lines[("t", 1, "w", "y")]) == (13, 17)
    assert line_of(lines, ("inline", "q", 1)) == 8
    assert line_of(lines, ("t", 1, "missing")) == 14
    assert line_of(lines, ("nowhere",)) == 1
    assert not any("not" in path or "no" in path for path in lines)


@pytest.mark.parametrize(
    ("old", "new", "fault"),
    [
        (
            "b_t = [0.1, 0.2, 0.3",
            "b_t = [0.1, 0.2, 0.2",
            ":36: magnetisation.b_t[3] = 0.2: not above the value before it (0.2)",
        ),
        (
            "h_a_per_m = [34.0, 47.0",
            "h_a_per_m = [34.0, 30.0",
            ":37: magnetisation.h_a_per_m[2] = 30: not above the value before it (34)",
        ),
        (
            "h_a_per_m = [34.0, ",
            "h_a_per_m = [",
            ":37: magnetisation.h_a_per_m = 28: number of points, but b_t has 29; "
            "accepted one H for each B",
        ),
        (
            "2.05, 2.1]",
            "2.05, 2100.0]",
            ":36: magnetisation.b_t[29] = 2100: beyond any sheet steel; accepted tesla, up to 10",
        ),
        (
            "value = 0.3",
            "value = 0.5",
            ":14: poissons_ratio.value = 0.5: a solid has less than 0.5; "
            "accepted above 0, below 0.5",
        ),
        (
            "value = 380.0",
            "value = 501.0",
            ":18: yield_strength_mpa.value = 501: above the tensile strength (500); "
            "accepted up to 500",
        ),
        (
            "b_t = [0.1,",
            "b_t = [-0.1,",
            ":36: magnetisation.b_t[1] = -0.1: too small; accepted a number above 0",
        ),
        (
            'source = "invented, plausible"',
            'source = ""',
            ':7: density_kg_per_m3.source = "": too short; accepted text of at least 3 characters',
        ),
        (
            "[poissons_ratio]\nvalue = 0.3\n",
            "[poissons_ratio]\n",
            ":13: poissons_ratio.value: missing; accepted a number above 0",
        ),
    ],
)
def test_impossible_cards_are_refused(old, new, fault, tmp_path):
    """B(H) must be a rising curve of as many B as H, in tesla; moduli and strengths possible."""
    assert old in CARD
    faults = _faults(read_steel_card, _written(tmp_path, CARD.replace(old, new, 1)))
    assert len(faults) == 1
    assert faults[0].startswith(fault)


def test_a_curve_below_free_space_is_told_where_it_ends(tmp_path):
    """Derived: dB/dH = d(mu_0 (H + M))/dH >= mu_0; 1 % short of it is found, 1 % over is not."""
    b, h = "2.05, 2.1]", "80000.0, 115000.0]"
    for share, is_found in ((0.99, True), (1.01, False)):
        rise = share * MU_0 * 35000.0
        text = CARD.replace(b, f"2.05, {2.05 + rise}]")
        assert h in text
        findings = curve_findings(read_steel_card(_written(tmp_path, text)))
        assert [finding.key for finding in findings] == ["magnetisation.b_t[29]"] * is_found


def test_values_are_frozen():
    """What was checked cannot change behind the check."""
    card = read_steel_card(DESIGNS / "steel" / "demo_050.toml")
    assert isinstance(card, SteelCard)
    with pytest.raises(ValueError, match="frozen"):
        card.name = "other"
