"""Words in downloads cannot become formulas."""

import pytest

from core.measurements.export import cell


@pytest.mark.parametrize("text", ["=1+1", "+1", "-1", "@SUM(A1)", "\t=1"])
def test_a_header_like_a_formula_is_written_as_text(text: str) -> None:
    assert cell(text).lstrip('"').startswith("'")


def test_a_header_with_a_comma_is_quoted() -> None:
    assert cell('power, "raw"') == '"power, ""raw"""'
