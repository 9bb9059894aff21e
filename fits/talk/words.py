"""The words of a comment: which of them are links, which name somebody, and how they are shown."""

import re
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from enum import Enum
from urllib.parse import urlsplit

from django.utils.html import escape, format_html
from django.utils.safestring import SafeString, mark_safe

from core.people.models import User

MOST_LETTERS = 4000
# No blanks, no quotes or brackets of a sentence, and none of the marks that turn the direction of what is read.
LINK = r"\bhttps?://[^\s<>\"'`“”«»\\\u200b-\u200f\u202a-\u202e\u2060-\u2069\ufeff]+"
# What ends a sentence and not its address.
AFTER_LINK = ".,;:!?*_"


class Kind(Enum):
    """What a stretch of a comment is."""

    WORDS = "words"
    LINK = "link"
    NAME = "name"


@dataclass(frozen=True)
class Stretch:
    """Some of a comment's words, as they were typed."""

    kind: Kind
    text: str


def names_of(people: Iterable[User]) -> dict[str, set[int]]:
    """By what somebody can be named in a comment, in small letters, the keys of those who are named so."""
    found: dict[str, set[int]] = {}
    for person in people:
        for name in (person.name, person.email.partition("@")[0]):
            if plain := _plain(name):
                found.setdefault(plain, set()).add(person.pk)
    return found


def mentioned(words: str, names: Mapping[str, Iterable[int]]) -> set[int]:
    """The keys of those whom the words name by "@" and one of the names."""
    found: set[int] = set()
    for stretch in stretches(words, names):
        if stretch.kind is Kind.NAME:
            found.update(names[_plain(stretch.text[1:])])
    return found


def shown(words: str, names: Mapping[str, object]) -> SafeString:
    """The words as a page shows them: escaped, with links, names and line breaks."""
    return mark_safe("".join(_shown(stretch) for stretch in stretches(words, names)))  # noqa: S308


def stretches(words: str, names: Mapping[str, object]) -> Iterator[Stretch]:
    """The words in stretches that together are all of them."""
    done = 0
    for match in _pattern(names).finditer(words):
        text, kind = match.group(), Kind.NAME
        if match["link"]:
            text, kind = _without_end(text), Kind.LINK
            if not _is_plain_address(text):
                continue
        elif _plain(text[1:]) not in names:
            continue
        if match.start() > done:
            yield Stretch(Kind.WORDS, words[done : match.start()])
        yield Stretch(kind, text)
        done = match.start() + len(text)
    if done < len(words):
        yield Stretch(Kind.WORDS, words[done:])


def _pattern(names: Iterable[str]) -> re.Pattern[str]:
    """Links, and "@" with a whole name; of names that begin alike the longest counts."""
    longest_first = sorted(names, key=len, reverse=True)
    if not longest_first:
        return re.compile(f"(?P<link>{LINK})", re.IGNORECASE)
    alternatives = "|".join(r"[^\S\n]+".join(map(re.escape, name.split(" "))) for name in longest_first)
    # Neither within an e-mail address nor as the beginning of a longer name.
    name = rf"(?<![\w.+-])@(?:{alternatives})(?!\w|[.+'’@-]\w)"
    return re.compile(f"(?P<link>{LINK})|{name}", re.IGNORECASE)


def _plain(name: str) -> str:
    # Not folded: “ß” would become “ss”, which the pattern does not find where “ß” is written.
    return " ".join(name.split()).lower()


def _without_end(link: str) -> str:
    """The link without what belongs to the sentence around it."""
    while link:
        last = link[-1]
        unopened = last in ")]}" and link.count(last) > link.count("([{"[")]}".index(last)])
        if last not in AFTER_LINK and not unopened:
            break
        link = link[:-1]
    return link


def _is_plain_address(link: str) -> bool:
    """Whether it leads where it seems to: to a host, without a name before it."""
    try:
        parts = urlsplit(link)
        return bool(parts.hostname) and "@" not in parts.netloc
    except ValueError:
        return False


def _shown(stretch: Stretch) -> str:
    if stretch.kind is Kind.LINK:
        link = '<a href="{}" rel="noreferrer noopener nofollow">{}</a>'
        return format_html(link, stretch.text, stretch.text)
    if stretch.kind is Kind.NAME:
        return format_html("<strong>{}</strong>", stretch.text)
    return escape(stretch.text).replace("\n", "<br>")
