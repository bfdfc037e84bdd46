"""Attacks on the page's server that must be refused before anything of them is used."""

import os
from pathlib import Path

import pytest
from page_client import DEMO, DOOR, HEADERS, ORIGIN, client_of, demo_folder
from starlette.testclient import TestClient

from lamwright.app.page_api import Page
from lamwright.app.page_guard import LARGEST_BODY


@pytest.fixture
def page(tmp_path: Path) -> Page:
    return demo_folder(tmp_path)


@pytest.fixture
def client(page: Page) -> TestClient:
    return client_of(page)


def test_the_page_itself_is_let_through(client: TestClient):
    """Else the refusals below would prove nothing."""
    assert client.get("/").status_code == 200
    assert client.get("/api/page").json()["start"] == DEMO
    text = client.get("/api/design", params={"path": DEMO}).json()["text"]
    assert client.post("/api/outline", json={"path": DEMO, "text": text}).json()["ok"]


@pytest.mark.parametrize("host", ["evil.example", "evil.example:8765", "127.0.0.1:80", "127.0.0.1"])
def test_another_host_is_refused(client: TestClient, host: str):
    """A name that an attacker points at the loopback (DNS rebinding) is no name of this server."""
    for path in ("/", "/static/index.html", "/api/page"):
        answer = client.get(path, headers={"host": host})
        assert (answer.status_code, answer.json()["error"]) == (
            403,
            "refused: this server has another name",
        )


@pytest.mark.parametrize(
    "origin",
    ["http://evil.example", "null", "https://127.0.0.1:8765", "http://127.0.0.1:9", ORIGIN + "/"],
)
def test_another_origin_is_refused(client: TestClient, origin: str):
    """Also with the right token, reading and writing alike."""
    assert client.get("/api/page", headers={"origin": origin}).status_code == 403
    assert client.post("/api/outline", headers={"origin": origin}, json={}).status_code == 403


def test_a_write_must_say_where_it_comes_from(page: Page):
    """A form of a foreign page in an old browser sends no Origin."""
    client = client_of(page)
    del client.headers["origin"]
    assert client.post("/api/save", json={"path": "a.toml", "text": ""}).status_code == 403
    assert client.get("/api/page").status_code == 200
    assert client.get("/", headers={"sec-fetch-site": "cross-site"}).status_code == 403


@pytest.mark.parametrize("token", [None, "", "wrong", DOOR.token + "x", DOOR.token[:-1]])
def test_nothing_without_the_token(page: Page, token: str | None):
    """Every address below /api, those that do not exist included."""
    client = client_of(page)
    del client.headers["x-page-token"]
    headers = {} if token is None else {"x-page-token": token}
    for path in ("/api/page", f"/api/design?path={DEMO}", "/api/nothing", "/api"):
        assert client.get(path, headers=headers).status_code == 403, path
    for name in ("outline", "save", "draft", "ranges"):
        assert client.post(f"/api/{name}", headers=headers, json={}).status_code == 403


OUTSIDE = [
    "../secret.toml",
    "/etc/passwd",
    "/etc/secret.toml",
    "sub/../../secret.toml",
    "..\\secret.toml",
    "link.toml",
    "linked/secret.toml",
    ".lamwright-page/x.toml",
    ".hidden.toml",
    "a\0.toml",
    "",
    ".",
    "x" * 500 + ".toml",
]


@pytest.mark.parametrize("name", OUTSIDE)
def test_no_name_leads_outside(tmp_path: Path, name: str):
    """As it is, percent-encoded or by a link; neither to read nor to write."""
    inner, secret = tmp_path / "inner", tmp_path / "secret.toml"
    inner.mkdir()
    secret.write_text('name = "secret"\n[stator]\n[rotor]\n')
    client = client_of(demo_folder(inner))
    (inner / "link.toml").symlink_to(secret)
    (inner / "linked").symlink_to(tmp_path)
    (inner / ".hidden.toml").write_text("hidden = 1")
    read = client.get("/api/design", params={"path": name})
    assert read.status_code in (403, 422)
    assert "secret" not in read.text.replace(name, "").replace("secret.toml", "")
    for address in ("save", "draft"):
        body = {"path": name, "text": "x = 1", "sha256": None, "replace": True}
        assert client.post(f"/api/{address}", json=body).status_code in (403, 422)
    assert secret.read_text().startswith('name = "secret"')
    listed = [one["path"] for one in client.get("/api/page").json()["designs"]]
    assert listed == [DEMO]


NEW_NAMES = ["../x", "link", "C:x", "nul", "what?", "x" * 300, "no/x", "pipe", ".x", "\0"]


