"""The site's addresses, as people read them, by what each asks for."""

import re
from collections import defaultdict
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cache

from django.urls import URLPattern, URLResolver, get_resolver

from core.people.permissions import RULES, Action, Door

DOES = {"GET": "read", "POST": "change"}
# What an address leaves open: a number, or something of the name given there.
PLACE = re.compile(r"<(?:int:\w+|(?:\w+:)?(\w+))>")


@dataclass(frozen=True)
class Address:
    """An address and what is done there. `only`: a condition beside the role."""

    path: str
    only: str
    does: str


@cache
def addresses_by_what_they_ask() -> Mapping[str, list[Address]]:
    """Every address of the table of rules, in the order of the actions."""
    paths = dict(_paths(get_resolver()))
    does: dict[Action | Door, dict[tuple[str, str], list[str]]] = defaultdict(lambda: defaultdict(list))
    for name, methods in RULES.items():
        for method, rule in methods.items():
            if name in paths:
                does[rule.asks][paths[name], rule.only].append(DOES[method])
    order: list[Action | Door] = [*Action, *Door]
    return {
        asks.value: [Address(*address, " and ".join(how)) for address, how in sorted(does[asks].items())]
        for asks in order
        if asks in does
    }


def _paths(resolver: URLResolver, before: str = "/", space: str = "") -> Iterator[tuple[str, str]]:
    for pattern in resolver.url_patterns:
        path = before + PLACE.sub(lambda place: f"‹{place[1] or 'number'}›", str(pattern.pattern))
        if isinstance(pattern, URLResolver):
            yield from _paths(pattern, path, f"{pattern.namespace}:" if pattern.namespace else space)
        elif isinstance(pattern, URLPattern) and space:
            yield f"{space}{pattern.name}", path
