"""The report of a frame is one page that needs nothing else and says what was computed."""

import re
from html.parser import HTMLParser

import pytest

from explorer.meanings import CAUTIONS
from explorer.numbers import with_unit
from explorer.plots_svg import round_ticks
from explorer.report import report_html
from explorer.units import INCH_POUND
from model.results.whatif import ranked
from tests.explorer.detailed import (
    SUBJECT,
    awkward_box,
    braced_box,
    plain_ladder,
    springy_ladder,
)

VOID = {"meta", "br", "hr", "img", "input", "link"}


class Page(HTMLParser):
    """Collects what a reader of the page meets, and complains about tags that do not match."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.open: list[str] = []
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.words: list[str] = []
        self.tables: list[list[list[str]]] = []
        self.feed(text)
        self.close()
        assert self.open == []

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)
        if tag == "table":
            self.tables.append([])
        if tag == "tr":
            self.tables[-1].append([])
        if tag in ("td", "th"):
            self.tables[-1][-1].append("")

    def handle_startendtag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        if "style" in self.open:
            return
        self.words.append(data)
        if any(tag in self.open for tag in ("td", "th")):
            self.tables[-1][-1][-1] += data

    @property
    def text(self) -> str:
        return " ".join(" ".join(self.words).split())


@pytest.fixture(params=[braced_box, plain_ladder, springy_ladder], ids=lambda f: f.__name__)
def detail(request):
    return request.param()


def test_the_page_is_well_formed_and_asks_for_nothing_outside(detail):
    html = report_html(detail, SUBJECT)
    page = Page(html)
    for tag, attributes in page.tags:
        assert tag not in {"script", "link", "img", "iframe", "object", "embed", "base", "form"}
        for name, value in attributes.items():
            assert not name.startswith("on")
            assert name not in {"src", "href", "xlink:href", "action", "data"}
            if name != "xmlns":
                assert "http:" not in (value or "")
                assert "https:" not in (value or "")
    assert "@import" not in html
    assert "url(" not in html


def test_every_identity_is_used_once_and_every_reference_finds_it(detail):
    tags = Page(report_html(detail, SUBJECT)).tags
    ids = [a["id"] for _, a in tags if a.get("id")]
    assert len(ids) == len(set(ids))
    for _, attributes in tags:
        for label in (attributes.get("aria-labelledby") or "").split():
            assert label in ids


def test_headings_come_in_order_and_tables_have_captions_and_titles(detail):
    page = Page(report_html(detail, SUBJECT))
    names = [tag for tag, _ in page.tags]
    assert names.count("h1") == 1
    assert names.index("h1") < names.index("h2")
    assert names.count("caption") == names.count("table") > 3
    for table in page.tables:
        assert len({len(row) for row in table}) == 1


def test_the_key_numbers_are_those_of_the_frame(detail):
    text = Page(report_html(detail, SUBJECT)).text
    for value, unit in (
        (detail.mass, "kg"),
        (detail.twist, "N·m/deg"),
        (detail.bend, "N/mm"),
        (detail.twist / detail.mass, "N·m/deg per kg"),
    ):
        assert with_unit(value, unit).replace("\u00a0", " ") in text
    for caution in CAUTIONS:
        assert caution in text


def test_inch_and_pound_are_shown_when_asked_for():
    text = Page(report_html(plain_ladder(), SUBJECT, INCH_POUND)).text
    # 973.1095 N·m/deg / 1.3558179 = 717.73 ft·lbf/deg; 60.288 kg / 0.45359237 = 132.9 lb
    assert "718 ft·lbf/deg" in text
    assert "133 lb" in text


def test_what_others_wrote_is_shown_as_text_never_as_markup():
    html = report_html(awkward_box(), SUBJECT)
    page = Page(html)
    assert "<script" not in html
    assert "Check vehicle <A & B>" in page.text
    assert "Side <bracing>" in page.text
    assert "=1+1 <script>alert('x')</script>" in page.text


def test_cut_quantities_add_up_in_the_page(detail):
    cuts = next(t for t in Page(report_html(detail, SUBJECT)).tables if t[0][0] == "Item")
    quantity = cuts[0].index("Quantity")
    assert sum(int(row[quantity]) for row in cuts[1:]) == detail.batch.present[0].sum()


def test_group_shares_add_up_to_the_whole(detail):
    groups = next(t for t in Page(report_html(detail, SUBJECT)).tables if t[0][0] == "Group")
    column = groups[0].index("Energy share")
    shares = [float(re.sub(r"[^0-9.]", "", row[column])) for row in groups[1:]]
    # written to two figures: half a per cent each at worst
    assert sum(shares) == pytest.approx(100, abs=0.5 * len(shares))


def test_the_best_changes_are_named_and_no_rail_is_proposed_to_go():
    detail = braced_box()
    page = Page(report_html(detail, SUBJECT))
    gains, losses = (t for t in page.tables if t[0][0] == "Change")
    assert len(gains) == 11
    assert gains[1][0] == f"add {ranked(detail.layout).changes[0].name}"
    assert all(row[1].startswith("+") for row in gains[1:])
    assert all(row[1].startswith("−") for row in losses[1:])
    assert not any(" rail" in row[0] for row in losses[1:])


def test_joints_that_give_are_said_beside_their_tube():
    text = Page(report_html(springy_ladder(), SUBJECT)).text
    assert "20,000 N·m/rad, 300,000,000 N/m along" in text


@pytest.mark.parametrize(
    "low, high, ticks",
    [
        (0.0, 1.03, [0.0, 0.5, 1.0, 1.5]),
        (0.0, 5.0, [0.0, 1.0, 2.0, 3.0, 4.0, 5.0]),
        (-0.02, 0.07, [-0.02, 0.0, 0.02, 0.04, 0.06, 0.08]),
    ],
)
def test_axis_marks_are_round_and_cover_the_stretch(low, high, ticks):
    assert round_ticks(low, high) == pytest.approx(ticks)
