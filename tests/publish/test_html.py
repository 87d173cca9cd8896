"""The HTML as a file: escaped, self-contained, unique ids."""

from __future__ import annotations

import re
from html.parser import HTMLParser
from types import ModuleType

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import PublishError
from reportgen.publish import Published, drawing, publish
from reportgen.publish.html_writer import text


class Page(HTMLParser):
    """Collects what the tests ask of a page."""

    def __init__(self, source: str) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str, str]] = []
        self.words: list[str] = []
        self.feed(source)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += [(tag, name, value or "") for name, value in attrs]

    def handle_data(self, data: str) -> None:
        self.words.append(data)

    def values(self, name: str) -> list[str]:
        return [value for _, n, value in self.attributes if n == name]


@pytest.fixture(scope="module")
def page(published: Published) -> Page:
    return Page(published.html.decode())


def test_ids_are_unique_and_links_inside_resolve(page: Page) -> None:
    ids = page.values("id")
    assert len(ids) == len(set(ids))
    inside = [href[1:] for href in page.values("href") if href.startswith("#")]
    assert len(inside) > 20
    assert set(inside) <= set(ids)


def test_nothing_is_loaded(page: Page, published: Published) -> None:
    loading = {"src", "srcset", "poster", "data", "action", "background"}
    for tag, name, value in page.attributes:
        if name in loading:
            assert value.startswith("data:"), (tag, name, value)
    assert "link" not in page.tags
    assert "iframe" not in page.tags
    style = re.search(r"<style>(.*?)</style>", published.html.decode(), re.DOTALL)
    assert style
    assert "@import" not in style[1]
    assert all(url.startswith("data:") for url in re.findall(r"url\(([^)]*)\)", style[1]))


def test_there_is_no_attribute_that_runs_or_styles(page: Page) -> None:
    assert not [a for a in page.attributes if a[1].startswith("on") or a[1] == "style"]
    assert page.tags.count("script") == 3  # two figures' axes, and ours


def test_the_policy_forbids_the_network(page: Page) -> None:
    policy = next(v for v in page.values("content") if "default-src" in v)
    assert policy.startswith("default-src 'none';")
    assert "unsafe" not in policy
    assert "http" not in policy


def test_awkward_text_is_text(page: Page, sample: ModuleType) -> None:
    words = "".join(page.words)
    for awkward in sample.HOSTILE[:6]:
        assert awkward in words
    assert "U+202E" in words
    assert "\u202e" not in words


def test_what_a_formula_only_implies_is_not_spelled_out(sample: ModuleType) -> None:
    made = publish(sample.small(text=r"$\varphi = \arctan \frac{a}{b}$")).html.decode()
    assert "\u2061" in made
    assert "U+2061" not in made


def test_every_formula_has_words(page: Page) -> None:
    said = page.values("alttext")
    assert len(said) == page.tags.count("math")
    assert all(said)


def test_the_file_is_small(published: Published) -> None:
    assert len(published.html) < 1_000_000


def test_the_listing_can_be_left_out(sample: ModuleType) -> None:
    page = publish(sample.full(), listing=False).html.decode()
    assert 'id="code"' not in page


@settings(deadline=None, max_examples=80)
@given(st.text(st.characters(codec="utf-8"), max_size=60))
def test_a_text_adds_no_element_of_its_own(words: str) -> None:
    page = Page(text(words))
    assert set(page.tags) <= {"span", "bdi"}
    assert {a[1:] for a in page.attributes} <= {("class", "codepoint")}


def test_two_figures_share_no_id(sample: ModuleType) -> None:
    svg = sample.figure_svg()
    one, two = (drawing.inline(svg, prefix, "x") for prefix in ("a", "b"))
    ids = [set(re.findall(r' id="([^"]+)"', drawn)) for drawn in (one, two)]
    assert ids[0]
    assert not ids[0] & ids[1]
    for drawn, known in zip((one, two), ids, strict=True):
        assert set(re.findall(r'href="#([^"]+)"|url\(#([^)]+)\)', drawn))
        used = {a or b for a, b in re.findall(r'href="#([^"]+)"|url\(#([^)]+)\)', drawn)}
        assert used <= known


@pytest.mark.parametrize(
    "inside",
    [
        "<script>x</script>",
        "<foreignObject><p>x</p></foreignObject>",
        "<path onclick='x' d='M0 0'/>",
        "<image href='https://example.org/x.png'/>",
        "<use href='file:///x.svg#a'/>",
        "<path style='fill:url(https://example.org/x)' d='M0 0'/>",
        "<a href='javascript:x'><path d='M0 0'/></a>",
        "<animate attributeName='href' to='x'/>",
    ],
)
def test_a_drawing_that_runs_or_loads_is_refused(inside: str) -> None:
    svg = f"<svg xmlns='http://www.w3.org/2000/svg' viewBox='0 0 1 1'>{inside}</svg>"
    with pytest.raises(PublishError):
        drawing.inline(svg, "f", "x")


def test_a_title_that_looks_like_a_formula_is_disarmed_in_the_data(sample: ModuleType) -> None:
    figure = sample.figure_block("f")
    figure["axes"][0]["x_title"] = "=HYPERLINK(1)"
    page = Page(publish(sample.small(figure)).html.decode())
    data = next(v for v in page.values("href") if v.startswith("data:text/csv"))
    assert data.partition(",")[2].startswith("%27%3DHYPERLINK")


@pytest.mark.parametrize(
    ("status", "said"), [("draft", "DRAFT \\2013  not for use"), ("for issue", "for issue")]
)
def test_each_page_printed_from_a_browser_says_what_it_is(
    sample: ModuleType, status: str, said: str
) -> None:
    about = sample.results()["document"] | {"status": status, "number": 'N"}</style>\\'}
    page = publish(sample.small(document=about)).html.decode()
    style = page.partition("<style>")[2].partition("</style>")[0]
    running = f'@top-left{{content:"N\\22 \\7d \\3c \\2f style\\3e \\5c  revision B, {said}"'
    assert running in style
    assert ("DRAFT" in style) == (status == "draft")