def test_a_name_is_refused_in_the_same_words_before_and_after(tmp_path: Path):
    """What the page asks before it tries is what the server would say, of files and of folders.

    A name that may be used says whether there is something; nothing is made or written by asking.
    """
    client = client_of(demo_folder(tmp_path))
    (tmp_path / "link.toml").symlink_to(tmp_path.parent / "elsewhere.toml")
    (tmp_path / "link").symlink_to(tmp_path.parent)
    for name in ("pipe.toml", "pipe"):
        os.mkfifo(tmp_path / name)
    before = sorted(tmp_path.rglob("*"))

    def asked(name: str, use: str) -> dict[str, object]:
        found: dict[str, object] = client.get("/api/name", params={"path": name, "use": use}).json()
        return found

    for name in NEW_NAMES:
        body = {"path": f"{name}.toml", "text": "", "sha256": None, "replace": True}
        refused = client.post("/api/save", json=body)
        assert refused.status_code in (403, 422), name
        assert asked(f"{name}.toml", "design")["fault"] == refused.json()["error"]
        if name != "no/x":  # folders are made with what is above them
            refused = client.post("/api/release", json={"path": DEMO, "out": name})
            assert refused.status_code in (403, 422), name
            assert asked(name, "folder")["fault"] == refused.json()["error"]
    assert asked(DEMO, "design") == {"fault": None, "exists": True}
    assert asked("new.toml", "design") == {"fault": None, "exists": False}
    assert asked("new/folder", "folder") == {"fault": None, "exists": False}
    assert "is a file" in str(asked(f"{DEMO}/below", "folder")["fault"])
    assert [
        path for path in sorted(tmp_path.rglob("*")) if ".lamwright-page" not in str(path)
    ] == before


def test_a_pipe_is_no_design(tmp_path: Path):
    """Opening one would wait for ever; as a study, a study's base, a card or a draft neither."""
    page = demo_folder(tmp_path)
    client = client_of(page)
    os.mkfifo(tmp_path / "pipe.toml")
    answer = client.get("/api/design", params={"path": "pipe.toml"})
    assert (answer.status_code, "not a regular file" in answer.text) == (422, True)
    (tmp_path / "study.toml").write_text('base = "pipe.toml"')
    for study in ("pipe.toml", "study.toml"):
        assert client.post("/api/sweep", json={"path": study}).status_code == 422
    (page.folder.cache / "drafts").mkdir(exist_ok=True)
    os.mkfifo(page.folder.cache / "drafts" / f"{'0' * 32}.json")
    assert [one["path"] for one in client.get("/api/page").json()["designs"]] == [DEMO]


@pytest.mark.parametrize(
    "name",
    ["%2e%2e/secret.toml", "..%2fsecret.toml", "%2e%2e%2fsecret.toml"],
)
def test_no_encoded_name_leads_outside(tmp_path: Path, name: str):
    """The address is decoded once, then the name is looked at."""
    (tmp_path / "inner").mkdir()
    (tmp_path / "secret.toml").write_text("secret = 1")
    answer = client_of(demo_folder(tmp_path / "inner")).get(f"/api/design?path={name}")
    assert answer.status_code in (403, 422)
    assert "secret = 1" not in answer.text


@pytest.mark.parametrize("way", ["../app/cli.py", "%2e%2e/cli.py", "..%2fcli.py", "//etc/passwd"])
def test_static_files_are_those_of_the_page(client: TestClient, way: str):
    """The package's own code is not served, encoded or not."""
    assert client.get(f"/static/{way}").status_code in (403, 404)


def test_a_design_cannot_name_cards_outside(tmp_path: Path):
    """A design that was received by mail may name any file; none but the folder's is opened."""
    (tmp_path / "inner").mkdir()
    client = client_of(demo_folder(tmp_path / "inner"))
    text = client.get("/api/design", params={"path": DEMO}).json()["text"]
    for name in ("/etc/passwd", "../x.toml"):
        changed = text.replace("steel/demo_050.toml", name)
        answer = client.post("/api/outline", json={"path": DEMO, "text": changed})
        assert answer.status_code == 403
        assert "outside the page's folder" in answer.json()["error"]


def test_bodies_are_bounded_as_they_come(client: TestClient):
    """By the length that is stated, and where none is stated by what has come."""
    taken = 0

    def pieces():
        nonlocal taken
        for _ in range(1024):
            taken += 1 << 16
            yield b" " * (1 << 16)

    large = client.post("/api/outline", headers={"content-length": str(1 << 30)}, content=b"")
    assert large.status_code == 413
    answer = client.post("/api/outline", content=b"x" * (LARGEST_BODY + 1))
    assert answer.status_code == 413
    answer = client.post("/api/outline", content=pieces())
    assert (answer.status_code, "accepted bodies up to" in answer.json()["error"]) == (413, True)
    assert taken >= LARGEST_BODY
    assert client.post("/api/outline", content=b"x" * LARGEST_BODY).status_code == 422


@pytest.mark.parametrize(
    "body", [b"", b"[]", b"null", b'{"path": 1}', b"\xff", b"[" * 100000, b'{"path": NaN}']
)
def test_malformed_bodies_are_told_in_one_line(client: TestClient, body: bytes):
    """No traceback, no 500."""
    answer = client.post("/api/outline", content=body)
    assert answer.status_code == 422
    assert "\n" not in answer.json()["error"]


