"""The web server as it runs, on the database of the tests, and a client of it."""

import contextlib
import html
import os
import secrets
import subprocess
import urllib.error
import urllib.request
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import psutil
from django.conf import settings
from django.test import Client

from core.people.models import User
from core.single_machine import web_server
from tests.real_processes import BASE_DIR, database_url, free_port, kill_group
from tests.waiting import wait_until


@dataclass(frozen=True)
class Answer:
    """Status, page as text, and where it leads."""

    status: int
    page: str
    location: str = ""


class NoRedirect(urllib.request.HTTPRedirectHandler):
    """Leaves a redirect as the answer that it is."""

    def redirect_request(self, *arguments: object, **more: object) -> None:
        return None


@dataclass(frozen=True)
class Server:
    """The running web server."""

    process: subprocess.Popen[bytes]
    address: str
    file_name: str = "table.csv"

    def ask(
        self, path: str, user: User | None = None, files: dict[str, bytes] | None = None, **fields: str
    ) -> Answer:
        """Get a page, or post a form with files, all under `file_name`, signed in as the user."""
        headers, body = {}, None
        token = secrets.token_hex(16)
        cookies = [f"{settings.CSRF_COOKIE_NAME}={token}"]
        if user is not None:
            client = Client()
            client.force_login(user)
            cookies.append(
                f"{settings.SESSION_COOKIE_NAME}={client.cookies[settings.SESSION_COOKIE_NAME].value}"
            )
        if files is not None:
            headers["Content-Type"] = "multipart/form-data; boundary=edge"
            body = multipart({"csrfmiddlewaretoken": token, **fields}, files, self.file_name)
        headers["Cookie"] = "; ".join(cookies)
        request = urllib.request.Request(self.address + path, body, headers)
        try:
            with urllib.request.build_opener(NoRedirect).open(request, timeout=60.0) as answer:
                return Answer(answer.status, html.unescape(answer.read().decode()))
        except urllib.error.HTTPError as error:
            page = html.unescape(error.read().decode())
            return Answer(error.code, page, error.headers.get("Location", ""))

    def is_up(self) -> bool:
        """Whether it answers."""
        assert self.process.poll() is None
        try:
            return self.ask("/accounts/login/").status == 200
        except urllib.error.URLError:
            return False

    def workers(self) -> list[psutil.Process]:
        """The processes that answer."""
        return psutil.Process(self.process.pid).children()

    def largest(self) -> int:
        """The most memory that any process of it ever held, in bytes."""
        pids = [self.process.pid, *(worker.pid for worker in self.workers())]
        status = [Path(f"/proc/{pid}/status").read_text() for pid in pids]
        peaks = [text.split("VmHWM:")[1].split()[0] for text in status]
        return max(int(peak) for peak in peaks) * 1024


def multipart(fields: dict[str, str], files: dict[str, bytes], file_name: str) -> bytes:
    """A form as it goes over the wire, with this name for each file."""
    parts = [
        f'--edge\r\nContent-Disposition: form-data; name="{name}"\r\n\r\n{value}\r\n'.encode()
        for name, value in fields.items()
    ]
    for name, content in files.items():
        disposition = f'form-data; name="{name}"; filename="{file_name}"'
        head = f"--edge\r\nContent-Disposition: {disposition}\r\nContent-Type: text/csv\r\n\r\n"
        parts += [head.encode(), content, b"\r\n"]
    return b"".join([*parts, b"--edge--\r\n"])


@contextlib.contextmanager
def real_web_server(log: Path, *, file_name: str = "table.csv") -> Iterator[Server]:
    """The web server with the command that `serve` gives it, killed with all its children at the end of the block."""
    port = free_port()
    with log.open("wb") as out:
        process = subprocess.Popen(
            web_server(port),
            cwd=BASE_DIR,
            env=os.environ | {"DATABASE_URL": database_url()},
            stdout=out,
            stderr=subprocess.STDOUT,
            start_new_session=True,
        )
    found = Server(process, f"http://127.0.0.1:{port}", file_name)
    try:
        wait_until(found.is_up, seconds=60.0, what="the web server answers")
        yield found
    finally:
        kill_group(process)
