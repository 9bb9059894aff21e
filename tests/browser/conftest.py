"""A real browser on the live site; whatever it opens is watched."""

import shutil
from collections.abc import Iterator
from dataclasses import dataclass, field
from urllib.parse import urlsplit

import pytest
from django.conf import settings
from django.test import Client
from playwright.sync_api import Browser, BrowserContext, Page, sync_playwright
from pytest_django.live_server_helper import LiveServer

from core import broker
from core.people.models import User
from tests.browser.watch import Watch

# The browser itself is kept from fetching updates and lists, and from resolving any name but this machine's.
ARGUMENTS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--no-first-run",
    "--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE localhost, EXCLUDE 127.0.0.1",
]
# A machine that runs all tests at once may be slow.
PATIENCE = 20_000.0
WIDE = 1280
HEIGHT = 800


@pytest.fixture(scope="package")
def chromium() -> Iterator[Browser]:
    """Debian's browser, started once."""
    program = shutil.which("chromium")
    if program is None:
        pytest.skip("there is no chromium on PATH (on Debian: apt-get install chromium)")
    with pytest.MonkeyPatch.context() as patch:
        # Playwright keeps an event loop in this thread, in which Django would refuse to use the database.
        patch.setenv("DJANGO_ALLOW_ASYNC_UNSAFE", "true")
        with sync_playwright() as playwright:
            browser = playwright.chromium.launch(executable_path=program, args=ARGUMENTS)
            yield browser
            browser.close()


@pytest.fixture(scope="package")
def redis_server() -> Iterator[None]:
    """A Redis that takes jobs."""
    found = broker.find_or_start()
    yield
    if found.child:
        found.child.end()


@dataclass
class Browsing:
    """Opens browsers on the live site, one for each person."""

    browser: Browser
    watch: Watch
    address: str
    contexts: list[BrowserContext] = field(default_factory=list)

    def page(self, user: User | None = None, *, width: int = WIDE, scripts: bool = True) -> Page:
        """A page in a fresh browser without cookies; with a user, signed in."""
        context = self.browser.new_context(
            base_url=self.address,
            viewport={"width": width, "height": HEIGHT},
            locale="en-GB",
            reduced_motion="reduce",
            java_script_enabled=scripts,
        )
        context.set_default_timeout(PATIENCE)
        self.contexts.append(context)
        self.watch.follow(context)
        if user is not None:
            client = Client()
            client.force_login(user)
            session = client.cookies[settings.SESSION_COOKIE_NAME].value
            context.add_cookies(
                [{"name": settings.SESSION_COOKIE_NAME, "value": session, "url": self.address}]
            )
        return context.new_page()

    def close(self) -> None:
        """Close all of them."""
        for context in self.contexts:
            context.close()


@pytest.fixture(autouse=True)
def browsing(chromium: Browser, transactional_db: None, live_server: LiveServer) -> Iterator[Browsing]:
    """Browsers whose pages keep the policy, raise no error and fetch nothing from elsewhere, or the test fails."""
    watch = Watch(urlsplit(live_server.url).netloc)
    found = Browsing(chromium, watch, live_server.url)
    yield found
    found.close()
    assert watch.faults == []
