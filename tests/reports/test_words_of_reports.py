"""Words in Markdown: what is kept of them, and that nothing that is meant ill gets through."""

from html.parser import HTMLParser

import pytest

from fits.reports.markdown import TAGS, rendered

HOSTILE = [
    "<script>alert(1)</script>",
    "<img src=x onerror=alert(1)>",
    "![a picture](https://elsewhere.example/x.png)",
    "[go](javascript:alert(1))",
    "[go](JaVaScRiPt:alert(1))",
    "[go](&#106;avascript:alert(1))",
    "[go](java\tscript:alert(1))",
    "[go](data:text/html;base64,PHNjcmlwdD4=)",
    "[go](vbscript:x)",
    "[go](//elsewhere.example)",
    "[go](/collaborations/1/)",
    "[go](https:/collaborations/1/)",
    "[go](file:///etc/passwd)",
    "<javascript:alert(1)>",
    "[go][1]\n\n[1]: javascript:alert(1)",
    '[go](https://x.example "&quot; onmouseover=&quot;alert(1)")',
    "<iframe src=https://elsewhere.example></iframe>",
    "<style>*{display:none}</style>",
    '<a href="https://x.example" style="x" onclick="y">x</a>',
    "<svg/onload=alert(1)>",
    "```<script>\nalert(1)\n```",
    "&lt;script&gt;alert(1)&lt;/script&gt;",
    "<!-- x --><b onclick=x>",
    "[go](https://x.example/%22%3E%3Cscript%3E)",
    "[](https://[)",
]


class Seen(HTMLParser):
    """The elements and attributes of a page."""

    def __init__(self) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str, str]] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += [(tag, name, value or "") for name, value in attrs]


def seen(words: str) -> Seen:
    found = Seen()
    found.feed(rendered(words, below=2))
    return found


@pytest.mark.parametrize("words", HOSTILE)
def test_nothing_runs_is_fetched_or_leads_elsewhere_than_the_web(words: str) -> None:
    found = seen(words)
    assert set(found.tags) <= TAGS
    assert {name for _, name, _ in found.attributes} <= {"href", "rel", "title", "start"}
    for _, name, value in found.attributes:
        if name == "href":
            assert value.startswith(("http://", "https://", "mailto:"))
            assert "/collaborations/" not in value


def test_links_tell_nobody_where_they_were_followed_from() -> None:
    found = seen("[a](https://a.example) <https://b.example> [c](mailto:c@merrow.example)")
    links = [value for tag, name, value in found.attributes if name == "rel"]
    assert links == ["noreferrer noopener nofollow"] * 3


def test_emphasis_lists_and_quotes_stay() -> None:
    words = rendered("*a* **b** `c`\n\n- d\n\n> e\n\n3. f", below=2)
    for part in (
        "<em>a</em>",
        "<strong>b</strong>",
        "<code>c</code>",
        "<li>d</li>",
        "<blockquote>",
        'start="3"',
    ):
        assert part in words


def test_headings_stand_below_those_of_the_page() -> None:
    assert seen("# a\n\n## b\n\n###### c").tags == ["h3", "h4", "h6"]


def test_html_is_shown_as_it_was_written() -> None:
    assert "&lt;b&gt;no more&lt;/b&gt;" in rendered("<b>no more</b>", below=1)
