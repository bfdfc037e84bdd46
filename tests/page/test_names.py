"""Names and texts that strangers chose: scripts in them never run, names lead nowhere else."""

import os
import shutil
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from page_windows import Served, Watched
from study_rows import ANGLE, plain_evaluation, plain_study, plain_task

from lamwright.app.evaluation import Evaluation
from lamwright.app.ledger import Ledger
from lamwright.app.study import StudyKey

Opened = Callable[..., Watched]
pytestmark = pytest.mark.slow

# Run by a parser of HTML or SVG, as an attribute or a link, each sets a flag; a dialog shows too.
SCRIPT = (
    '"\'><img src=x onerror="window.ran=1;alert(1)"><svg onload=window.ran=1></svg>'
    "<script>window.ran=1</script></text></title><a href=javascript:window.ran=1>x</a>${1}{{7*7}}"
)
TOML = SCRIPT.replace("\\", "\\\\").replace('"', '\\"')


def ran(page: Any) -> bool:
    """Whether a script of the names has run, or come into the document as an element."""
    found: Any = page.evaluate(
        "window.ran === 1 || "
        "document.querySelector('img, [onload], [onerror], a[href^=javascript]') !== null"
    )
    return bool(found)


@pytest.fixture
def hostile(served: Served) -> Iterator[Path]:
    """A design, cards, a study and its ledger with a script wherever a text may stand."""
    folder = served.folder / "hostile"
    shutil.rmtree(folder, ignore_errors=True)
    card = folder / "<img src=x onerror=window.ran=1>.toml"
    folder.mkdir()
    text = (served.folder / "steel" / "demo_050.toml").read_text(encoding="utf-8")
    text = text.replace("demo 0.50 mm sheet", TOML).replace("invented, plausible", TOML)
    card.write_text(text, encoding="utf-8")
    design = served.text().replace("demo 24/4 arc", TOML)
    lines = [
        f'{line.split(" = ")[0]} = "{card.name}"' if "_card = " in line else line
        for line in design.splitlines()
    ]
    text = "\n".join([f"# {SCRIPT}", *lines, ""])
    (folder / "<svg onload=window.ran=1>.toml").write_text(text, encoding="utf-8")
    study = f'name = "{TOML}"\nnote = "{TOML}"\nbase = "{TOML}"\n[[vary]]\nkey = "{TOML}"\n'
    (folder / "study<img src=x onerror=window.ran=1>.toml").write_text(study, encoding="utf-8")
    odd = plain_study(
        name=SCRIPT,
        note=SCRIPT,
        keys=(StudyKey(ANGLE, low=4.0, high=20.0), StudyKey(SCRIPT, choices=(SCRIPT, "b"))),
    )
    swept = folder / "study<img src=x onerror=window.ran=1>-sweep"
    swept.mkdir()
    with Ledger.open(swept, odd) as ledger:
        for k in range(1, 7):
            task, row = plain_task(k, odd), plain_evaluation(k)
            if k == 2:
                row = Evaluation("failed", SCRIPT, "outline", seconds=0.01)
            ledger.record(replace(task, values={**task.values, SCRIPT: SCRIPT}), row)
    yield folder
    shutil.rmtree(folder)


def test_scripts_in_names_are_text(opened: Opened, hostile: Path, served: Served, chromium: Any):
    """In the lists, the drawing's block, text, findings, ledger, verdict, its files and its report.

    Shown as they were written. The policy would stop a script that came into the page; that it had
    to would be an error in the console.
    """
    window = opened()
    keys, dialogs = window.page.keyboard, []
    window.page.on("dialog", lambda one: (dialogs.append(one.message), one.dismiss()))
    window.by_id("design").select_option("hostile/<svg onload=window.ran=1>.toml")
    window.until(lambda: SCRIPT in window.by_id("title-block").inner_text())
    window.page.wait_for_selector("#findings-head[data-passes=true]")
    keys.press("k")
    window.has_verdict()
    assert not ran(window.page)
    keys.press("s")
    window.by_id("study").select_option(index=0)
    window.until(lambda: "6 designs" in window.by_id("ledger-line").inner_text())
    assert SCRIPT in window.by_id("ledger").inner_text()  # why design 2 failed
    window.page.locator("#ledger button.row").first.click()
    assert SCRIPT in window.by_id("row-line").inner_text()
    keys.press("w")
    window.until(lambda: window.by_id("sweep-line").inner_text() != "")
    assert not ran(window.page)
    faults = [one for one in window.faults if "Failed to load resource" not in one]  # the sweep's
    assert faults == []
    keys.press("v")
    keys.press("Control+Enter")
    window.until(lambda: window.by_id("files").locator("button").count() > 8, 240)
    assert SCRIPT in window.by_id("figures").inner_text()
    with window.page.expect_download() as report:
        window.page.locator("#files button", has_text="report.html").click()
    assert not ran(window.page)
    keys.press("t")
    broken = window.shown_text() + f'["{TOML}"]\n"{TOML}" = "{TOML}"\n'
    window.by_id("text").fill(broken)
    window.page.wait_for_selector("#findings-head[data-passes=false]")
    assert "onerror" in window.by_id("findings-list").inner_text()
    assert not ran(window.page)
    keys.press("Escape")
    keys.press("Control+Shift+S")
    window.by_id("q-path").fill(SCRIPT)
    keys.press("Enter")
    window.until(lambda: "onerror" in window.by_id("q-fault").inner_text())
    assert not ran(window.page)
    assert dialogs == []
    # The report and the pictures by themselves, as files, where no policy of the page's holds.
    folder = next((served.folder / ".lamwright-page" / "full").glob("*/report.html")).parent
    newest = max(folder.parent.iterdir(), key=lambda one: one.stat().st_mtime)
    files = [Path(report.value.path()).rename(newest / "downloaded.html")]
    files += [newest / "report.html", *newest.glob("*.svg")]
    assert len(files) > 4
    alone = chromium.new_context().new_page()
    alone.on("dialog", lambda one: (dialogs.append(one.message), one.dismiss()))
    for file in files:
        alone.goto(file.as_uri())
        alone.wait_for_timeout(100)
        assert alone.evaluate("window.ran") is None, file.name
        if file.suffix == ".html":
            assert SCRIPT in alone.locator("body").inner_text().replace("\u00a0", " ")
    alone.context.close()
    (newest / "downloaded.html").unlink()
    assert dialogs == []


