"""Attacks from another page that the same browser has open, and a token that leaks nowhere.

The foreign page lies on another port of the loopback: the nearest that a stranger can come, for the
browser takes both for one site. Each of its ways is tried for real; what counts is that nothing was
read, nothing written, and the user's own window goes on.
"""

import http.server
import threading
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from typing import Any

import pytest
from page_windows import DEMO, Served, Watched, browser_path

Opened = Callable[..., Watched]
pytestmark = pytest.mark.slow


@dataclass
class Foreign:
    """A stranger's server: what it sends is this module's, what it is asked is written down."""

    address: str = ""
    body: str = ""
    heard: list[str] = field(default_factory=list)


@pytest.fixture
def foreign() -> Iterator[Foreign]:
    own = Foreign()

    class Handler(http.server.BaseHTTPRequestHandler):
        def do_GET(self) -> None:
            own.heard.append(f"{self.requestline}\n{self.headers}")
            self.send_response(200)
            self.send_header("Content-Type", "text/html")
            self.end_headers()
            self.wfile.write(own.body.encode())

        do_POST = do_GET

        def log_message(self, *_: object) -> None:
            pass

    server = http.server.ThreadingHTTPServer(("127.0.0.1", 0), Handler)
    own.address = f"http://127.0.0.1:{server.server_port}/"
    thread = threading.Thread(target=server.serve_forever, daemon=True)
    thread.start()
    yield own
    server.shutdown()
    server.server_close()


ATTACK = """
<body><form id="form" method="post" action="TARGET/api/save" enctype="text/plain" target="inner">
<input name='{"path": "DEMO", "replace": true, "sha256": null, "text": "' value='"}'></form>
<iframe name="inner"></iframe><script>
const results = {}, target = "TARGET", text = JSON.stringify(
  {path: "DEMO", text: "stolen = 1", sha256: null, replace: true});
const channel = new BroadcastChannel("lamwright");
results.heard = [];
channel.onmessage = event => results.heard.push(event.data);
channel.postMessage({kind: "token", token: "a-token-of-a-stranger-who-wants-in"});
const loads = (tag, attributes) => new Promise(done => {
  const one = document.createElement(tag);
  one.onload = () => done("LOADED"); one.onerror = () => done("refused");
  Object.assign(one, attributes); document.body.append(one);
});
const asked = async (path, options) => {
  try { return `READ ${(await (await fetch(target + path, options)).text()).length}`; }
  catch { return "refused"; }
};
(async () => {
  for (const path of ["/", "/api/page", "/api/design?path=DEMO", "/static/main.js"]) {
    results[`fetch ${path}`] = await asked(path);
    results[`fetch with credentials ${path}`] = await asked(path, {credentials: "include"});
    results[`opaque ${path}`] = await fetch(target + path, {mode: "no-cors"})
      .then(answer => answer.type, () => "refused");
  }
  results["fetch with a token"] = await asked("/api/page", {headers: {"X-Page-Token": "guess"}});
  results["fetch save"] = await asked("/api/save", {method: "POST", body: text});
  await fetch(target + "/api/save", {method: "POST", body: text, mode: "no-cors"}).catch(() => {});
  navigator.sendBeacon(target + "/api/save", text);
  document.getElementById("form").submit();
  results.image = await loads("img", {src: target + "/static/icon.svg"});
  results.script = await loads("script", {src: target + "/static/theme_start.js"});
  results.sheet = await loads("link", {rel: "stylesheet", href: target + "/static/style.css"});
  results.module = await import(target + "/static/format.js").then(() => "LOADED", () => "refused");
  results.socket = await new Promise(done => {
    const one = new WebSocket(target.replace("http", "ws") + "/api/work");
    one.onopen = () => done("OPEN"); one.onerror = () => done("refused");
  });
  results.events = await new Promise(done => {
    const one = new EventSource(target + "/api/tasks");
    one.onopen = () => done("OPEN"); one.onerror = () => { one.close(); done("refused"); };
  });
  const frame = document.createElement("iframe");
  frame.src = target + "/"; document.body.append(frame);
  await new Promise(done => { frame.onload = done; });
  try { results.frame = `READ ${frame.contentDocument.body.innerHTML.length}`; }
  catch { results.frame = "refused"; }
  results.frames = frame.contentWindow.length;
  results.end = true;
})();
window.steal = () => { window.opened = window.open(target + "/#token=a-stranger-s-token-of-20"); };
</script>"""


