"""Computes a finished assessment again from its rows and compares every number, bit by bit."""

import json
import sys
from collections.abc import Iterator
from typing import Any

from django.core.management.base import BaseCommand, CommandError, CommandParser

from fits.assessments.feature_parts import feature_case_of, part_result
from fits.assessments.models import Assessment, FeaturePart
from fits.assessments.pipeline import compute
from fits.engine import VERSION
from fits.engine.features.programme import no_look

MOST_SHOWN = 20


class Command(BaseCommand):
    """`manage.py recompute KEY …`: exit 0 when all are the same to the bit, 1 when any differs."""

    help = (
        "Recompute assessments and their features from what is stored and compare them with what was found."
    )

    def add_arguments(self, parser: CommandParser) -> None:
        parser.add_argument("keys", metavar="ASSESSMENT", nargs="+", type=int, help="number of an assessment")

    def handle(self, *args: Any, **options: Any) -> None:
        differing = [key for key in options["keys"] if not self.is_same(key)]
        if differing:
            sys.exit(1)

    def is_same(self, key: int) -> bool:
        """Recompute one and say what came of it."""
        assessment = Assessment.objects.filter(pk=key, status=Assessment.Status.DONE).first()
        if assessment is None:
            raise CommandError(f"there is no finished assessment {key}")
        if assessment.engine_version != VERSION:
            self.stdout.write(
                f"assessment {key} was computed by engine {assessment.engine_version}, this is {VERSION}: "
                "numbers may differ"
            )
        outcome = compute(assessment, lambda stage, fraction: None)
        again = {"result": outcome.result, "detail": outcome.detail}
        found = {"result": assessment.result, "detail": assessment.detail}
        parts = list(
            FeaturePart.objects.filter(search__assessment=assessment, status=FeaturePart.Status.DONE)
        )
        if parts:
            case = feature_case_of(assessment)
            found["features"] = {_place(part): part.result for part in parts}
            again["features"] = {_place(part): part_result(case, part, no_look) for part in parts}
        # Through text once, as the stored documents went.
        differences = list(differences_between(found, json.loads(json.dumps(again))))
        for difference in differences[:MOST_SHOWN]:
            self.stdout.write(f"  {difference}")
        if differences:
            self.stdout.write(f"assessment {key}: {len(differences)} values differ")
        else:
            self.stdout.write(f"assessment {key}: the same to the bit")
        return not differences


def _place(part: FeaturePart) -> str:
    """As "search 3.peak 4"."""
    return f"search {part.search_id}.{part.kind} {part.order}"


def differences_between(found: Any, again: Any, place: str = "") -> Iterator[str]:
    """Where two documents differ, in words."""
    if isinstance(found, dict) and isinstance(again, dict) and found.keys() == again.keys():
        for key in found:
            yield from differences_between(found[key], again[key], f"{place}.{key}".lstrip("."))
    elif isinstance(found, list) and isinstance(again, list) and len(found) == len(again):
        for index, (one, other) in enumerate(zip(found, again, strict=True)):
            yield from differences_between(one, other, f"{place}[{index}]")
    elif found != again:
        yield f"{place}: {found!r} became {again!r}"
