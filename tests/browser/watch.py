"""What no page may do, watched on every page that a browser test opens."""

from dataclasses import dataclass, field
from urllib.parse import urlsplit

from playwright.sync_api import BrowserContext, ConsoleMessage, Request, Response, WebError

# Chromium reports a violation on the console as well; the event names directive and culprit.
REPORT_VIOLATIONS = """
document.addEventListener("securitypolicyviolation", (event) => console.error(
  `content security policy: ${event.violatedDirective} forbids ${event.blockedURI} in ${event.sourceFile}`
));
"""
# A page that is left, or that reloads itself, gives up what it was fetching.
LEFT_BEHIND = "net::ERR_ABORTED"
# Said of answers whose status is an error; those are watched themselves.
ECHO_OF_AN_ANSWER = "Failed to load resource"


@dataclass
class Watch:
    """Gathers what went wrong in the contexts given to it.

    Pages that a test means to be refused are named beforehand by their status.
    """

    host: str
    faults: list[str] = field(default_factory=list)
    expected: set[int] = field(default_factory=set)

    def expect(self, *statuses: int) -> None:
        """Let pages, not their parts, answer with these statuses."""
        self.expected.update(statuses)

    def follow(self, context: BrowserContext) -> None:
        """Watch all pages of a context."""
        context.add_init_script(REPORT_VIOLATIONS)
        context.on("console", self._console)
        context.on("weberror", self._error)
        context.on("request", self._request)
        context.on("requestfailed", self._failed)
        context.on("response", self._response)

    def _console(self, message: ConsoleMessage) -> None:
        if message.type in {"error", "warning"} and not message.text.startswith(ECHO_OF_AN_ANSWER):
            self.faults.append(f"console {message.type}: {message.text}")

    def _error(self, error: WebError) -> None:
        self.faults.append(f"script error: {error.error}")

    def _request(self, request: Request) -> None:
        address = urlsplit(request.url)
        if address.scheme not in {"data", "blob"} and address.netloc != self.host:
            self.faults.append(f"a request leaves the site: {request.url}")

    def _failed(self, request: Request) -> None:
        if request.failure != LEFT_BEHIND:
            self.faults.append(f"request failed: {request.url}: {request.failure}")

    def _response(self, response: Response) -> None:
        page_expected = response.request.is_navigation_request() and response.status in self.expected
        if response.status >= 400 and not page_expected:
            self.faults.append(f"{response.status} for {response.url}")
