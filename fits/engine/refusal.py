"""The one error that the engine raises for input that it cannot take."""

from dataclasses import dataclass


@dataclass(eq=False)
class InputRefused(ValueError):
    """Input that breaks a rule, with the field, the first offending index (from 0) and the remedy."""

    code: str
    field: str
    reason: str
    remedy: str = ""
    index: int | None = None

    def __str__(self) -> str:
        where = self.field if self.index is None else f"{self.field}[{self.index}]"
        return f"{where}: {self.reason}" + (f". {self.remedy}" if self.remedy else "")
