"""The bench as a command; its times are looked at by people, not here."""

import json
from io import StringIO

import numpy as np
import pytest
from django.core.management import call_command

from fits.management.bench.case import AtLeast, AtMost
from fits.management.bench.judging import exact_verdicts
from fits.management.bench.run import CASES


def test_the_bench_writes_a_row_for_each_case() -> None:
    written = StringIO()
    call_command("bench", "--quick", "--json", "-", stdout=written, stderr=StringIO())
    rows = json.loads(written.getvalue())["rows"]
    assert len(rows) == len(CASES) + 1
    for row in rows:
        assert set(row) == {"name", "ours_s", "theirs_s", "ratio", "wanted", "holds"}
        assert row["ours_s"] > 0.0
        assert row["theirs_s"] > 0.0
        assert isinstance(row["holds"], bool)


def test_both_sides_of_the_verdicts_find_the_same() -> None:
    case = exact_verdicts(20)
    assert callable(case.theirs)
    assert case.ours() == pytest.approx(np.array(case.theirs()))


def test_a_ratio_is_judged_in_the_direction_that_it_names() -> None:
    assert AtLeast(50.0).row("", 1.0, 50.0)["holds"]
    assert not AtLeast(50.0).row("", 1.0, 49.0)["holds"]
    assert AtMost(1.5).row("", 1.5, 1.0)["holds"]
    assert not AtMost(1.5).row("", 1.6, 1.0)["holds"]
