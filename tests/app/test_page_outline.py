"""The outline that the page shows at once: what is drawn, where keys can be taken hold of."""

import math
import re
from concurrent.futures import Future
from pathlib import Path

import pytest
from page_client import DEMO, DESIGNS, client_of, demo_folder

from lamwright.app.page_drawing import drawing_record
from lamwright.app.page_folder import Folder
from lamwright.app.page_handles import handle_records, handles
from lamwright.app.page_outline import outlined
from lamwright.app.page_ranges import Ranges
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_keys import replaced
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.remedies import value_of

FOLDER = Folder.of(DESIGNS)
SHAPES = [
    DEMO,
    "demo_36s4p_straight.toml",
    "demo_36s4p_magnet.toml",
    "gallery/mill_48s4p.toml",
    "gallery/hoist_60s10p.toml",
    "gallery/lift_27s6p.toml",
    "gallery/traction_54s6p.toml",
]


def _text(name: str) -> str:
    return FOLDER.text(name)[0]


def _unit(direction: complex) -> complex:
    return direction / abs(direction)


@pytest.mark.parametrize("name", SHAPES)
def test_handles_go_with_their_keys(name: str):
    """Where a key is changed by d, its handle moves by d / per_mm along its direction.

    Exact for depth and thickness; along the tangent for an end that goes round the axis and for
    ribs, whose ends turn a little: to first order in a step of 1e-4, so 2 % of the way is ample.
    """
    one = outlined(FOLDER, name, _text(name))
    assert one.machine is not None
    assert one.section is not None
    design = one.machine.design
    found = handles(design, one.section)
    assert {handle.kind for handle in found} >= {"end angle", "depth", "thickness"}
    tried = 0
    for k, handle in enumerate(found):
        step = 1e-4
        value = value_of(design, handle.key)
        try:
            section = cross_section(replaced(design, handle.key, value + step))
        except GeometryError:
            step = -step
            section = cross_section(replaced(design, handle.key, value + step))
        moved = handles(replaced(design, handle.key, value + step), section)[k]
        assert (moved.key, moved.side) == (handle.key, handle.side)
        if handle.kind.endswith("rib"):  # its thinnest place may jump along it; its width grows
            way = 1e3 * (abs(moved.direction) - abs(handle.direction)) / handle.per_mm
        else:
            way = (1e3 * (moved.place - handle.place) / _unit(handle.direction)).real
        assert way == pytest.approx(step / handle.per_mm, rel=0.02, abs=1e-9), handle
        tried += 1
    assert tried == len(found)


def _area(path: str) -> float:
    """Area in mm2 of SVG path data, from its own numbers: chords and arc segments."""
    total, at, begun = 0.0, 0j, 0j
    for letter, rest in re.findall(r"([MLAZ])([^MLAZ]*)", path):
        numbers = [float(number) for number in rest.split()]
        end = complex(numbers[-2], numbers[-1]) if numbers else begun
        total += 0.5 * (at.conjugate() * end).imag if letter != "M" else 0.0
        if letter == "A":
            radius, large, sweep = numbers[0], numbers[3], numbers[4]
            angle = 2.0 * math.asin(min(1.0, abs(end - at) / (2.0 * radius)))
            angle = 2.0 * math.pi - angle if large else angle
            total += (1.0 if sweep else -1.0) * 0.5 * radius**2 * (angle - math.sin(angle))
        at = end
        begun = end if letter == "M" else begun
    return -total  # y is counted downward


@pytest.mark.parametrize("name", [DEMO, "gallery/mill_48s4p.toml", "gallery/lift_27s6p.toml"])
def test_the_picture_is_the_outline(name: str):
    """Areas of the SVG's paths, holes taken off, fill the sector of rotor and stator.

    To a relative 1e-5: places are written to a tenth of a micrometre.
    """
    one = outlined(FOLDER, name, _text(name))
    assert one.section is not None
    record = drawing_record(one.section)
    regions = record["regions"]
    assert isinstance(regions, list)
    total = sum(_area(region["d"]) for region in regions)
    section = one.section
    whole = 0.5 * (1e3 * section.stator_outer_radius) ** 2 * section.sector_angle
    assert total == pytest.approx(whole, rel=1e-5)


def test_each_radial_rib_has_a_mark_of_its_own():
    """Barriers with 1, 2, 3 and 4 ribs of one width each."""
    one = outlined(FOLDER, name := "gallery/blower_36s2p.toml", _text(name))
    assert one.machine is not None
    assert one.section is not None
    marks = handle_records(one.machine.design, one.section)
    assert len({mark["id"] for mark in marks}) == len(marks)
    assert sum(mark["kind"] == "radial rib" for mark in marks) == 1 + 2 + 3 + 4


