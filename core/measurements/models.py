"""Measurements and their releases."""

from datetime import datetime
from typing import Any

from django.db import models
from django.urls import reverse
from django.utils import timezone

from core.people.models import Collaboration, User


class Axis(models.TextChoices):
    """What the resolution is even on: x or its logarithm."""

    LINEAR = "linear", "linear"
    LOG = "log", "logarithmic"


class Measurement(models.Model):
    """One quantity as a function of x."""

    COLLABORATION_PATH = "collaboration"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="measurements")
    name = models.CharField(max_length=160)
    about = models.TextField(blank=True)
    x_name = models.CharField("name of x", max_length=80)
    x_unit = models.CharField("unit of x", max_length=40, blank=True)
    y_name = models.CharField("name of y", max_length=80)
    y_unit = models.CharField("unit of y", max_length=40, blank=True)
    axis = models.CharField(max_length=6, choices=Axis.choices, default=Axis.LINEAR)
    created_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="+")
    created_at = models.DateTimeField(auto_now_add=True)
    # Raised with every change of the words or the seal: who saves an older state is told so.
    revision = models.PositiveIntegerField(default=0)
    # Sealed: nobody sees data or verdicts until it opens, at a time (opens_at) or by a lead's word (opened_by).
    sealed_at = models.DateTimeField(null=True, blank=True)
    opens_at = models.DateTimeField(null=True, blank=True)
    opened_at = models.DateTimeField(null=True, blank=True)
    opened_by = models.ForeignKey(User, on_delete=models.PROTECT, null=True, blank=True, related_name="+")
    # Curves are taken until then; without it, until it opens.
    curves_until = models.DateTimeField(null=True, blank=True)
    # The stretch of x that curves have to cover, told while the data themselves are not.
    announced_x_min = models.FloatField(null=True, blank=True)
    announced_x_max = models.FloatField(null=True, blank=True)

    class Meta:
        ordering = ("name", "pk")
        constraints = (
            models.UniqueConstraint(fields=["collaboration", "name"], name="measurement_name"),
            models.CheckConstraint(
                condition=models.Q(sealed_at__isnull=False)
                | models.Q(opens_at=None, opened_at=None, opened_by=None, curves_until=None),
                name="only_what_is_sealed_opens",
            ),
        )

    def __str__(self) -> str:
        return self.name

    def get_absolute_url(self) -> str:
        return reverse("overviews:measurement", args=[self.pk])

    @property
    def x_label(self) -> str:
        """Name and unit of x, as on an axis."""
        return f"{self.x_name} ({self.x_unit})" if self.x_unit else self.x_name

    @property
    def y_label(self) -> str:
        """Name and unit of y, as on an axis."""
        return f"{self.y_name} ({self.y_unit})" if self.y_unit else self.y_name

    @property
    def was_sealed(self) -> bool:
        """Whether curves were asked for before the data were shown."""
        return self.sealed_at is not None

    @property
    def is_sealed(self) -> bool:
        """Whether data and verdicts are hidden now. To the second: no job has to run for it to open."""
        if self.sealed_at is None or self.opened_at is not None:
            return False
        return self.opens_at is None or self.opens_at > timezone.now()

    @property
    def opened(self) -> datetime | None:
        """When data and verdicts came to be seen; None for what is sealed, or never was."""
        if self.sealed_at is None or self.is_sealed:
            return None
        return self.opened_at or self.opens_at

    @property
    def takes_curves(self) -> bool:
        """Whether curves may be submitted: not between the deadline and the opening."""
        return not self.is_sealed or self.curves_until is None or self.curves_until > timezone.now()


class EarlyLook(models.Model):
    """A lead saw the data of a sealed measurement before it opened. Never taken back."""

    COLLABORATION_PATH = "measurement__collaboration"

    class How(models.TextChoices):
        LOOKED = "looked", "looked at the data"
        UPLOADED = "uploaded", "uploaded the data"

    measurement = models.ForeignKey(Measurement, on_delete=models.CASCADE, related_name="early_looks")
    user = models.ForeignKey(User, on_delete=models.PROTECT, related_name="+")
    how = models.CharField(max_length=8, choices=How.choices, default=How.LOOKED)
    at = models.DateTimeField(auto_now_add=True)

    class Meta:
        ordering = ("at", "pk")
        constraints = (models.UniqueConstraint(fields=["measurement", "user"], name="first_look"),)

    def __str__(self) -> str:
        return f"{self.user} {self.get_how_display()} of {self.measurement}"


