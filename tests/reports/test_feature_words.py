"""What is said of features, word for word."""

from typing import Any

import pytest

from fits.reports import numbers
from fits.reports.features.count_words import count_sentence, thinning_sentence
from fits.reports.features.document import Features, Kind
from fits.reports.features.progress import found_so_far
from fits.reports.features.sampling_words import sampling_sentence
from fits.reports.features.spacing_words import harmonic_sentence, spacing_sentence
from fits.reports.features.tables import FeatureRow, feature_rows, peaks_csv

RADIUS = 0.31
BLANK: dict[str, Any] = {
    "radii": [{"level": 0.95, "calibrated": RADIUS}],
    "peaks": [],
    "dips": [],
    "count": [],
    "dip_count": [],
    "spacing": None,
    "harmonic": None,
}


def counted(*bounds: tuple[float, float | None], kind: Kind = Kind.PEAK, radius: float = RADIUS) -> str:
    """The sentence for these bounds of at most 0, 1, 2, …"""
    steps = [
        {"at_most": k, "price_lower": lower, "price_upper": upper, "demanded_level": 0.5, "witness": None}
        for k, (lower, upper) in enumerate(bounds)
    ]
    key = "count" if kind is Kind.PEAK else "dip_count"
    radii = [{"level": 0.95, "calibrated": radius}]
    return count_sentence(Features(BLANK | {key: steps, "radii": radii}), "0.95", kind)


def test_what_is_demanded_and_what_is_not() -> None:
    assert counted((5.29, 5.4), (1.2, 1.3), (0.01, 0.02), (0.0, 0.0)) == (
        "At 95 % the data demand at least 2 peaks; a third is not demanded: a curve with at most 2 peaks lies "
        "0.0200 error bars from the fit, inside the radius of 0.310."
    )


def test_the_fit_itself_is_a_witness() -> None:
    assert counted((1.2, 1.3), (0.0, 0.0)) == (
        "At 95 % the data demand at least 1 peak; a second is not demanded: the fit itself has 1 peak."
    )
    assert counted((0.0, 0.0), kind=Kind.DIP) == "At 95 % the data demand no dip: the fit itself has none."


def test_nothing_may_be_demanded() -> None:
    assert counted((0.1, 0.2), (0.0, 0.0)) == (
        "At 95 % the data demand no peak: a curve without peaks lies 0.200 error bars from the fit, inside the radius "
        "of 0.310."
    )


def test_bounds_on_either_side_of_the_radius_are_undecided() -> None:
    assert counted((1.2, 1.3), (0.12, 0.45), (0.02, 0.03), (0.0, 0.0)) == (
        "At 95 % the data demand at least 1 peak; whether a second is demanded is undecided: a curve with at most 1 "
        "peak lies between 0.120 and 0.450 error bars from the fit, the radius is 0.310; a third is not demanded: a "
        "curve with at most 2 peaks lies 0.0300 error bars from the fit, inside the radius of 0.310."
    )


def test_a_missing_witness_is_undecided_and_never_impossible() -> None:
    assert counted((1.2, 1.3), (0.12, None), (0.0, 0.0)) == (
        "At 95 % the data demand at least 1 peak; whether a second is demanded is undecided: a curve with at most 1 "
        "peak lies at least 0.120 error bars from the fit, the radius is 0.310, and none could be constructed; a third "
        "is not demanded: the fit itself has 2 peaks."
    )


def test_numbers_close_to_the_radius_are_told_apart() -> None:
    assert "lies 0.30998 error bars from the fit, inside the radius of 0.31000" in counted((0.2, 0.30998))
    assert numbers.apart(0.30998, 0.31) == ("0.30998", "0.31000")


def test_a_count_that_ended_too_soon_says_so() -> None:
    assert counted((2.0, 2.1), (1.0, 1.1)) == (
        "At 95 % the data demand at least 2 peaks; whether they demand more was not computed."
    )


def test_without_a_radius_nothing_is_said_of_a_number() -> None:
    assert "the radius is 0" in counted((0.2, 0.3), (0.0, 0.0), radius=0.0)


