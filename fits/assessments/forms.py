"""What is asked for before an assessment starts."""

import secrets
from typing import TYPE_CHECKING, Any

from django import forms

from core.measurements.models import Release
from core.theories.models import Curve
from fits.engine.refusal import InputRefused
from fits.engine.settings import (
    DEFAULT_DRAWS,
    DEFAULT_LEVELS,
    FULL_RESOLUTION_POINTS,
    MAXIMUM_DRAWS,
    Settings,
    Shrinkage,
)

LARGEST_SEED = 2**53 - 1  # exact in JSON wherever it is read
RESOLUTIONS = (
    ("default", "Default: fine enough for most data, at most half as many functions as points"),
    ("number", "A number of functions, given below"),
    ("width", "The narrowest feature that matters, given below"),
    (
        "full",
        f"Full: as many functions as points, up to {FULL_RESOLUTION_POINTS}; nothing is left to check errors by",
    ),
)
SHRINKAGES = (
    (Shrinkage.MONOTONE, "Monotone: broad features are kept more than fine ones, each by its own factor"),
    (Shrinkage.NESTED, "Nested: broad features are kept whole and the finer ones dropped"),
)


if TYPE_CHECKING:
    ManyCurves = forms.ModelMultipleChoiceField[Curve]
else:  # at run time Django's field takes no type argument
    ManyCurves = forms.ModelMultipleChoiceField


class CurveChoice(ManyCurves):
    """Curves, named by theory and version."""

    def label_from_instance(self, obj: Curve) -> str:
        proposed_by = f", {obj.theory.proposed_by}" if obj.theory.proposed_by else ""
        return f"{obj}{proposed_by}"


class AssessmentForm(forms.Form):
    """Curves and settings. Everything has a default; all of it is fixed before the verdicts are seen."""

    curves = CurveChoice(
        queryset=Curve.objects.none(),
        widget=forms.CheckboxSelectMultiple,
        help_text="The newest version of each theory is chosen; older ones can be judged beside it.",
        error_messages={"required": "Choose at least one curve."},
    )
    levels = forms.CharField(
        label="Levels, in %",
        initial=", ".join(f"{100 * level:g}" for level in DEFAULT_LEVELS),
        help_text="How sure each set is to hold the true curve. A higher level makes a larger ball.",
    )
    resolution_choice = forms.ChoiceField(
        label="Resolution",
        choices=RESOLUTIONS,
        initial="default",
        widget=forms.RadioSelect,
        help_text="What is finer than the resolution is not judged. A finer one sees more and is less sharp.",
    )
    resolution = forms.IntegerField(
        label="Number of functions",
        min_value=4,
        required=False,
        help_text="Only with “a number of functions”.",
    )
    feature_width = forms.FloatField(label="Narrowest feature", required=False)
    shrinkage = forms.ChoiceField(
        choices=SHRINKAGES,
        initial=Shrinkage.MONOTONE,
        widget=forms.RadioSelect,
        help_text="How the fit weighs broad features against fine ones; monotone is right unless you know better.",
    )
    draws = forms.IntegerField(
        initial=DEFAULT_DRAWS,
        min_value=100,
        max_value=MAXIMUM_DRAWS,
        help_text="Simulated repeats. Four times as many halve the simulation error of a p-value.",
    )
    features = forms.BooleanField(
        label="Find peaks and dips",
        initial=True,
        required=False,
        help_text="Which peaks and dips the data demand, where and how high. The verdicts do not wait for them.",
    )
    seed = forms.IntegerField(
        min_value=0,
        max_value=LARGEST_SEED,
        help_text="Starts the simulation. The same inputs, settings and seed give the same numbers to the last digit.",
    )

    def __init__(self, *args: Any, release: Release, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.release = release
        curves = submitted_curves(release)
        field = self.fields["curves"]
        assert isinstance(field, CurveChoice)
        field.queryset = curves
        field.initial = [curve.pk for curve in newest_versions(list(curves))]
        measurement = release.measurement
        log = measurement.axis == "log"
        unit = f"ln {measurement.x_name}" if log else measurement.x_unit or measurement.x_name
        self.fields["feature_width"].help_text = f"In {unit}. Only with “the narrowest feature that matters”."
        self.fields["seed"].initial = secrets.randbelow(1_000_000_000)

    def clean_levels(self) -> tuple[float, ...]:
        """Percentages as fractions, increasing."""
        parts = self.cleaned_data["levels"].replace("%", " ").replace(",", " ").split()
        try:
            levels = sorted({round(float(part) / 100.0, 12) for part in parts})
            Settings(levels=tuple(levels))
        except InputRefused as refusal:
            raise forms.ValidationError(f"{refusal.reason}.".capitalize()) from refusal
        except ValueError as error:
            raise forms.ValidationError("Give numbers between 0 and 100, as 67, 90, 95, 99.") from error
        return tuple(levels)

    def clean(self) -> dict[str, Any]:
        """The resolution that was chosen needs its number."""
        cleaned = super().clean() or self.cleaned_data
        choice = cleaned.get("resolution_choice")
        width = cleaned.get("feature_width")
        if choice == "number" and "resolution" not in self.errors and not cleaned.get("resolution"):
            self.add_error("resolution", "Give the number of functions.")
        if choice == "width" and "feature_width" not in self.errors and (width is None or not width > 0.0):
            self.add_error("feature_width", "Give a width above 0.")
        if choice == "full" and self.release.points > FULL_RESOLUTION_POINTS:
            self.add_error(
                "resolution_choice",
                f"Full resolution goes up to {FULL_RESOLUTION_POINTS} points; this release has {self.release.points}.",
            )
        return cleaned

    def chosen_settings(self) -> dict[str, Any]:
        """The settings as an assessment keeps them."""
        cleaned = self.cleaned_data
        choice = cleaned["resolution_choice"]
        return {
            "levels": list(cleaned["levels"]),
            "resolution": cleaned["resolution"] if choice == "number" else None,
            "feature_width": cleaned["feature_width"] if choice == "width" else None,
            "full": choice == "full",
            "shrinkage": str(cleaned["shrinkage"]),
            "draws": cleaned["draws"],
            "features": cleaned["features"],
        }


def submitted_curves(release: Release) -> Any:
    """The curves that a release can be assessed with, newest versions first."""
    return (
        Curve.objects.filter(measurement=release.measurement, state=Curve.State.SUBMITTED)
        .select_related("theory")
        .defer("table")
        .order_by("theory__name", "-version")
    )


def newest_versions(curves: list[Curve]) -> list[Curve]:
    """The first of each theory, where the newest stand first."""
    newest: dict[int, Curve] = {}
    for curve in curves:
        newest.setdefault(curve.theory_id, curve)
    return list(newest.values())
