"""What becomes of a comment's words on a page: links, names, and nothing that its author could smuggle in."""

import pytest

from core.people.models import User
from fits.talk.words import mentioned, names_of, shown, stretches

NAMES = {"mo member": {1}, "mo": {2}, "mo member junior": {3}, "lin.lead": {4}}


def test_an_address_becomes_a_link_that_tells_and_lends_nothing() -> None:
    assert shown("see https://merrow.example/a?b=1&c=2", {}) == (
        'see <a href="https://merrow.example/a?b=1&amp;c=2" rel="noreferrer noopener nofollow">'
        "https://merrow.example/a?b=1&amp;c=2</a>"
    )


@pytest.mark.parametrize(
    ("words", "link"),
    [
        ("(see http://merrow.example/a_(b).)", "http://merrow.example/a_(b)"),
        ("https://merrow.example, and so on", "https://merrow.example"),
        ("is it HTTPS://merrow.example?", "HTTPS://merrow.example"),
        ("“https://merrow.example/x”", "https://merrow.example/x"),
    ],
)
def test_what_ends_the_sentence_is_no_part_of_the_link(words: str, link: str) -> None:
    assert f'href="{link}"' in shown(words, {})


@pytest.mark.parametrize(
    "words",
    [
        "<script>alert(1)</script>",
        "<img src=x onerror=alert(1)>",
        "javascript:alert(1)",
        "data:text/html,<b>x</b>",
        "JaVaScRiPt://merrow.example/%0aalert(1)",
        "xhttps://merrow.example",
        "http://",
        "https://[",
        "http:///path",
        "https://merrow.example@elsewhere.example/",
        "&lt;script&gt; &#106;avascript:",
    ],
)
def test_nothing_else_becomes_markup(words: str) -> None:
    found = shown(words, {})
    assert "<a " not in found
    assert "<script" not in found
    assert "<img" not in found


@pytest.mark.parametrize(
    "words",
    [
        'https://merrow.example/"onmouseover="alert(1)',
        "https://merrow.example/'onmouseover='alert(1)",
        "https://merrow.example/<script>alert(1)</script>",
        "https://merrow.example/`onmouseover=alert(1)",
        "https://merrow.example/\\evil",
        "https://merrow.example/\u202egnp.exe",
    ],
)
def test_a_link_ends_before_what_could_break_out_of_it_or_turn_it_round(words: str) -> None:
    assert 'href="https://merrow.example/"' in shown(words, {})
    assert "<script" not in shown(words, {})


def test_line_breaks_are_kept() -> None:
    assert shown("one\ntwo\n\nthree", {}) == "one<br>two<br><br>three"


def test_a_name_is_emphasised_and_escaped() -> None:
    names = {"<b>mo</b>": {1}}
    assert shown("ask @<b>Mo</b>!", names) == "ask <strong>@&lt;b&gt;Mo&lt;/b&gt;</strong>!"


@pytest.mark.parametrize(
    ("words", "found"),
    [
        ("@Mo Member, look", {1}),
        ("@mo  member look", {1}),
        ("@Mo Member Junior!", {3}),
        ("@Mo, look", {2}),
        ("@Mo.", {2}),
        ("(@MO)", {2}),
        ("@Mo and @Lin.Lead", {2, 4}),
        ("@Mo Members", {2}),
        ("@Moira", set()),
        ("@mo.member", set()),
        ("@mo-member", set()),
        ("@mo@merrow.example", set()),
        ("write to somebody@mo", set()),
        ("@", set()),
        ("@lin", set()),
        ("@linXlead", set()),
        ("https://merrow.example/@mo", set()),
        ("@Mo\nMember", {2}),
    ],
)
def test_the_longest_whole_name_is_mentioned(words: str, found: set[int]) -> None:
    assert mentioned(words, NAMES) == found


def test_people_are_named_by_name_and_by_what_stands_before_the_at() -> None:
    people = [
        User(pk=1, name="Mo  Member", email="m.m@merrow.example"),
        User(pk=2, email="ann@merrow.example"),
    ]
    assert names_of(people) == {"mo member": {1}, "m.m": {1}, "ann": {2}}


@pytest.mark.parametrize("name", ["Ida Groß", "Émile Bœuf", "ÅSA Ö"])
def test_a_name_is_found_as_it_is_written(name: str) -> None:
    names = names_of([User(pk=1, name=name, email="i@merrow.example")])
    assert mentioned(f"@{name}, look", names) == {1}


def test_two_of_one_name_are_both_mentioned() -> None:
    people = [User(pk=key, name="Mo", email=f"{key}@merrow.example") for key in (1, 2)]
    assert mentioned("@Mo", names_of(people)) == {1, 2}


@pytest.mark.parametrize("words", ["", "a @Mo b https://x.example. c", "http://a@b.example @mo", "@mo@mo"])
def test_no_word_is_lost(words: str) -> None:
    assert "".join(stretch.text for stretch in stretches(words, NAMES)) == words
