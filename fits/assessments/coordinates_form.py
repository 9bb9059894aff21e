"""How many coordinates are judged: asked for with the other settings, and answered at once."""

import math
from typing import Any

from django import forms

from core.measurements.models import Release
from core.measurements.stored_release import interval_of_release
from fits.engine.data import ErrorSource
from fits.engine.error_size import MINIMUM_FREEDOM
from fits.engine.refusal import InputRefused
from fits.engine.resolution import feature_width, functions_for
from fits.engine.settings import (
    DEFAULT_DRAWS,
    FULL_RESOLUTION_POINTS,
    MAXIMUM_DRAWS,
    Settings,
    refuse_too_many_draws,
)

RESOLUTIONS = (
    ("default", "Default: 40 functions, or half as many as points where that is fewer"),
    ("number", "A number of functions, given below"),
    ("width", "The narrowest feature that matters, given below"),
    (
        "full",
        f"Full: as many functions as points, up to {FULL_RESOLUTION_POINTS}; nothing is left to check errors by",
    ),
)


class CoordinatesForm(forms.Form):
    """The resolution, and the draws that so many functions allow."""

    _sentence = ""

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
        widget=forms.NumberInput(attrs={"data-chooses": "id_resolution_choice_1"}),
        help_text="Only with “a number of functions”. Half as many functions see features twice as wide.",
    )
    feature_width = forms.FloatField(
        label="Narrowest feature",
        required=False,
        widget=forms.NumberInput(attrs={"data-chooses": "id_resolution_choice_2", "step": "any"}),
    )
    draws = forms.IntegerField(
        initial=DEFAULT_DRAWS,
        min_value=100,
        max_value=MAXIMUM_DRAWS,
        help_text="Simulated repeats. Four times as many halve the simulation error of a p-value.",
    )

    def __init__(self, *args: Any, release: Release, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.release = release
        measurement = release.measurement
        log = measurement.axis == "log"
        unit = f"ln {measurement.x_name}" if log else measurement.x_unit or measurement.x_name
        self.fields["feature_width"].help_text = f"In {unit}. Only with “the narrowest feature that matters”."

    @classmethod
    def with_defaults(cls, release: Release) -> "CoordinatesForm":
        """What the settings come to that nobody has touched."""
        return cls({"resolution_choice": "default", "draws": DEFAULT_DRAWS}, release=release)

    def clean(self) -> dict[str, Any]:
        """The resolution that was chosen needs its number, and must go with the release."""
        cleaned = super().clean() or self.cleaned_data
        choice = cleaned.get("resolution_choice")
        width = cleaned.get("feature_width")
        if choice == "number" and "resolution" not in self.errors and not cleaned.get("resolution"):
            self.add_error("resolution", "Give the number of functions.")
        if choice == "width" and "feature_width" not in self.errors and (width is None or not width > 0.0):
            self.add_error("feature_width", "Give a width above 0.")
        if not self.errors.keys() & CoordinatesForm.base_fields.keys():
            self._count(cleaned)
        return cleaned

    @property
    def sentence(self) -> str:
        """What the resolution comes to; empty where it is refused."""
        # Looking at the errors has the form cleaned.
        return "" if self.errors.keys() & CoordinatesForm.base_fields.keys() else self._sentence

    def chosen_resolution(self) -> dict[str, Any]:
        """The settings that an assessment keeps of this."""
        cleaned = self.cleaned_data
        choice = cleaned["resolution_choice"]
        return {
            "resolution": cleaned["resolution"] if choice == "number" else None,
            "feature_width": cleaned["feature_width"] if choice == "width" else None,
            "full": choice == "full",
            "draws": cleaned["draws"],
        }

    def _count(self, cleaned: dict[str, Any]) -> None:
        """Ask the engine how many functions that makes."""
        points, span = self.release.points, interval_of_release(self.release).span
        asked = "resolution" if cleaned["resolution_choice"] == "number" else "resolution_choice"
        try:
            settings = Settings(**self.chosen_resolution())
            functions = functions_for(settings, points=points, span=span)
            refuse_too_many_draws(settings, functions=functions)
        except InputRefused as refusal:
            field = asked if refusal.field == "resolution" else refusal.field
            self.add_error(field, f"{refusal.reason[:1].upper()}{refusal.reason[1:]}. {refusal.remedy}.")
            return
        left = points - functions
        if self.release.error_source == ErrorSource.ESTIMATE and left < MINIMUM_FREEDOM:
            self.add_error(
                "feature_width" if cleaned["resolution_choice"] == "width" else asked,
                f"{functions} functions leave {left} of {points} points to estimate the errors from; "
                f"{MINIMUM_FREEDOM} are needed.",
            )
            return
        width = self._in_words(feature_width(functions, span))
        check = "" if left else "; nothing is left over to check the errors by"
        self._sentence = f"J = {functions} functions: features wider than {width}; {points} points{check}."

    def _in_words(self, width: float) -> str:
        measurement = self.release.measurement
        if measurement.axis == "log":
            return f"a factor of {math.exp(min(width, 700.0)):.3g} in {measurement.x_name}"
        return f"{width:.3g} {measurement.x_unit or f'in {measurement.x_name}'}"
