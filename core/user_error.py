"""The user's family of error. It imports nothing of Django, so that short-lived processes start fast."""

from dataclasses import dataclass


@dataclass(eq=False)
class UserError(Exception):
    """Something that its sender can mend. `code` is stable; line and column count from 1."""

    code: str
    reason: str
    remedy: str = ""
    file: str = ""
    line: int | None = None
    column: int | None = None
    column_name: str = ""

    def __str__(self) -> str:
        """One line: file, line, column, reason, remedy."""
        place = [self.file] if self.file else []
        if self.line is not None:
            place.append(f"line {self.line}")
        if self.column is not None:
            name = f" ({self.column_name})" if self.column_name else ""
            place.append(f"column {self.column}{name}")
        elif self.column_name:
            place.append(f"column {self.column_name}")
        where = ", ".join(place)
        text = f"{where}: {self.reason}" if where else self.reason
        text = text[:1].upper() + text[1:] if not where else text
        return f"{text}. {self.remedy}" if self.remedy else text
