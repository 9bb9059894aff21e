"""Reports with their parts, the links that open them, and their prints."""

from typing import Any, ClassVar

from django.db import models
from django.urls import reverse
from django.utils import timezone

from core.people.models import Collaboration, User
from fits.assessments.job import Job
from fits.assessments.models import Assessment, FeatureSearch

IMMUTABLE = "a frozen report never changes; a later version is a new report that continues it"


class Report(models.Model):
    """Words of a lead's over several assessments. A draft is the leads'; a frozen one never changes."""

    COLLABORATION_PATH = "collaboration"

    class State(models.TextChoices):
        DRAFT = "draft", "draft"
        FROZEN = "frozen", "frozen"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="reports")
    state = models.CharField(max_length=6, choices=State.choices, default=State.DRAFT)
    title = models.CharField(max_length=200)
    # Markdown, as written; what is shown of it once it is frozen, so that it never changes with a library.
    words = models.TextField(blank=True)
    words_html = models.TextField(blank=True)
    # Raised with every change of the report or of its parts: who saves an older state is told so.
    revision = models.PositiveIntegerField(default=0)
    # The report that this one continues.
    previous = models.ForeignKey(
        "self", on_delete=models.PROTECT, null=True, blank=True, related_name="later"
    )
    author = models.ForeignKey(User, on_delete=models.PROTECT, related_name="reports")
    # Once frozen: how author and collaboration were called then.
    author_name = models.CharField(max_length=254, blank=True)
    collaboration_name = models.CharField(max_length=120, blank=True)
    created_at = models.DateTimeField(auto_now_add=True)
    frozen_at = models.DateTimeField(null=True, blank=True)

    class Meta:
        ordering = ("-created_at", "-pk")
        constraints = (
            models.CheckConstraint(
                condition=models.Q(state="draft", frozen_at=None)
                | models.Q(state="frozen", frozen_at__isnull=False),
                name="frozen_reports_say_when",
            ),
        )

    def __str__(self) -> str:
        return self.title

    def get_absolute_url(self) -> str:
        return reverse("reports:report", args=[self.pk])

    @property
    def is_frozen(self) -> bool:
        """Whether it never changes any more."""
        return self.state == Report.State.FROZEN

    @property
    def author_then(self) -> str:
        """Its author as they were called when it was frozen; in a draft, as they are called."""
        return self.author_name or str(self.author)

    @property
    def collaboration_then(self) -> str:
        """Its collaboration, likewise."""
        return self.collaboration_name or str(self.collaboration)

    def save(self, *args: Any, **kwargs: Any) -> None:
        """Refuse to change what is frozen."""
        _refuse_frozen(self.pk)
        super().save(*args, **kwargs)

    def delete(self, *args: Any, **kwargs: Any) -> tuple[int, dict[str, int]]:
        """Refuse to delete what is frozen."""
        _refuse_frozen(self.pk)
        return super().delete(*args, **kwargs)


class ReportPart(models.Model):
    """One assessment of a report with words on it, or words alone."""

    COLLABORATION_PATH = "report__collaboration"

    report = models.ForeignKey(Report, on_delete=models.CASCADE, related_name="parts")
    order = models.PositiveIntegerField()
    heading = models.CharField(max_length=200, blank=True)
    # Where it is taken from; the snapshot stands alone and outlives it.
    assessment = models.ForeignKey(
        Assessment, on_delete=models.SET_NULL, null=True, blank=True, related_name="report_parts"
    )
    search = models.ForeignKey(
        FeatureSearch, on_delete=models.SET_NULL, null=True, blank=True, related_name="+"
    )
    words = models.TextField(blank=True)
    words_html = models.TextField(blank=True)
    # Names of the curves that are shown, as the result calls them; None: all.
    shown = models.JSONField(null=True, blank=True)
    # Raised with every change of heading, words and what is shown.
    revision = models.PositiveIntegerField(default=0)
    # Once frozen: all that its pages are made from, without what is not shown; and its finding, for the contents.
    snapshot = models.JSONField(null=True, blank=True)
    finding = models.TextField(blank=True)

    class Meta:
        ordering = ("report", "order", "pk")

    def __str__(self) -> str:
        return self.heading or f"part {self.order} of {self.report}"

    def save(self, *args: Any, **kwargs: Any) -> None:
        """Refuse to change or add to what is frozen."""
        _refuse_frozen(self.report_id)
        super().save(*args, **kwargs)

    def delete(self, *args: Any, **kwargs: Any) -> tuple[int, dict[str, int]]:
        """Refuse to take anything out of what is frozen."""
        _refuse_frozen(self.report_id)
        return super().delete(*args, **kwargs)


def _refuse_frozen(report: int | None) -> None:
    if report is not None and Report.objects.filter(pk=report, state=Report.State.FROZEN).exists():
        raise TypeError(IMMUTABLE)


class ShareLink(models.Model):
    """A link that opens a report for whoever holds it. Only the hash of its secret is kept, and of its passphrase."""

    COLLABORATION_PATH = "report__collaboration"

    report = models.ForeignKey(Report, on_delete=models.CASCADE, related_name="links")
    token_sha256 = models.CharField(max_length=64, unique=True)
    label = models.CharField(max_length=80, blank=True)
    # As Django hashes passwords; empty where none is asked for.
    passphrase = models.CharField(max_length=128, blank=True)
    created_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="+")
    created_at = models.DateTimeField(auto_now_add=True)
    expires_at = models.DateTimeField(null=True, blank=True)
    revoked_at = models.DateTimeField(null=True, blank=True)
    # How often its first page was read, by others than signed-in leads of the collaboration.
    opened = models.PositiveIntegerField(default=0)
    last_opened_at = models.DateTimeField(null=True, blank=True)

    class Meta:
        ordering = ("-created_at", "-pk")

    def __str__(self) -> str:
        return self.label or f"link {self.pk}"

    @property
    def is_open(self) -> bool:
        """Whether it still opens the report."""
        expired = self.expires_at is not None and self.expires_at <= timezone.now()
        return self.revoked_at is None and not expired


class PassphraseTry(models.Model):
    """Somebody gave a passphrase for a link. Kept for as long as it counts, and only where it was wrong."""

    COLLABORATION_PATH = "link__report__collaboration"

    link = models.ForeignKey(ShareLink, on_delete=models.CASCADE, related_name="tries")
    at = models.DateTimeField(default=timezone.now)

    def __str__(self) -> str:
        return f"try of {self.link}"


class Paper(models.TextChoices):
    """What a print is made for."""

    A4 = "a4", "A4"
    LETTER = "letter", "US letter"


class Printing(Job):
    """A frozen report as a PDF, made once for each paper."""

    COLLABORATION_PATH = "report__collaboration"
    TASK: ClassVar[str] = "fits.reports.tasks.print_report"
    IS_URGENT: ClassVar[bool] = False

    report = models.ForeignKey(Report, on_delete=models.CASCADE, related_name="printings")
    paper = models.CharField(max_length=6, choices=Paper.choices)
    pdf = models.BinaryField(null=True, blank=True)

    class Meta:
        ordering = ("report", "paper")
        constraints = (models.UniqueConstraint(fields=["report", "paper"], name="printed_once_for_a_paper"),)

    def __str__(self) -> str:
        return f"{self.report} on {self.get_paper_display()}"
