"""Assessments: one computation each, as a row that lives from queue to end; and searches for features in them."""

from typing import Any, ClassVar

from django.db import models
from django.urls import reverse

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.current_curves import current_curves
from fits.assessments.job import Job


class Assessment(Job):
    """A release, curves, settings and a seed → fit, balls and verdicts."""

    COLLABORATION_PATH = "release__measurement__collaboration"
    DESK_PATH = "desk"
    SEAL_PATH = "release__measurement"
    TASK = "fits.assessments.tasks.run_assessment"

    class Stage(models.TextChoices):
        WAITING = "waiting", "waiting for a worker"
        READING = "reading", "reading the release and the curves"
        FITTING = "fitting", "fitting"
        CALIBRATING = "calibrating", "calibrating the radii"
        JUDGING = "judging", "judging each curve"
        SAVING = "saving", "saving"
        ENDED = "ended", "ended"

    AT_THE_END: ClassVar[dict[str, Any]] = {"stage": Stage.ENDED}

    release = models.ForeignKey(Release, on_delete=models.CASCADE, related_name="assessments")
    curves: "models.ManyToManyField[Curve, models.Model]" = models.ManyToManyField(
        Curve, related_name="assessments"
    )
    settings = models.JSONField()
    seed = models.PositiveBigIntegerField()
    # SHA-256 over inputs, settings, seed and engine version; equal ones are computed once.
    fingerprint = models.CharField(max_length=64)
    requested_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="assessments")
    # The student's desk at which all its curves stand; None: they are shared, and so is it.
    desk = models.ForeignKey(User, on_delete=models.PROTECT, null=True, blank=True, related_name="+")
    # Made when the release was published or the measurement opened, not asked for by somebody.
    is_automatic = models.BooleanField(default=False)

    stage = models.CharField(max_length=12, choices=Stage.choices, default=Stage.WAITING)
    progress = models.FloatField(default=0.0)  # 0 … 1

    engine_version = models.CharField(max_length=20, blank=True)
    result = models.JSONField(null=True, blank=True)  # the document of `rank --json`
    detail = models.JSONField(null=True, blank=True)  # what the charts need beside it
    # The radius at 95 %, of the kind that was chosen, where that level was asked for.
    radius = models.FloatField(null=True, blank=True)
    # Distances of its curves from each other, in error bars: {"curves": [key, …], "distances": [pair by pair]}.
    separations = models.JSONField(null=True, blank=True)

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
    def left_out(self) -> list[Curve]:
        """Where nobody chose the curves: the current ones of its desk that it was made without, since they do not
        reach over the release's x. Two queries."""
        if not self.is_automatic:
            return []
        judged = set(self.curves.values_list("pk", flat=True))
        current = current_curves(self.release.measurement_id, until=self.created_at)
        return [curve for curve in current if curve.theory.desk_id == self.desk_id and curve.pk not in judged]


class Verdict(models.Model):
    """What an assessment says of one curve; the numbers are those of its result, kept here for queries."""

    COLLABORATION_PATH = "assessment__release__measurement__collaboration"
    DESK_PATH = "assessment__desk"
    SEAL_PATH = "assessment__release__measurement"

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


class FeatureSearch(models.Model):
    """What the data of an assessment demand of peaks and dips: sought in windows, in parts of their own."""

    COLLABORATION_PATH = "assessment__release__measurement__collaboration"
    DESK_PATH = "assessment__desk"
    SEAL_PATH = "assessment__release__measurement"
    Status = Job.Status

    assessment = models.ForeignKey(Assessment, on_delete=models.CASCADE, related_name="feature_searches")
    windows = models.JSONField(default=list)  # [[low, high], …] as asked for; [] = the fit's own
    # SHA-256 over assessment, windows and engine version; equal ones are computed once.
    fingerprint = models.CharField(max_length=64)
    requested_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="feature_searches")
    created_at = models.DateTimeField(auto_now_add=True)
    # That of its parts together: queued until it is planned; failed when any part failed.
    status = models.CharField(max_length=10, choices=Status.choices, default=Status.QUEUED)

    class Meta:
        ordering = ("-created_at", "-pk")
        constraints = (
            models.UniqueConstraint(
                fields=["fingerprint"],
                condition=models.Q(status__in=["queued", "running", "done"]),
                name="features_found_once",
            ),
        )

    def __str__(self) -> str:
        return f"features of {self.assessment}"

    @property
    def has_ended(self) -> bool:
        """Whether nothing more will happen to it."""
        return self.status in Job.ENDED


class FeaturePart(Job):
    """One statement, or one family of them, computed apart so that the workers share a search."""

    COLLABORATION_PATH = "search__assessment__release__measurement__collaboration"
    DESK_PATH = "search__assessment__desk"
    SEAL_PATH = "search__assessment__release__measurement"
    TASK = "fits.assessments.tasks.run_feature_part"
    IS_URGENT = False

    class Kind(models.TextChoices):
        PLAN = "plan", "which windows there are"
        COUNT = "count", "how many peaks"
        DIP_COUNT = "dip_count", "how many dips"
        PEAK = "peak", "a peak in a window"
        DIP = "dip", "a dip in a window"
        SPACING = "spacing", "even spacing of the peaks"
        HARMONIC = "harmonic", "whether the peaks are a harmonic series"

    search = models.ForeignKey(FeatureSearch, on_delete=models.CASCADE, related_name="parts")
    kind = models.CharField(max_length=10, choices=Kind.choices)
    window = models.JSONField(null=True, blank=True)  # [low, high] for a peak or dip
    order = models.PositiveIntegerField()
    result = models.JSONField(null=True, blank=True)

    class Meta:
        ordering = ("search", "order")
        indexes = (models.Index(fields=["status", "heartbeat_at"], name="feature_part_liveness"),)
        constraints = (models.UniqueConstraint(fields=["search", "order"], name="planned_once"),)

    def __str__(self) -> str:
        return f"{self.kind} of {self.search}"
