"""Whatever changes something is written into the log: by reading the code, so that no later change slips by."""

import ast
import re
from pathlib import Path

import pytest
from django.conf import settings

from core.people.log import Deed

ROOT = Path(settings.BASE_DIR)
SOURCES = {
    str(path.relative_to(ROOT)): path.read_text()
    for folder in ("core", "fits")
    for path in sorted((ROOT / folder).rglob("*.py"))
}
SERVICES = sorted(name for name in SOURCES if "/services/" in name and not name.endswith("__init__.py"))
CHANGES = {"save", "create", "bulk_create", "update", "delete", "save_if_current"}
# Services that change something of which the log does not tell, and why.
QUIET = {
    "core/people/services/preferences.py": "somebody's own name and e-mails, of no collaboration",
    "core/people/services/rules.py": "what the others have in common",
    "core/theories/services/discard.py": "a draft that nobody else has seen",
    "core/theories/services/draft.py": "a draft that nobody else sees",
    "core/theories/services/batch_draft.py": "drafts that nobody else sees",
}


def calls(source: str) -> set[str]:
    """The names of all that is called in it."""
    found = set()
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Call):
            function = node.func
            if isinstance(function, ast.Attribute):
                found.add(function.attr)
            elif isinstance(function, ast.Name):
                found.add(function.id)
    return found


def writes_log(name: str) -> bool:
    """Whether it calls `record`, or a function made for that."""
    return any(re.fullmatch(r"_?record(_\w+)?", call) for call in calls(SOURCES[name]))


@pytest.mark.parametrize("deed", Deed)
def test_each_deed_that_the_log_knows_is_told_somewhere(deed: Deed) -> None:
    told = re.compile(rf"\bDeed\.{deed.name}\b")
    assert [name for name, source in SOURCES.items() if name != "core/people/log.py" and told.search(source)]


@pytest.mark.parametrize("name", SERVICES)
def test_each_service_that_changes_something_writes_it_into_the_log(name: str) -> None:
    changes = bool(calls(SOURCES[name]) & CHANGES)
    assert writes_log(name) or not changes or name in QUIET


def test_no_service_is_called_quiet_that_is_not() -> None:
    assert [name for name in QUIET if name not in SERVICES or writes_log(name)] == []
