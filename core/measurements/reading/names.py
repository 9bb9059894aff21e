"""What may be shown of a name or a cell that came from outside."""

import re
import unicodedata

from core.measurements.reading.limits import MAXIMUM_NAME_LENGTH

SHOWN_LENGTH = 30


def safe_name(file_name: str) -> str:
    """A display name: the last part of a path, without control characters. Never used as a path."""
    last = re.split(r"[/\\]", file_name)[-1]
    plain = visible(last)[:MAXIMUM_NAME_LENGTH].rstrip()
    return "unnamed" if plain in {"", ".", ".."} else plain


def visible(text: str) -> str:
    """Without the characters that cannot be seen, as those that turn the direction of writing, and outer blanks."""
    return "".join(one for one in text if not unicodedata.category(one).startswith("C")).strip()


def shown(cell: str) -> str:
    """A cell in quotes, shortened, with what cannot be printed escaped."""
    return repr(cell if len(cell) <= SHOWN_LENGTH else cell[: SHOWN_LENGTH - 1] + "…")
