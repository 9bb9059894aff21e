"""Theories and the curves that they predict."""

from typing import Any

from django.db import models
from django.urls import reverse

from core.measurements.models import Measurement
from core.people.models import Collaboration, User


class Theory(models.Model):
    """A named prediction by someone."""

    COLLABORATION_PATH = "collaboration"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="theories")
    name = models.CharField(max_length=120)
    proposed_by = models.CharField("proposed by", max_length=160, blank=True)
    description = models.TextField(blank=True)
    reference = models.CharField(max_length=300, blank=True)
    submitted_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="theories")
    created_at = models.DateTimeField(auto_now_add=True)

    class Meta:
        ordering = ("name", "pk")
        verbose_name_plural = "theories"
        constraints = (models.UniqueConstraint(fields=["collaboration", "name"], name="theory_name"),)

    def __str__(self) -> str:
        return self.name

    def get_absolute_url(self) -> str:
        return reverse("overviews:theory", args=[self.pk])


class Curve(models.Model):
    """A theory's prediction for one measurement. A draft has no version; a submitted one never changes."""

    COLLABORATION_PATH = "theory__collaboration"

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
