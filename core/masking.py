"""Keeps the secrets of share links out of logs."""

import logging
import re

SECRET = re.compile(r"(/r/)[A-Za-z0-9_-]{8,}")


def masked(text: str) -> str:
    """The text with "…" in the place of each share link's secret."""
    return SECRET.sub(r"\1…", text)


class MaskShareLinks(logging.Filter):
    """Masks what a record says; for handlers, so that records of all loggers pass through."""

    def filter(self, record: logging.LogRecord) -> bool:
        message = record.getMessage()
        if (shown := masked(message)) != message:
            record.msg, record.args = shown, None
        return True