OUTSIDE = "outside the page's folder, or no name in it"
LONG, ELSEWHERE = "too long; accepted names up to 240 bytes", "a name that other systems refuse"
NAMES = {
    "../x": OUTSIDE,
    "sub/../../x": OUTSIDE,
    "/tmp/x": OUTSIDE,
    "~/x/../../../x": OUTSIDE,
    ".hidden": OUTSIDE,
    "..\\x": OUTSIDE,
    "C:\\x": OUTSIDE,
    "\\\\server\\share\\x": OUTSIDE,
    "a\u0000b": OUTSIDE,
    "a\u202eb": OUTSIDE,  # what follows would be shown from right to left
    "C:x": ELSEWHERE,
    "nul": ELSEWHERE,
    "con.x": ELSEWHERE,
    "a:stream": ELSEWHERE,
    "what?": ELSEWHERE,
    "x" * 300: LONG,
    "\u00e4" * 130: LONG,
    "out/x": OUTSIDE,  # out: a link that leads outside
    "out": OUTSIDE,
}


def test_names_that_lead_elsewhere_are_refused_in_the_dialog(opened: Opened, served: Served):
    """Outside, through a link, of other systems, too long, of a pipe: one line, nothing written.

    The dialog stays, with the name to be bettered; the console has no error.
    """
    outside = served.folder.parent / "outside"
    outside.mkdir(exist_ok=True)
    (served.folder / "out").symlink_to(outside)
    (served.folder / "out.toml").symlink_to(outside / "new.toml")
    (served.folder / "taken").write_text("mine", encoding="utf-8")
    os.mkfifo(served.folder / "pipe.toml")
    window = opened()
    before = sorted(served.folder.rglob("*"))
    keys = window.page.keyboard

    def refused(field: str, name: str) -> str:
        window.by_id(field).fill("")
        window.by_id(field).fill(name)
        window.page.evaluate("document.getElementById('q-fault').textContent = ''")
        keys.press("Enter")
        fault = window.by_id("q-fault")
        window.until(lambda: fault.inner_text() != "")
        assert window.page.evaluate("document.activeElement.id") == field
        said: str = fault.inner_text()
        assert "\n" not in said
        return said

    try:
        keys.press("Control+Shift+S")
        for name, said in NAMES.items():
            assert said in refused("q-path", name), name
        for name in ("pipe.toml", "pipe"):
            assert '"pipe.toml": is no file; accepted a file' in refused("q-path", name)
        assert '"no/x.toml": no such folder' in refused("q-path", "no/x")
        window.leave()
        keys.press("r")
        window.page.wait_for_selector("dialog[open]")
        for name, said in NAMES.items():
            assert said in refused("q-out", name), name
        assert refused("q-out", "taken").endswith(
            "taken: is a file; accepted a folder, new or existing"
        )
        assert "taken: is a file" in refused("q-out", "taken/below")
        assert "pipe.toml: is a file" in refused("q-out", "pipe.toml")
        keys.press("Escape")
        assert window.by_id("tab-release").is_hidden()
        assert sorted(served.folder.rglob("*")) == before
        assert list(outside.iterdir()) == []
        assert window.faults == []
    finally:
        for name in ("out", "out.toml", "taken", "pipe.toml"):
            (served.folder / name).unlink()


def test_what_is_no_file_holds_nobody_up(opened: Opened, served: Served):
    """Pipes named as a design, a card and a draft are told of at once; nothing waits for them."""
    drafts = served.folder / ".lamwright-page" / "drafts"
    drafts.mkdir(parents=True, exist_ok=True)
    for path in (served.folder / "pipe.toml", drafts / f"{'0' * 32}.json"):
        os.mkfifo(path)
    text = served.text().replace('rotor_card = "steel/demo_050.toml"', 'rotor_card = "pipe.toml"')
    assert "pipe.toml" in text
    (served.folder / "by_pipe.toml").write_text(text, encoding="utf-8")
    try:
        window = opened()
        assert "pipe.toml" not in window.by_id("design").inner_text().split()
        window.by_id("design").select_option("by_pipe.toml")
        window.page.wait_for_selector("#findings-head[data-passes=false]")
        assert "pipe.toml" in window.by_id("findings-list").inner_text()
        assert window.faults == []
    finally:
        for name in ("pipe.toml", "by_pipe.toml"):
            (served.folder / name).unlink()