def test_a_count_that_was_not_computed_is_said_to_be_missing() -> None:
    assert counted() == "How many peaks the data demand was not computed."


def test_pooled_points_are_said() -> None:
    assert thinning_sentence(Features(BLANK | {"count_thinning": 0.0})) == ""
    assert "up to 0.012 error bars" in thinning_sentence(Features(BLANK | {"count_thinning": 0.0123}))


def spaced(price: list[float | None], interval: list[list[float]], *, harmonic: bool = False) -> str:
    spacing = [0.4, 0.5, 0.6, 0.7]
    found = {"spacing": spacing, "price": price, "interval": {"0.95": interval}}
    key, say = ("harmonic", harmonic_sentence) if harmonic else ("spacing", spacing_sentence)
    return say(Features(BLANK | {key: found}), "0.95", "cycles per hour")


def test_even_spacing_that_is_possible_is_not_ruled_out() -> None:
    assert spaced([0.5, 0.1, 0.2, 0.5], [[0.4512, 0.6412]]) == (
        "At 95 % even spacing is not ruled out, with a spacing of 0.451 to 0.642 cycles per hour (spacings looked at: "
        "0.40 to 0.70 cycles per hour)."
    )


def test_even_spacing_that_costs_too_much_is_rejected() -> None:
    # All prices are above the largest radius, where they may be lower bounds.
    assert spaced([0.9, 0.45, 0.6, 0.9], []) == (
        "At 95 % even spacing is rejected: every evenly spaced series lies at least 0.450 error bars from the fit, "
        "outside the radius of 0.310 (spacings looked at: 0.40 to 0.70 cycles per hour)."
    )
    assert "a harmonic series, peaks at whole multiples of the spacing, is rejected" in spaced(
        [0.9, 0.45, 0.6, 0.9], [], harmonic=True
    )


def test_a_series_between_two_radii_is_named_with_its_spacing() -> None:
    radii = [{"level": 0.67, "calibrated": 0.2}, {"level": 0.95, "calibrated": RADIUS}]
    found = {"spacing": [0.4, 0.5], "price": [0.25, 0.5], "interval": {"0.67": [], "0.95": [[0.4, 0.43]]}}
    said = spacing_sentence(Features(BLANK | {"radii": radii, "spacing": found}), "0.67", "")
    assert "the nearest evenly spaced series, 0.400 apart, lies 0.250 error bars from the fit" in said


def test_an_unsolved_spacing_is_not_ruled_out() -> None:
    said = spaced([0.9, None, 0.6, None], [[0.4, 0.6]])
    assert "For one spacing the programme could not be solved, which does not rule it out." in said


def test_too_few_peaks_for_spacing() -> None:
    assert "three peaks or more" in spacing_sentence(Features(BLANK), "0.95", "")
    assert harmonic_sentence(Features(BLANK), "0.95", "") == ""


def sampled(*shares: float | None) -> str:
    peaks = [
        {
            "samples": {
                "level": 0.95,
                "exact": [2.99, 4.76],
                "sampled": [3.36, 4.39],
                "share": share,
                "count": 50000,
                "tops": [],
            }
        }
        for share in shares
    ]
    return sampling_sentence(Features(BLANK | {"peaks": peaks}))


def test_samples_fall_short_of_the_exact_range() -> None:
    assert sampled(0.58, 0.62) == (
        "50\u202f000 curves drawn from the 95 % ball reach only 58 % of the exact range of height of peak 1 (3.36 to "
        "4.39 of 2.99 to 4.76) and 62 % of the exact range of height of peak 2 (3.36 to 4.39 of 2.99 to 4.76); a cloud "
        "of samples is not the answer."
    )


def test_samples_without_an_exact_range_are_not_spoken_of() -> None:
    assert sampled(None) == ""
    assert "only" not in sampled(0.99)


@pytest.mark.parametrize(
    ("low", "high", "written"),
    [
        (63.123, 68.941, "63.1 to 69.0"),
        (1.48223, 1.53118, "1.482 to 1.532"),
        (-0.0004, 12.3, "−0.1 to 12.3"),
        (2.0, 2.0, "2.000"),
        (14000.0, 17300.0, "14000 to 17300"),
    ],
)
def test_intervals_are_rounded_outwards(low: float, high: float, written: str) -> None:
    assert numbers.interval(low, high) == written


