"""The finding and the explanations, word for word."""

from collections.abc import Callable

from fits.reports import verdict_words, words
from fits.reports.snapshot import Snapshot

Told = Callable[..., Snapshot]


def test_some_stay_inside(told: Told) -> None:
    snapshot = told({"A": (0.31, True, True), "B": (0.4, True, True), "C": (1.5, False, False)})
    assert words.finding(snapshot, "0.95") == (
        "Of 3 theories, 2 stay inside the 95 % set of release 3; the closest is A, at 0.310 error bars from the fit."
    )


def test_one_stays_inside(told: Told) -> None:
    snapshot = told({"A": (0.31, True, True), "B": (1.4, False, False)})
    assert words.finding(snapshot, "0.67").startswith(
        "Of 2 theories, 1 stays inside the 67 % set of release 3;"
    )


def test_none_stays_inside(told: Told) -> None:
    snapshot = told({"A": (1.31, False, False), "B": (1.4, False, False)})
    assert words.finding(snapshot, "0.99") == (
        "None of 2 theories stays inside the 99 % set of release 3; the closest is A, at 1.31 error bars from the fit."
    )


def test_all_stay_inside(told: Told) -> None:
    snapshot = told({"A": (0.31, True, True), "B": (0.4, True, True)})
    assert words.finding(snapshot, "0.95").startswith(
        "All 2 theories stay inside the 95 % set of release 3, which rules none of them out; the closest is A"
    )


def test_a_single_curve_is_not_called_the_closest(told: Told) -> None:
    assert words.finding(told({"A": (0.31, True, True)}), "0.95") == (
        "The one theory, A, stays inside the 95 % set of release 3, at 0.310 error bars from the fit."
    )
    assert "A, is outside the 95 % set" in words.finding(told({"A": (2.0, False, False)}), "0.95")


def test_an_unsettled_order_is_said(told: Told) -> None:
    two = told({"A": (0.31, True, True), "B": (0.32, True, True)}, settled=False)
    assert words.finding(two, "0.95").endswith("but the order of the first two is not settled by the data.")
    three = told({"A": (0.3, True, True), "B": (0.32, True, True), "C": (0.33, True, True)}, settled=False)
    assert words.finding(three, "0.95").endswith("but the order of the first 3 is not settled by the data.")


def test_what_the_scale_set_rejects_is_said(told: Told) -> None:
    snapshot = told({"A": (0.31, True, False), "B": (0.4, True, True), "C": (2.0, False, False)})
    assert "2 stay inside the 95 % set of release 3, though the scale set rejects A;" in words.finding(
        snapshot, "0.95"
    )


def test_versions_of_one_theory_are_counted_as_curves(told: Told) -> None:
    snapshot = told({"A": (0.31, True, True), "B": (0.4, True, True)}, theories=False)
    assert words.finding(snapshot, "0.95").startswith("All 2 curves stay inside")


def test_data_without_a_number_go_by_their_file(computed: Snapshot) -> None:
    from_file = Snapshot(
        computed.result, computed.detail, {"release": {"number": None, "file_name": "gauss.csv"}}
    )
    assert "set of gauss.csv" in words.finding(from_file, "0.95")
    assert "set of these data" in words.finding(Snapshot(computed.result, computed.detail, {}), "0.95")


def disagreeing(computed: Snapshot, **sides: bool) -> tuple[str, ...]:
    curve = dict(computed.curves[0])
    curve["inside"] = {
        kind: {"0.95": sides.get(kind, True)} for kind in ("exact", "published", "calibrated", "scales")
    }
    curve |= {"p_value": 0.5, "p_value_error": 0.01}
    return verdict_words.explanations(computed, curve, "0.95")


def test_agreement_needs_no_words(computed: Snapshot) -> None:
    assert disagreeing(computed) == ()


def test_a_published_ball_that_disagrees_is_explained(computed: Snapshot) -> None:
    assert disagreeing(computed, published=False) == (
        "The published ball says outside at 95 %, the exact p-value inside: the published radius is right for "
        "large n only.",
    )


def test_a_calibrated_ball_that_disagrees_is_explained(computed: Snapshot) -> None:
    (sentence,) = disagreeing(computed, calibrated=False)
    assert sentence.startswith("The calibrated ball says outside at 95 %, the exact p-value inside")


def test_inside_but_off_is_explained_with_the_width(computed: Snapshot) -> None:
    curve = dict(computed.curves[0])
    curve["scales"] = {"p_value": 0.01, "worst": {"functions": 4, "wider_than": 2.0, "p_value": 0.001}}
    curve["inside"] = {
        kind: {"0.95": kind != "scales"} for kind in ("exact", "published", "calibrated", "scales")
    }
    curve |= {"p_value": 0.5, "p_value_error": 0.01}
    (sentence,) = verdict_words.explanations(computed, curve, "0.95")
    assert sentence.startswith("Inside, but off at features wider than 2.00 cycles per hour")
    assert "small, steady misfit" in sentence
    finest = {"functions": computed.result["fit"]["resolution"], "wider_than": 0.2, "p_value": 0.001}
    curve["scales"] = {"p_value": 0.01, "worst": finest}
    (sentence,) = verdict_words.explanations(computed, curve, "0.95")
    assert "small, steady misfit" not in sentence


def test_a_p_value_at_the_border_is_said_to_be_unsure(computed: Snapshot) -> None:
    curve = computed.curves[0] | {"p_value": 0.052, "p_value_error": 0.005}
    assert any(
        "within its simulation error of 5 %" in s for s in verdict_words.explanations(computed, curve, "0.95")
    )


def leftover_of(computed: Snapshot, p: float) -> str:
    found = {"chi2": 80.0, "dof": 80, "p_value": p}
    result = {**computed.result, "leftover": found}
    return " ".join(verdict_words.leftover(Snapshot(result, computed.detail, computed.context)))


def test_the_leftover_has_both_readings_always(computed: Snapshot) -> None:
    for p, verdict in (
        (0.001, "scatters more than the errors allow"),
        (0.03, "rather more than the errors say, as by chance in 1 of 20 repeats"),
        (0.5, "about as much"),
        (0.97, "rather less than the errors say, as by chance in 1 of 20 repeats"),
        (0.999, "scatters less than the errors say"),
    ):
        said = leftover_of(computed, p)
        assert verdict in said
        assert "errors are understated" in said
        assert "errors are overstated" in said


def test_without_leftover_the_danger_is_said(computed: Snapshot) -> None:
    result = {**computed.result, "leftover": None}
    said = " ".join(verdict_words.leftover(Snapshot(result, computed.detail, computed.context)))
    assert "10 % off" in said


def test_inside_is_never_proved(computed: Snapshot) -> None:
    assert any(
        "never means proved" in sentence for sentence in words.meaning(words.resolution_width(computed))
    )
