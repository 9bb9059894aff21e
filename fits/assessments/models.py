"""Assessments: one computation each, as a row that lives from queue to end."""

from django.db import models
from django.urls import reverse

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve


class Assessment(models.Model):
    """A release, curves, settings and a seed → fit, balls and verdicts."""

    COLLABORATION_PATH = "release__measurement__collaboration"

    class Status(models.TextChoices):
        QUEUED = "queued", "queued"
        RUNNING = "running", "running"
        DONE = "done", "done"
        FAILED = "failed", "failed"
        CANCELLED = "cancelled", "cancelled"

    class Stage(models.TextChoices):
        WAITING = "waiting", "waiting for a worker"
        READING = "reading", "reading the release and the curves"
        FITTING = "fitting", "fitting"
        CALIBRATING = "calibrating", "calibrating the radii"
        JUDGING = "judging", "judging each curve"
        SAVING = "saving", "saving"
        ENDED = "ended", "ended"

    ENDED = (Status.DONE, Status.FAILED, Status.CANCELLED)

    release = models.ForeignKey(Release, on_delete=models.CASCADE, related_name="assessments")
    curves: "models.ManyToManyField[Curve, models.Model]" = models.ManyToManyField(
        Curve, related_name="assessments"
    )
    settings = models.JSONField()
    seed = models.PositiveBigIntegerField()
    # SHA-256 over inputs, settings, seed and engine version; equal ones are computed once.
    fingerprint = models.CharField(max_length=64)
    requested_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="assessments")
    created_at = models.DateTimeField(auto_now_add=True)

    status = models.CharField(max_length=10, choices=Status.choices, default=Status.QUEUED)
    stage = models.CharField(max_length=12, choices=Stage.choices, default=Stage.WAITING)
    progress = models.FloatField(default=0.0)  # 0 … 1
    attempt = models.PositiveSmallIntegerField(default=0)
    heartbeat_at = models.DateTimeField(null=True, blank=True)
    cancel_requested = models.BooleanField(default=False)
    started_at = models.DateTimeField(null=True, blank=True)
    ended_at = models.DateTimeField(null=True, blank=True)
    # Why it failed: a stable code and a sentence; for a fault of ours the sentence holds its id in the log.
    failure_code = models.CharField(max_length=60, blank=True)
    failure = models.TextField(blank=True)

    engine_version = models.CharField(max_length=20, blank=True)
    result = models.JSONField(null=True, blank=True)  # the document of `rank --json`
    detail = models.JSONField(null=True, blank=True)  # what the charts need beside it

    class Meta:
        ordering = ("-created_at", "-pk")
        indexes = (
            models.Index(fields=["fingerprint"], name="assessment_fingerprint"),
            models.Index(fields=["status", "heartbeat_at"], name="assessment_liveness"),
        )
        constraints = (
            # One living or finished computation of the same thing; failed and cancelled ones may repeat.
            models.UniqueConstraint(
                fields=["fingerprint"],
                condition=models.Q(status__in=["queued", "running", "done"]),
                name="computed_once",
            ),
        )

    def __str__(self) -> str:
        return f"assessment {self.pk}"

    def get_absolute_url(self) -> str:
        return reverse("reports:assessment", args=[self.pk])

    @property
    def has_ended(self) -> bool:
        """Whether nothing more will happen to it."""
        return self.status in self.ENDED


class Verdict(models.Model):
    """What an assessment says of one curve; the numbers are those of its result, kept here for queries."""

    COLLABORATION_PATH = "assessment__release__measurement__collaboration"

    assessment = models.ForeignKey(Assessment, on_delete=models.CASCADE, related_name="verdicts")
    curve = models.ForeignKey(Curve, on_delete=models.CASCADE, related_name="verdicts")
    rank = models.PositiveIntegerField()
    distance = models.FloatField()
    entry_level = models.FloatField()  # calibrated
    p_value = models.FloatField()
    scale_p_value = models.FloatField()
    inside = models.JSONField()  # level → whether in the exact ball set, {"0.95": true}

    class Meta:
        ordering = ("assessment", "rank")
        constraints = (models.UniqueConstraint(fields=["assessment", "curve"], name="one_verdict_each"),)

    def __str__(self) -> str:
        return f"{self.curve} in {self.assessment}"