def peak(
    price: list[float | None], no_peak: dict[str, float | None], height: list[float | None]
) -> dict[str, Any]:
    return {
        "window": [1.0, 5.0],
        "profile": {"x": [2.0, 3.0, 4.0], "price": price},
        "location": {"0.95": [[1.8, 3.4]]},
        "height": {"0.95": height},
        "no_peak": no_peak,
    }


def row_of(found: dict[str, Any]) -> FeatureRow:
    (row,) = feature_rows(Features(BLANK | {"peaks": [found]}), "0.95", Kind.PEAK)
    return row


def test_a_peak_that_costs_more_than_the_radius_to_leave_out_is_demanded() -> None:
    row = row_of(peak([0.2, 0.1, 0.5], {"price": 0.4, "entry_level": 0.983}, [2.99, 4.76]))
    (at,) = row.levels
    assert (row.name, row.window, row.demanded_up_to) == ("Peak 1", "1.00 to 5.00", "98.3\xa0%")
    assert (at.location, at.height, at.demanded_words) == (("1.80 to 3.40",), "2.99 to 4.76", "yes")
    assert row.remark == ""


def test_a_peak_that_the_ball_can_do_without_is_not_demanded() -> None:
    (at,) = row_of(peak([0.2, 0.1, 0.5], {"price": 0.2, "entry_level": 0.5}, [2.99, 4.76])).levels
    assert at.demanded_words == "no"


def test_a_peak_without_which_there_is_no_curve_is_demanded() -> None:
    (at,) = row_of(peak([0.2, 0.1, 0.5], {"price": None, "entry_level": 1.0}, [2.99, 4.76])).levels
    assert at.demanded is True


def test_an_empty_ball_demands_no_peak_and_places_none() -> None:
    found = peak([0.2, 0.1, 0.5], {"price": 0.4, "entry_level": 0.3}, [3.5, 3.5])
    found["location"] = {"0.95": []}
    empty = Features(BLANK | {"peaks": [found], "radii": [{"level": 0.95, "calibrated": 0.0}]})
    (row,) = feature_rows(empty, "0.95", Kind.PEAK)
    (at,) = row.levels
    assert (at.demanded, at.demanded_words, at.location, at.height) == (
        None,
        "radius 0",
        ("radius 0",),
        "radius 0",
    )
    assert "radius 0" in peaks_csv(empty).splitlines()[1]
    assert "3.5" not in peaks_csv(empty)


@pytest.mark.parametrize(
    ("price", "said"),
    [
        (0.4, ("At 95 % the peak of the window 1.00 to 5.00 lies in 1.80 to 3.40.",)),
        (
            0.2,
            ("At 95 % a peak of the window 1.00 to 5.00, which need not have one, lies in 1.80 to 3.40.",),
        ),
    ],
)
def test_the_place_of_a_peak_that_is_not_demanded_is_that_of_a_peak_if_there_is_one(
    price: float, said: tuple[str, ...]
) -> None:
    found = peak([0.2, 0.1, 0.5], {"price": price, "entry_level": 0.9}, [2.99, 4.76])
    assert found_so_far(Features(BLANK | {"peaks": [found]})) == said


def test_an_empty_ball_places_no_peak_so_far() -> None:
    found = peak([0.2, 0.1, 0.5], {"price": 0.4, "entry_level": 0.3}, [3.5, 3.5])
    radii = [{"level": 0.95, "calibrated": 0.0}]
    assert found_so_far(Features(BLANK | {"peaks": [found], "radii": radii})) == ()


def test_what_could_not_be_solved_is_said_and_never_called_impossible() -> None:
    row = row_of(peak([0.2, None, None], {"price": None, "entry_level": None}, [None, 4.76]))
    (at,) = row.levels
    assert (at.height, at.demanded_words, row.demanded_up_to) == ("could not be solved",) * 3
    # The third place, outside the location interval, is one that no curve has: it is ruled out.
    assert row.remark == "At one place the programme could not be solved, which does not rule it out."
