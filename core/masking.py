"""Keeps the secrets of share links and invitations out of logs."""

import logging
import re

# Also where one is carried along in another address, as the page to come back to after signing in.
SECRET = re.compile(r"((?:/|%2F)[ri](?:/|%2F))[A-Za-z0-9_-]{8,}", re.IGNORECASE)


def masked(text: str) -> str:
    """The text with "…" in the place of each link's secret."""
    return SECRET.sub(r"\1…", text)


class MaskShareLinks(logging.Filter):
    """Masks what a record says; for handlers, so that records of all loggers pass through."""

    def filter(self, record: logging.LogRecord) -> bool:
        message = record.getMessage()
        if (shown := masked(message)) != message:
            record.msg, record.args = shown, None
        return True
