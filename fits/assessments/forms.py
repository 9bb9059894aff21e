"""What is asked for before an assessment starts."""

import secrets
from typing import TYPE_CHECKING, Any

from django import forms
from django.db.models import QuerySet

from core.measurements.models import Release
from core.theories.models import Curve
from fits.assessments.coordinates_form import CoordinatesForm
from fits.engine.refusal import InputRefused
from fits.engine.settings import DEFAULT_LEVELS, RadiusKind, Settings, Shrinkage

LARGEST_KEY = 2**63 - 1
LONGEST_KEY = len(str(LARGEST_KEY))
LARGEST_SEED = 2**53 - 1  # exact in JSON wherever it is read
SHRINKAGES = (
    (Shrinkage.MONOTONE, "Monotone: broad features are kept more than fine ones, each by its own factor"),
    (Shrinkage.NESTED, "Nested: broad features are kept whole and the finer ones dropped"),
)
RADII = (
    (
        RadiusKind.CALIBRATED,
        "Calibrated: simulated for these data, so that the ball holds the truth as often as it says",
    ),
    (
        RadiusKind.CAUTIOUS,
        "Cautious: larger, so that the ball holds the truth at least as often, whatever it looks like",
    ),
)


if TYPE_CHECKING:
    ManyCurves = forms.ModelMultipleChoiceField[Curve]
else:  # at run time Django's field takes no type argument
    ManyCurves = forms.ModelMultipleChoiceField


def is_no_key(text: str) -> bool:
    """Whether these digits are more than a database counts to; told before a long number of them is made."""
    return text.isdecimal() and (len(text) > LONGEST_KEY or int(text) > LARGEST_KEY)


class CurveChoice(ManyCurves):
    """Curves, named by theory and version."""

    def clean(self, value: Any) -> Any:
        """Keys that no database holds are no choice, rather than an error of its driver."""
        if any(is_no_key(str(key)) for key in value or ()):
            raise forms.ValidationError(self.error_messages["invalid_choice"], params={"value": "this"})
        return super().clean(value)

    def label_from_instance(self, obj: Curve) -> str:
        proposed_by = f", {obj.theory.proposed_by}" if obj.theory.proposed_by else ""
        return f"{obj}{proposed_by}"


class AssessmentForm(CoordinatesForm):
    """Curves and settings. Everything has a default; all of it is fixed before the verdicts are seen."""

    field_order = (
        "curves",
        "levels",
        "resolution_choice",
        "resolution",
        "feature_width",
        "shrinkage",
        "radius",
        "draws",
        "seed",
    )

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
    shrinkage = forms.ChoiceField(
        choices=SHRINKAGES,
        initial=Shrinkage.MONOTONE,
        widget=forms.RadioSelect,
        help_text="How the fit weighs broad features against fine ones; monotone is right unless you know better.",
    )
    radius = forms.ChoiceField(
        choices=RADII,
        initial=RadiusKind.CALIBRATED,
        widget=forms.RadioSelect,
        help_text="How wide the band and the rings are drawn. Inside or outside is decided by the exact p-value, which "
        "needs no radius.",
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

    def __init__(self, *args: Any, release: Release, curves: QuerySet[Curve], **kwargs: Any) -> None:
        super().__init__(*args, release=release, **kwargs)
        field = self.fields["curves"]
        assert isinstance(field, CurveChoice)
        field.queryset = curves
        field.initial = [curve.pk for curve in newest_versions(list(curves))]
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

    def chosen_settings(self) -> dict[str, Any]:
        """The settings as an assessment keeps them."""
        cleaned = self.cleaned_data
        return self.chosen_resolution() | {
            "levels": list(cleaned["levels"]),
            "shrinkage": str(cleaned["shrinkage"]),
            "radius": str(cleaned["radius"]),
            "features": cleaned["features"],
        }


def submitted_curves(release: Release) -> QuerySet[Curve]:
    """The curves that a release can be assessed with, newest versions first; those of one desk, or the shared ones,
    are assessed together."""
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
