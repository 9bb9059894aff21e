"""The watch itself: what it must find, it finds."""

from collections.abc import Callable

import pytest
from axe_playwright_python.base import AXE_SCRIPT
from playwright.sync_api import Browser, Page

from tests.browser.conftest import Browsing
from tests.browser.watch import Watch

pytestmark = pytest.mark.django_db(transaction=True)

STYLE = "document.body.insertAdjacentHTML('beforeend', '<p style=\\'color: red\\'>red</p>')"
SCRIPT = "document.body.append(Object.assign(document.createElement('script'), {textContent: '1'}))"
ELSEWHERE = "document.body.append(Object.assign(new Image(), {src: 'http://elsewhere.example/a.png'}))"
MISSING = "document.body.append(Object.assign(new Image(), {src: '/static/missing.png'}))"
LATER = "setTimeout(() => { throw new Error('late'); })"


@pytest.fixture
def watched(chromium: Browser, browsing: Browsing) -> Callable[[str], Watch]:
    """What a second watch says of the sign-in page after a script ran on it."""

    def watched_after(script: str) -> Watch:
        watch = Watch(browsing.watch.host)
        context = chromium.new_context(base_url=browsing.address)
        watch.follow(context)
        page: Page = context.new_page()
        page.goto("/accounts/login/", wait_until="networkidle")
        assert watch.faults == []
        page.evaluate(script)
        page.wait_for_function("performance.now() > 0")
        page.goto("/accounts/password/reset/", wait_until="networkidle")
        context.close()
        return watch

    return watched_after


@pytest.mark.parametrize(
    ("script", "words"),
    [
        (STYLE, "content security policy"),
        (SCRIPT, "content security policy"),
        (ELSEWHERE, "content security policy"),
        (MISSING, "404 for"),
        (LATER, "script error"),
        ("console.error('oh')", "console error: oh"),
    ],
)
def test_the_watch_finds_what_a_page_must_not_do(
    script: str, words: str, watched: Callable[[str], Watch]
) -> None:
    assert any(words in fault for fault in watched(script).faults)


def test_the_watch_finds_a_request_that_leaves_the_machine(browsing: Browsing, chromium: Browser) -> None:
    watch = Watch(browsing.watch.host)
    context = chromium.new_context(bypass_csp=True, base_url=browsing.address)
    watch.follow(context)
    page = context.new_page()
    page.goto("/accounts/login/")
    with page.expect_event("requestfailed"):
        page.evaluate(ELSEWHERE)
    context.close()
    assert "a request leaves the site: http://elsewhere.example/a.png" in watch.faults


def test_axe_finds_a_picture_without_words(browsing: Browsing) -> None:
    page = browsing.page()
    page.goto("/accounts/login/")
    page.evaluate("document.body.append(new Image())")
    page.evaluate(AXE_SCRIPT)
    found = page.evaluate("axe.run({resultTypes: ['violations']})")
    assert "image-alt" in {fault["id"] for fault in found["violations"]}
