"""The site's addresses, as people read them, by what each asks for."""

import re
from collections import defaultdict
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cache

from django.urls import URLPattern, URLResolver, get_resolver

from core.people.permissions import RULES, Action, Door

DOES = {"GET": "read", "POST": "change"}


@dataclass(frozen=True)
class Address:
    """An address with one method. `only`: a condition beside the role."""

    path: str
    does: str
    only: str


@cache
def addresses_by_what_they_ask() -> Mapping[str, list[Address]]:
    """Every address of the table of rules, in the order of the actions; those with the same way in together."""
    paths = dict(_paths(get_resolver()))
    groups: dict[Action | Door, list[Address]] = defaultdict(list)
    for name, methods in RULES.items():
        for method, rule in methods.items():
            if name in paths:
                groups[rule.asks].append(Address(paths[name], DOES[method], rule.only))
    order: list[Action | Door] = [*Action, *Door]
    return {asks.value: sorted(groups[asks], key=_by_path) for asks in order if asks in groups}


def _by_path(address: Address) -> tuple[str, str]:
    return address.path, address.does


def _paths(resolver: URLResolver, before: str = "/", space: str = "") -> Iterator[tuple[str, str]]:
    for pattern in resolver.url_patterns:
        path = before + re.sub(r"<[^>]*>", "…", str(pattern.pattern))
        if isinstance(pattern, URLResolver):
            yield from _paths(pattern, path, f"{pattern.namespace}:" if pattern.namespace else space)
        elif isinstance(pattern, URLPattern) and space:
            yield f"{space}{pattern.name}", path
