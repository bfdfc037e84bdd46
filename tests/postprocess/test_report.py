"""Reports as HTML and PDF: all that a report says, escaped, without a request, and repeatable."""

import re
from html.parser import HTMLParser
from io import BytesIO

import pypdf
import pytest

from lamwright.postprocess.report import (
    Grid,
    Lines,
    Listing,
    Paragraph,
    Picture,
    Report,
    Section,
    numeral,
    words,
)
from lamwright.postprocess.report_html import report_html
from lamwright.postprocess.report_pdf import report_pdf

HOSTILE = '<script>alert("1")</script> & </pre><img src=x onerror=alert(2)>'
SVG = (
    '<?xml version="1.0"?><!DOCTYPE svg>\n<svg width="10pt" height="10pt" viewBox="0 0 10 10" '
    'xmlns="http://www.w3.org/2000/svg"><defs><style type="text/css">*{stroke: red}</style>'
    '<path id="m1" d="M 0 0"/></defs><use href="#m1"/><g clip-path="url(#p1)"/></svg>'
)


class Seen(HTMLParser):
    """Tags, attributes and text of a page."""

    def __init__(self, page: str) -> None:
        """Read the page."""
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.text = ""
        self.feed(page)

    def handle_starttag(self, tag, attrs):
        """Keep a tag."""
        self.tags.append((tag, dict(attrs)))

    def handle_data(self, data):
        """Keep text."""
        self.text += data


@pytest.fixture
def folder(tmp_path):
    """A folder with two pictures of the same identifiers, one of them in letters' form too."""
    from matplotlib.image import imsave

    for name in ("one", "two"):
        (tmp_path / f"{name}.svg").write_text(SVG)
        imsave(tmp_path / f"{name}.png", [[0.0, 1.0], [1.0, 0.0]])
    return tmp_path


def report(text: str) -> Report:
    """A report with the text at every place there is."""
    table = Grid((text, "b"), ((words(text, "bad"), numeral("1.5", "torque_nm")),), text)
    long = Grid(tuple("abcdefgh"), (tuple(words(f"{text} {k}") for k in range(8)),) * 60)
    blocks = (Paragraph(text), Lines((text,)), Listing(text, text), table, long)
    drawn = (Picture("one", text), Picture("two", "second"))
    return Report(text, text, text, "good", (Section(text, blocks + drawn),), text)


def test_html_shows_text_as_text(folder):
    """A design's name may hold any characters; none becomes a tag."""
    plain, hostile = (Seen(report_html(report(text), folder)) for text in ("name", HOSTILE))
    assert [tag for tag, _ in plain.tags] == [tag for tag, _ in hostile.tags]
    assert hostile.text.count(HOSTILE) >= 10
    assert not any(tag == "script" for tag, _ in hostile.tags)


def test_html_asks_for_nothing(folder):
    """One file: no address but names of namespaces and places inside it."""
    page = report_html(report("name"), folder)
    seen = Seen(page)
    targets = [value for _, attrs in seen.tags for key, value in attrs.items() if "href" in key]
    assert targets
    assert all(target.startswith("#") for target in targets)
    assert set(re.findall(r"https?://[^\"' <]*", page)) <= {"http://www.w3.org/2000/svg"}
    assert "default-src 'none'" in page


def test_pictures_keep_their_identifiers_apart(folder):
    """The same identifier in two pictures must not make one show the other's parts."""
    page = report_html(report("name"), folder)
    identifiers = re.findall(r'\bid="([^"]+)"', page)
    assert len(identifiers) == len(set(identifiers))
    assert 'href="#two-m1"' in page
    assert "url(#two-p1)" in page


def test_pdf_says_what_html_says_and_repeats(folder):
    """All text is there, tables go over pages, and the same report gives the same bytes."""
    value = report("name with \u03b3 and <b>")
    data = report_pdf(value, folder)
    assert data == report_pdf(value, folder)
    pages = [page.extract_text() for page in pypdf.PdfReader(BytesIO(data)).pages]
    assert len(pages) > 2
    whole = "\n".join(pages)
    assert whole.count("name with \u03b3 and <b>") >= 8
    assert "1.5" in whole
    assert f"page {len(pages)}" in whole


@pytest.mark.parametrize("lines", [20, 24, 28, 32, 36])
def test_a_heading_stands_on_the_page_of_its_picture(folder, lines):
    """However much stands above: a heading alone at a page's foot heads nothing."""
    above = Section("above", (Lines(tuple(f"line {k}" for k in range(lines))),))
    drawn = Section("of the picture", (Picture("one", "the caption"),))
    data = report_pdf(Report("a", "b", "c", "good", (above, drawn), "d"), folder)
    pages = [page.extract_text() for page in pypdf.PdfReader(BytesIO(data)).pages]
    assert [("of the picture" in page) == ("the caption" in page) for page in pages] == [True] * 2