HALF = chr(92) + "ud800"  # half a character, as JSON can escape it


@pytest.mark.parametrize("name", ["outline", "save", "draft", "ranges", "jobs"])
def test_half_a_character_is_no_text(client: TestClient, name: str):
    """JSON can escape what UTF-8 cannot hold: refused, no traceback, nothing kept."""
    body = '{"path": "x.toml", "text": "HALF", "want": "coarse", "key": "k", "sha256": null}'
    answer = client.post(f"/api/{name}", content=body.replace("HALF", HALF).encode())
    assert (answer.status_code, "half a character" in answer.json()["error"]) == (422, True)
    assert client.get("/api/page").json()["designs"] == [{"path": DEMO, "name": "demo 24/4 arc"}]


@pytest.mark.parametrize(
    "text",
    [
        "gap_mm = inf",
        "gap_mm = nan",
        "gap_mm = " + "9" * 4000,
        "a = " + "[" * 50000,
        ".".join("a" * 3000) + " = 1",
    ],
    ids=["inf", "nan", "digits", "brackets", "dots"],
)
def test_odd_texts_have_findings(client: TestClient, text: str):
    """What TOML can say and JSON cannot, and what is nested beyond all use, is a finding."""
    design = client.get("/api/design", params={"path": DEMO}).json()["text"]
    odd = design.replace("gap_mm = 0.4", text) if text.startswith("gap") else text
    answer = client.post("/api/outline", json={"path": DEMO, "text": odd})
    assert (answer.status_code, answer.json()["ok"]) == (200, False)
    assert answer.json()["findings"]
    body = '{"path": "x.toml", "text": "a = 1", "changes": {"a": 1e400}}'
    assert client.post("/api/outline", content=body.encode()).status_code == 422


def test_links_in_a_received_folder_lead_nowhere(tmp_path: Path):
    """Of the page's own folders, of a ledger, and of a card's way by a link and back."""
    (tmp_path / "inner" / "a" / "b").mkdir(parents=True)
    inner = tmp_path / "inner"
    client = client_of(demo_folder(inner))
    text = client.get("/api/design", params={"path": DEMO}).json()["text"]
    (inner / "way").symlink_to(inner / "a" / "b")
    roundabout = text.replace("steel/demo_050.toml", "way/../../steel/demo_050.toml")
    answer = client.post("/api/jobs", json={"want": "full", "path": DEMO, "text": roundabout})
    assert answer.status_code == 403
    (inner / "swept").mkdir()
    (tmp_path / "ledger.sqlite").write_bytes(b"secret")
    (inner / "swept" / "ledger.sqlite").symlink_to(tmp_path / "ledger.sqlite")
    assert client.get("/api/ledger?folder=swept").status_code == 403
    assert client.post("/api/pick", json={"folder": "swept", "row": 1}).status_code == 403
    (tmp_path / "elsewhere").mkdir()
    (inner / ".lamwright-page").mkdir(exist_ok=True)
    (inner / ".lamwright-page" / "drafts").symlink_to(tmp_path / "elsewhere")
    body = {"path": DEMO, "text": text, "sha256": None}
    assert client.post("/api/draft", json=body).status_code == 403
    assert list((tmp_path / "elsewhere").iterdir()) == []


def test_names_are_data(tmp_path: Path):
    """A script in a design's name, a note or a file's name comes back as JSON text alone."""
    script = "<script>alert(1)</script>"
    folder = demo_folder(tmp_path).folder
    text = (tmp_path / DEMO).read_text()
    text = text.replace('name = "demo 24/4 arc"', f'name = "{script}"')
    file = "<img src=x onerror=alert(1)>.toml"
    (tmp_path / file).write_text(text)
    client = client_of(Page(folder, None))
    answer = client.get("/api/page")
    assert answer.headers["content-type"] == "application/json"
    assert {"path": file, "name": script} in answer.json()["designs"]
    answer = client.post("/api/outline", json={"path": file, "text": text})
    assert answer.headers["content-type"] == "application/json"
    assert answer.json()["name"] == script
    assert script not in str(answer.json()["drawing"])


def test_every_answer_has_the_policy(client: TestClient):
    """No inline script, no foreign source, no frame, whatever the page shows."""
    for answer in (client.get("/"), client.get("/api/page"), client.get("/api/nothing")):
        policy = answer.headers["content-security-policy"]
        assert policy.startswith("default-src 'self'; ")
        assert "unsafe" not in policy
        assert "frame-ancestors 'none'" in policy
        assert answer.headers["x-content-type-options"] == "nosniff"
        assert answer.headers["referrer-policy"] == "no-referrer"
        assert answer.headers["cache-control"] == "no-store"


def test_the_token_is_new_at_every_start():
    """And long enough that nobody tries them all: 256 bits."""
    from lamwright.app.page_guard import new_token

    assert len({new_token() for _ in range(100)}) == 100
    assert len(new_token()) >= 43
    assert HEADERS["x-page-token"] == DOOR.token
    assert os.path.isabs(DOOR.address) is False
