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
CHANGES = {"save", "create", "bulk_create", "get_or_create", "update", "delete", "save_if_current"}
# Services that change something of which the log does not tell, and why.
QUIET = {
    "core/people/services/preferences.py": "somebody's own name and e-mails, of no collaboration",
    "core/theories/services/discard.py": "a draft that nobody else has seen",
    "core/theories/services/draft.py": "a draft that nobody else sees",
    "core/theories/services/batch_draft.py": "drafts that nobody else sees",
    "fits/reports/services/drafting.py": "a leads' draft, told of when it is begun and when it is frozen",
    "fits/reports/services/open_link.py": "counts who comes by a link, for the page of its report",
    "fits/reports/services/parts.py": "a leads' draft",
    "fits/reports/services/print_report.py": "what is frozen already, on paper",
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


def functions(name: str) -> set[str]:
    """What others can call of it."""
    return {node.name for node in ast.parse(SOURCES[name]).body if isinstance(node, ast.FunctionDef)}


TELLING = {function for name in SERVICES if writes_log(name) for function in functions(name)}


@pytest.mark.parametrize("deed", Deed)
def test_each_deed_that_the_log_knows_is_told_somewhere(deed: Deed) -> None:
    told = re.compile(rf"\bDeed\.{deed.name}\b")
    assert [name for name, source in SOURCES.items() if name != "core/people/log.py" and told.search(source)]


@pytest.mark.parametrize("name", SERVICES)
def test_each_service_that_changes_something_writes_it_into_the_log(name: str) -> None:
    called = calls(SOURCES[name])
    assert writes_log(name) or called & TELLING or not called & CHANGES or name in QUIET


def test_no_service_is_called_quiet_that_is_not() -> None:
    assert [name for name in QUIET if name not in SERVICES or writes_log(name)] == []