class ReleaseManager(models.Manager["Release"]):
    """Leaves covariances and windows, of up to 200 MB, in the database until they are asked for."""

    def get_queryset(self) -> models.QuerySet["Release"]:
        return super().get_queryset().defer("covariance", "windows")


class Release(models.Model):
    """One numbered data table of a measurement. A draft has no number; a published one never changes, but can be
    withdrawn: it and what was found of it stay, and say so."""

    COLLABORATION_PATH = "measurement__collaboration"
    SEAL_PATH = "measurement"

    class State(models.TextChoices):
        DRAFT = "draft", "draft"
        PUBLISHED = "published", "published"
        WITHDRAWN = "withdrawn", "withdrawn"

    class ErrorSource(models.TextChoices):
        GIVEN = "given", "given"
        ESTIMATE = "estimate", "of unknown size"
        COUNTS = "counts", "those of counts"
        PROFILE = "profile", "changing along x"

    measurement = models.ForeignKey(Measurement, on_delete=models.CASCADE, related_name="releases")
    number = models.PositiveIntegerField(null=True, blank=True)
    state = models.CharField(max_length=10, choices=State.choices, default=State.DRAFT)
    note = models.TextField(blank=True)
    # The numbers of the uploaded table as one .npy of shape (rows, columns), the line each row stood on,
    # and per column {"header": str, "role": str}; see core.measurements.reading.
    table = models.BinaryField()
    lines = models.BinaryField()
    columns = models.JSONField()
    covariance = models.BinaryField(null=True, blank=True)
    # Its diagonal, for drawing.
    variances = models.BinaryField(null=True, blank=True)
    # Where the errors come from; an error column is relative where their size is to be estimated.
    error_source = models.CharField(max_length=8, choices=ErrorSource.choices, default=ErrorSource.GIVEN)
    # The fraction to which the scale of y is known, 0 where it is exact.
    calibration = models.FloatField(default=0.0)
    # How the points see the curve, as one .npy of shape (points + 1, grid): the grid of x, then weights point by point.
    windows = models.BinaryField(null=True, blank=True)
    windows_name = models.CharField(max_length=200, blank=True)
    windows_sha256 = models.CharField(max_length=64, blank=True)
    file_name = models.CharField(max_length=200)
    file_sha256 = models.CharField(max_length=64)
    covariance_name = models.CharField(max_length=200, blank=True)
    covariance_sha256 = models.CharField(max_length=64, blank=True)
    points = models.PositiveIntegerField()
    created_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="+")
    created_at = models.DateTimeField(auto_now_add=True)
    published_at = models.DateTimeField(null=True, blank=True)
    withdrawn_at = models.DateTimeField(null=True, blank=True)
    withdrawn_by = models.ForeignKey(User, on_delete=models.PROTECT, null=True, blank=True, related_name="+")
    withdrawal_reason = models.TextField(blank=True)

    objects = ReleaseManager()

    class Meta:
        ordering = ("measurement", "number", "pk")
        constraints = (
            models.UniqueConstraint(fields=["measurement", "number"], name="release_number"),
            models.CheckConstraint(
                condition=models.Q(state="draft", number=None)
                | models.Q(state__in=["published", "withdrawn"], number__gte=1),
                name="published_releases_are_numbered",
            ),
            models.CheckConstraint(
                condition=models.Q(state="withdrawn", withdrawn_at__isnull=False)
                | (~models.Q(state="withdrawn") & models.Q(withdrawn_at=None, withdrawn_by=None)),
                name="withdrawn_releases_say_when",
            ),
            models.CheckConstraint(
                condition=models.Q(covariance=None, variances=None)
                | models.Q(covariance__isnull=False, variances__isnull=False),
                name="variances_are_those_of_the_covariance",
            ),
            models.CheckConstraint(
                condition=models.Q(calibration__gte=0.0, calibration__lt=1.0),
                name="calibration_is_a_fraction",
            ),
        )

    def __str__(self) -> str:
        return f"release {self.number}" if self.number else "draft release"

    @property
    def is_withdrawn(self) -> bool:
        """Whether a lead has taken it back."""
        return self.state == Release.State.WITHDRAWN

    def get_absolute_url(self) -> str:
        return reverse("measurements:release", args=[self.pk])

    @property
    def has_windows(self) -> bool:
        """Whether the points see the curve through windows, told without fetching them."""
        return bool(self.windows_sha256)

    def save(self, *args: Any, **kwargs: Any) -> None:
        """Refuse to change what has been published."""
        published = Release.objects.filter(pk=self.pk).exclude(state=Release.State.DRAFT)
        if self.pk is not None and published.exists():
            raise TypeError("a published release is immutable; a correction is a new release")
        super().save(*args, **kwargs)
