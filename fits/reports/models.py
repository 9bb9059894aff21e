"""Reports and the links that open them."""

from django.db import models
from django.urls import reverse
from django.utils import timezone

from core.people.models import Collaboration, User
from fits.assessments.models import Assessment


class Report(models.Model):
    """A frozen snapshot of an assessment, with words of the author's."""

    COLLABORATION_PATH = "collaboration"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="reports")
    # Where it was taken from; the snapshot stands alone and outlives it.
    assessment = models.ForeignKey(
        Assessment, on_delete=models.SET_NULL, null=True, blank=True, related_name="reports"
    )
    title = models.CharField(max_length=200)
    words = models.TextField(blank=True)
    snapshot = models.JSONField()
    author = models.ForeignKey(User, on_delete=models.PROTECT, related_name="reports")
    created_at = models.DateTimeField(auto_now_add=True)

    class Meta:
        ordering = ("-created_at", "-pk")

    def __str__(self) -> str:
        return self.title

    def get_absolute_url(self) -> str:
        return reverse("reports:report", args=[self.pk])


class ShareLink(models.Model):
    """A link that opens a report for whoever holds it. Only the hash of its secret is kept."""

    COLLABORATION_PATH = "report__collaboration"

    report = models.ForeignKey(Report, on_delete=models.CASCADE, related_name="links")
    token_sha256 = models.CharField(max_length=64, unique=True)
    label = models.CharField(max_length=80, blank=True)
    created_by = models.ForeignKey(User, on_delete=models.PROTECT, related_name="+")
    created_at = models.DateTimeField(auto_now_add=True)
    expires_at = models.DateTimeField(null=True, blank=True)
    revoked_at = models.DateTimeField(null=True, blank=True)

    class Meta:
        ordering = ("-created_at", "-pk")

    def __str__(self) -> str:
        return self.label or f"link {self.pk}"

    @property
    def is_open(self) -> bool:
        """Whether it still opens the report."""
        expired = self.expires_at is not None and self.expires_at <= timezone.now()
        return self.revoked_at is None and not expired