def test_a_foreign_page_gets_nothing(opened: Opened, served: Served, foreign: Foreign):
    """By fetch, form, beacon, socket, frame, image, script, style sheet, module, window, channel.

    Beside it the user's own window is open: it goes on, and no design was touched.
    """
    window = opened()
    before, address = served.text(), f"http://127.0.0.1:{served.port}"
    foreign.body = ATTACK.replace("TARGET", address).replace("DEMO", DEMO)
    page = window.page.context.new_page()
    page.goto(foreign.address)
    window.until(lambda: page.evaluate("results.end === true"))
    results: Any = page.evaluate("results")
    assert results.pop("heard") == []
    assert results.pop("frames") == 0
    assert results.pop("end")
    assert {name: said for name, said in results.items() if said != "refused"} == {}
    assert len(results) > 15
    for frame in page.frames[1:]:
        assert "refused" in frame.locator("body").inner_text()
    with page.context.expect_page() as stolen:
        page.evaluate("steal()")
    stolen.value.wait_for_load_state()
    assert "another page" in stolen.value.locator("body").inner_text()
    window.page.wait_for_timeout(300)
    assert served.text() == before
    assert list((served.folder / ".lamwright-page" / "drafts").glob("*")) == []
    window.page.keyboard.press("d")
    window.page.keyboard.press("ArrowUp")
    window.page.keyboard.press("Enter")
    window.is_draft()
    window.page.reload()
    window.is_draft()
    assert window.faults == []


def test_a_name_that_points_here_gets_nothing(chromium: Any, served: Served):
    """A stranger's name that resolves to the loopback (DNS rebinding), and a name of this machine.

    The browser then takes the stranger's page and the server for one origin: the Host tells.
    """
    browser = chromium.browser_type.launch(
        executable_path=browser_path(),
        args=["--no-sandbox", "--host-resolver-rules=MAP * 127.0.0.1"],
    )
    try:
        page = browser.new_page()
        for name in ("stranger.test", "127.0.0.1.stranger.test", "localhost.stranger.test"):
            for path in ("/", "/static/main.js", "/api/page"):
                answer = page.goto(f"http://{name}:{served.port}{path}")
                assert answer.status == 403
                assert "another name" in page.locator("body").inner_text()
            said: Any = page.evaluate(
                "fetch('/api/page', {headers: {'X-Page-Token': 'x'}}).then(one => one.status)"
            )
            assert said == 403
    finally:
        browser.close()


def test_the_token_leaks_nowhere(opened: Opened, served: Served, foreign: Foreign):
    """Not by Referer or `document.referrer`, address, history, title, page, or the server's words.

    Back from the stranger's page the window goes on without an address.
    """
    window = opened()
    page = window.page
    token = served.address.split("#token=")[1]
    window.has_verdict()

    def seen() -> str:
        shown: Any = page.evaluate(
            "[location.href, document.title, document.documentElement.outerHTML, "
            "document.referrer, JSON.stringify(history.state), document.cookie, name, "
            "performance.getEntriesByType('resource').map(one => one.name).join()].join(' ')"
        )
        return str(shown)

    assert token not in seen()
    assert page.evaluate("JSON.stringify(localStorage)").count(token) == 0
    foreign.body = "<title>strange</title>"
    page.evaluate(f"location.href = '{foreign.address}'")
    page.wait_for_url(foreign.address)
    assert page.evaluate("document.referrer") == ""
    assert page.evaluate("JSON.stringify(sessionStorage)") == "{}"
    assert [one for one in foreign.heard if token in one or str(served.port) in one] == []
    page.go_back()
    page.wait_for_selector("body[data-link=on]")
    assert page.url == f"http://127.0.0.1:{served.port}/"
    assert [url for url in window.requests if token in url] == []
    page.evaluate("fetch('/api/design?path=../outside.toml')")
    assert token not in seen()
    assert window.faults[:-1] == []  # the one asked for just now
    assert served.said.read_text(encoding="utf-8") == ""


def test_a_wrong_address_takes_the_right_one_from_no_window(opened: Opened, served: Served):
    """An address with another token, opened in this browser: all windows go on, that one too."""
    window, second = opened(), opened()
    second.page.goto(f"http://127.0.0.1:{served.port}/#token=one-that-somebody-sent-by-mail")
    second.page.wait_for_selector("body[data-link=on]")
    assert second.page.url == f"http://127.0.0.1:{served.port}/"
    second.page.reload()
    second.page.wait_for_selector(".handle")
    window.page.reload()
    window.page.wait_for_selector(".handle")
    assert window.faults == []
    other = opened("another")
    other.page.evaluate("sessionStorage.clear(); location.hash = ''")
    other.page.reload()
    other.page.wait_for_selector("#state-line[data-state=strange]")
    other.page.get_by_role("button", name="Paste the address").click()
    for typed, said in (
        ("http://127.0.0.1/", "no address of a page"),
        (f"{served.address}x", "not the token of this start"),
    ):
        other.by_id("q-address").fill(typed)
        other.page.keyboard.press("Enter")
        other.until(lambda said=said: said in other.by_id("q-fault").inner_text())
    other.page.keyboard.press("Escape")
    other.page.evaluate(f"location.href = '{served.address}'")  # the same page: no reload
    other.page.wait_for_selector(".handle")
    assert "token" not in other.page.url
