"""Comments on theories and assessments, and whom they mention."""

from django.db import models

from core.measurements.models import Measurement
from core.people.models import Collaboration, User
from core.theories.models import Theory
from fits.assessments.models import Assessment


class Comment(models.Model):
    """Plain words of somebody on a theory or on an assessment. Desk and seal are those of what it is on."""

    COLLABORATION_PATH = "collaboration"
    DESK_PATH = "desk"
    SEAL_PATH = "measurement"

    collaboration = models.ForeignKey(Collaboration, on_delete=models.CASCADE, related_name="comments")
    theory = models.ForeignKey(
        Theory, on_delete=models.CASCADE, null=True, blank=True, related_name="comments"
    )
    assessment = models.ForeignKey(
        Assessment, on_delete=models.CASCADE, null=True, blank=True, related_name="comments"
    )
    # That of the assessment; None on a theory, whose comments tell nothing of data.
    measurement = models.ForeignKey(
        Measurement, on_delete=models.CASCADE, null=True, blank=True, related_name="+"
    )
    desk = models.ForeignKey(User, on_delete=models.PROTECT, null=True, blank=True, related_name="+")
    author = models.ForeignKey(User, on_delete=models.PROTECT, related_name="comments")
    words = models.TextField(max_length=4000)
    created_at = models.DateTimeField(auto_now_add=True)
    # Taken back: that there was one stays, its words do not.
    removed_at = models.DateTimeField(null=True, blank=True)
    removed_by = models.ForeignKey(User, on_delete=models.PROTECT, null=True, blank=True, related_name="+")

    class Meta:
        ordering = ("created_at", "pk")
        constraints = (
            models.CheckConstraint(
                condition=models.Q(theory__isnull=False, assessment=None, measurement=None)
                | models.Q(theory=None, assessment__isnull=False, measurement__isnull=False),
                name="comments_are_on_one_thing",
            ),
        )

    def __str__(self) -> str:
        return f"comment by {self.author}"


class Mention(models.Model):
    """Somebody is named in a comment that they may see."""

    comment = models.ForeignKey(Comment, on_delete=models.CASCADE, related_name="mentions")
    user = models.ForeignKey(User, on_delete=models.CASCADE, related_name="mentions")

    class Meta:
        ordering = ("comment", "pk")
        constraints = (models.UniqueConstraint(fields=["comment", "user"], name="mentioned_once"),)

    def __str__(self) -> str:
        return f"{self.user} in {self.comment}"
