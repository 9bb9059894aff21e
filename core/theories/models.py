"""Theories and the curves that they predict."""

from typing import Any

from django.db import models
from django.urls import reverse

from core.measurements.models import Measurement
from core.people.models import Collaboration, User


class Theory(models.Model):
    """A named prediction by someone. One at a student's desk is theirs and the leads' alone."""

    COLLABORATION_PATH = "collaboration"
    DESK_PATH = "desk"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="theories")
    name = models.CharField(max_length=120)
    proposed_by = models.CharField("proposed by", max_length=160, blank=True)
    description = models.TextField(blank=True)
    reference = models.CharField(max_length=300, blank=True)
    submitted_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="theories")
    # The student at whose desk it stands; None: shared by all.
    desk = models.ForeignKey(
        User, on_delete=models.PROTECT, null=True, blank=True, related_name="desk_theories"
    )
    # Raised with every change of the words: who saves an older state is told so.
    revision = models.PositiveIntegerField(default=0)
    created_at = models.DateTimeField(auto_now_add=True)

    class Meta:
        ordering = ("name", "pk")
        verbose_name_plural = "theories"
        constraints = (
            models.UniqueConstraint(
                fields=["collaboration", "name"], condition=models.Q(desk=None), name="theory_name"
            ),
            # Each desk has its own names: else a student would learn those of others by trying.
            models.UniqueConstraint(fields=["collaboration", "desk", "name"], name="theory_name_at_a_desk"),
        )

    def __str__(self) -> str:
        return self.name

    def get_absolute_url(self) -> str:
        return reverse("overviews:theory", args=[self.pk])


class Curve(models.Model):
    """A theory's prediction for one measurement. A draft has no version; a submitted one never changes."""

    COLLABORATION_PATH = "theory__collaboration"
    DESK_PATH = "theory__desk"

    class State(models.TextChoices):
        DRAFT = "draft", "draft"
        SUBMITTED = "submitted", "submitted"

    theory = models.ForeignKey(Theory, on_delete=models.CASCADE, related_name="curves")
    measurement = models.ForeignKey(Measurement, on_delete=models.CASCADE, related_name="curves")
    version = models.PositiveIntegerField(null=True, blank=True)
    state = models.CharField(max_length=10, choices=State.choices, default=State.DRAFT)
    note = models.TextField(blank=True)
    # x and y as one .npy of shape (rows, 2), sorted by x.
    table = models.BinaryField()
    file_name = models.CharField(max_length=200)
    file_sha256 = models.CharField(max_length=64)
    points = models.PositiveIntegerField()
    x_min = models.FloatField()
    x_max = models.FloatField()
    submitted_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="curves")
    created_at = models.DateTimeField(auto_now_add=True)
    submitted_at = models.DateTimeField(null=True, blank=True)

    class Meta:
        ordering = ("theory", "measurement", "version", "pk")
        constraints = (
            models.UniqueConstraint(fields=["theory", "measurement", "version"], name="curve_version"),
            models.CheckConstraint(
                condition=models.Q(state="draft", version=None) | models.Q(state="submitted", version__gte=1),
                name="submitted_curves_have_versions",
            ),
        )

    def __str__(self) -> str:
        return f"{self.theory}, version {self.version}" if self.version else f"{self.theory}, draft"

    def get_absolute_url(self) -> str:
        return reverse("theories:curve", args=[self.pk])

    def save(self, *args: Any, **kwargs: Any) -> None:
        """Refuse to change what has been submitted."""
        submitted = Curve.objects.filter(pk=self.pk, state=Curve.State.SUBMITTED)
        if self.pk is not None and submitted.exists():
            raise TypeError("a submitted curve is immutable; a correction is a new version")
        super().save(*args, **kwargs)


class Batch(models.Model):
    """Many curves for one measurement, uploaded together and looked at before any of them counts."""

    COLLABORATION_PATH = "collaboration"
    DESK_PATH = "desk"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="batches")
    measurement = models.ForeignKey(Measurement, on_delete=models.CASCADE, related_name="batches")
    desk = models.ForeignKey(User, on_delete=models.PROTECT, null=True, blank=True, related_name="+")
    uploaded_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="batches")
    note = models.TextField(blank=True)
    file_name = models.CharField(max_length=200)
    file_sha256 = models.CharField(max_length=64)
    created_at = models.DateTimeField(auto_now_add=True)
    # When the accepted ones were submitted; None while they are looked at.
    submitted_at = models.DateTimeField(null=True, blank=True)

    class Meta:
        ordering = ("-created_at", "-pk")

    def __str__(self) -> str:
        return f"{self.file_name}, for {self.measurement}"

    def get_absolute_url(self) -> str:
        return reverse("theories:batch", args=[self.pk])


class BatchItem(models.Model):
    """One curve of a batch: accepted, with its table, or refused, with the reason."""

    COLLABORATION_PATH = "batch__collaboration"
    DESK_PATH = "batch__desk"

    batch = models.ForeignKey(Batch, on_delete=models.CASCADE, related_name="items")
    order = models.PositiveIntegerField()
    name = models.CharField(max_length=200)  # of the theory; one that is not there yet comes to be
    source = models.CharField(max_length=300)  # the file in the archive, or the column of the table
    # Refused: a stable code and what to do. Accepted: both empty.
    refusal_code = models.CharField(max_length=60, blank=True)
    refusal = models.TextField(blank=True)
    # x and y as one .npy of shape (rows, 2), sorted by x; None where refused, and once submitted.
    table = models.BinaryField(null=True, blank=True)
    sha256 = models.CharField(max_length=64, blank=True)
    points = models.PositiveIntegerField(null=True, blank=True)
    x_min = models.FloatField(null=True, blank=True)
    x_max = models.FloatField(null=True, blank=True)
    curve = models.ForeignKey(Curve, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")

    class Meta:
        ordering = ("batch", "order")
        constraints = (models.UniqueConstraint(fields=["batch", "order"], name="one_place_in_a_batch"),)

    def __str__(self) -> str:
        return f"{self.name} of {self.batch}"

    @property
    def is_accepted(self) -> bool:
        """Whether it can be submitted."""
        return not self.refusal_code
