"""Numbers are written with the digits that are known."""

import pytest

from fits.reports import numbers


@pytest.mark.parametrize(
    ("p", "error", "smallest", "written"),
    [
        (0.0909, 0.0064, 1 / 2001, "0.091 ± 0.006"),
        (0.634, 0.0108, 1 / 2001, "0.634 ± 0.011"),
        (1 / 2001, 0.0005, 1 / 2001, "< 0.0005"),
        (1 / 20001, None, 1 / 20001, "< 0.00005"),
        (1 / 2000, 0.0005, 1 / 2000, "≤ 0.0005"),
        (0.455, None, 1 / 20001, "0.455"),
        (0.0035, None, 1 / 20001, "0.0035"),
        (1.0, 0.0, 1 / 2001, "1.000"),
    ],
)
def test_p_values(p: float, error: float | None, smallest: float, written: str) -> None:
    assert numbers.p_value(p, error, smallest=smallest) == written


@pytest.mark.parametrize(
    ("value", "written"),
    [
        (0.3041, "0.304"),
        (0.99961, "1.00"),
        (12345.6, "12346"),
        (0.0, "0"),
        (-3.2, "−3.20"),
        (1.5e-9, "1.50e−09"),
    ],
)
def test_significant_digits(value: float, written: str) -> None:
    assert numbers.significant(value) == written


def test_entry_levels_at_the_ends_are_bounds() -> None:
    assert numbers.entry_level(1.0) == "> 99.9 %"
    assert numbers.entry_level(0.0) == "< 0.1 %"
    assert numbers.entry_level(0.972) == "97.2 %"
    assert numbers.entry_level(0.999) == "99.9 %"


def test_few_draws_cannot_tell_an_entry_level_from_0_or_1_to_a_tenth_of_a_percent() -> None:
    assert numbers.entry_level(1.0, draws=2000) == "> 99.9 %"
    assert numbers.entry_level(1.0, draws=100) == "> 99.0 %"
    assert numbers.entry_level(0.99, draws=100) == "99.0 %"
    assert numbers.entry_level(0.0, draws=300) == "< 0.4 %"


def test_a_width_on_a_log_axis_is_a_factor() -> None:
    assert numbers.width(0.6931471805599453, log=True) == "a factor of 2.00"
    assert numbers.width(0.4, unit="cycles per hour") == "0.400 cycles per hour"
