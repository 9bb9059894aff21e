"""Words in Markdown, as HTML that can stand on any page."""

from urllib.parse import urlsplit

import nh3
from django.utils.safestring import SafeString, mark_safe
from markdown_it import MarkdownIt

SCHEMES = {"http", "https", "mailto"}
TAGS = {
    *("p", "br", "em", "strong", "code", "pre", "blockquote", "hr"),
    *("ul", "ol", "li", "a", "h2", "h3", "h4", "h5", "h6"),
}


def _is_allowed(address: str) -> bool:
    try:
        parts = urlsplit(address)
    except ValueError:
        return False
    # Without a host a browser would take "http:/path" for a page of this site.
    return parts.scheme in SCHEMES and bool(parts.netloc or parts.scheme == "mailto")


def _parser() -> MarkdownIt:
    parser = MarkdownIt("commonmark", {"html": False}).disable("image")
    parser.validateLink = _is_allowed  # type: ignore[method-assign,assignment]
    return parser


def rendered(words: str, *, below: int) -> SafeString:
    """The words as HTML of a few elements. Links lead to the web and to mail alone, and tell nobody where from.

    below  the level of the page's heading that they stand under
    """
    parser = _parser()
    tokens = parser.parse(words)
    for token in tokens:
        if token.type in {"heading_open", "heading_close"}:
            token.tag = f"h{min(6, int(token.tag[1:]) + below)}"
    html = parser.renderer.render(tokens, parser.options, {})
    return mark_safe(  # noqa: S308 - nothing is left in it but the elements above
        nh3.clean(
            html,
            tags=TAGS,
            attributes={"a": {"href"}, "ol": {"start"}},
            url_schemes=SCHEMES,
            link_rel="noreferrer noopener nofollow",
        )
    )