def test_findings_have_lines_and_keys(tmp_path: Path):
    """Of a text that is no TOML, of a wrong value, of values that do not fit together."""
    client = client_of(demo_folder(tmp_path))
    text = client.get("/api/design", params={"path": DEMO}).json()["text"]
    rows = text.split("\n")
    line = rows.index("depth_mm = 3.6") + 1

    def found(text: str, **more: object) -> dict:
        answer = client.post("/api/outline", json={"path": DEMO, "text": text, **more}).json()
        assert not answer["ok"]
        assert answer["drawing"] is None
        return answer["findings"][0]

    broken = found(text.replace("depth_mm = 3.6", "depth_mm = = 3.6"))
    assert (broken["line"], "not TOML" in broken["text"]) == (line, True)
    wrong = found(text.replace("depth_mm = 3.6", "depth_mm = -3.6"))
    assert (wrong["line"], wrong["key"]) == (line, "rotor.barrier[1].depth_mm")
    key = "rotor.barrier[1].thickness_mm"
    misfit = found(text, changes={key: 6.5})
    assert "barriers 1 and 2 run into each other" in misfit["text"]
    assert "accepted" not in misfit["text"]
    mended = found(text, changes={key: 6.5}, remedies=True)
    assert "accepted" in mended["text"]
    assert found(text, changes={"rotor.nothing": 1.0})["key"] == "rotor.nothing"


def test_changes_keep_comments_and_reach_the_drawing(tmp_path: Path):
    """One value changes in the text, nothing else; the rib of the drawing has the new width."""
    client = client_of(demo_folder(tmp_path))
    text = client.get("/api/design", params={"path": DEMO}).json()["text"]
    key = "rotor.barrier[2].tangential_rib_mm"
    body = {"path": DEMO, "text": text, "changes": {key: 0.72}}
    answer = client.post("/api/outline", json=body).json()
    before, after = text.split("\n"), answer["text"].split("\n")
    assert [(a, b) for a, b in zip(before, after, strict=True) if a != b] == [
        ("tangential_rib_mm = 0.6", "tangential_rib_mm = 0.72")
    ]
    widths = {rib["name"]: rib["width_mm"] for rib in answer["drawing"]["ribs"]}
    assert widths["tangential_2_left"] == 0.72
    assert widths["tangential_1_left"] == 0.6
    assert {"key": key, "value": 0.72, "unit": "mm"}.items() <= next(
        one for one in answer["keys"] if one["key"] == key
    ).items()


def test_a_range_ends_where_the_check_says(tmp_path: Path):
    """Inside the outline holds, a hundredth beyond it does not."""
    page = demo_folder(tmp_path)
    with Ranges(page.folder) as ranges:
        client = client_of(page, ranges=ranges)
        text = client.get("/api/design", params={"path": DEMO}).json()["text"]
        key = "rotor.barrier[1].end_angle_deg"
        body = {"path": DEMO, "text": text, "key": key}
        found = client.post("/api/ranges", json=body).json()
        wrong = client.post("/api/ranges", json={"path": DEMO, "text": text, "key": "duty.x"})
        assert wrong.status_code == 422
    for end, beyond in (("least", -0.01), ("most", 0.01)):
        value = found[end]["value"]
        for changed, fits in ((value, True), (value + beyond, False)):
            body = {"path": DEMO, "text": text, "changes": {key: changed}}
            assert client.post("/api/outline", json=body).json()["ok"] is fits
        assert found[end]["why"]


def test_the_newest_limits_come_first_and_stale_ones_not_at_all(monkeypatch: pytest.MonkeyPatch):
    """One search at a time; what was given up while it waited is never begun."""
    begun: list[tuple[str, Future[dict[str, object]]]] = []

    class StandIn:
        def submit(self, method, folder, path, text, key):
            begun.append((key, Future()))
            return begun[-1][1]

    monkeypatch.setattr(Ranges, "_ready_worker", lambda self: StandIn())
    ranges = Ranges(FOLDER)
    first, stale, older, newest = (ranges.ask(DEMO, "", key) for key in "abcd")
    ranges.forget(stale)
    for k in range(3):
        begun[k][1].set_result({"key": begun[k][0]})
    assert [key for key, _ in begun] == ["a", "d", "c"]
    assert [one.result()["key"] for one in (first, newest, older)] == ["a", "d", "c"]
    assert stale.cancelled()


def test_drafts_and_saving(tmp_path: Path):
    """A draft outlives the server; a file changed meanwhile is not written over."""
    page = demo_folder(tmp_path)
    client = client_of(page)
    opened = client.get("/api/design", params={"path": DEMO}).json()
    text = opened["text"].replace("gap_mm = 0.4", "gap_mm = 0.45  # wider")
    body = {"path": DEMO, "text": text, "sha256": opened["sha256"]}
    client.post("/api/outline", json={**body, "keep": True})
    again = client_of(page).get("/api/design", params={"path": DEMO}).json()
    assert again["text"] == opened["text"]
    assert again["draft"] == {"text": text, "sha256": opened["sha256"], "is_stale": False}
    (tmp_path / DEMO).write_text(opened["text"] + "# by another program\n")
    assert client.get("/api/design", params={"path": DEMO}).json()["draft"]["is_stale"]
    refused = client.post("/api/save", json=body)
    assert refused.status_code == 409
    assert "another file now" in refused.json()["error"]
    assert (tmp_path / DEMO).read_text().endswith("# by another program\n")
    saved = client.post("/api/save", json={**body, "replace": True})
    assert saved.status_code == 200
    assert (tmp_path / DEMO).read_text() == text
    last = client.get("/api/design", params={"path": DEMO}).json()
    assert (last["draft"], last["sha256"]) == (None, saved.json()["sha256"])
    new = client.post("/api/save", json={"path": "new.toml", "text": text, "sha256": None})
    assert new.status_code == 200
    assert [path.name for path in tmp_path.glob(".*.tmp")] == []
