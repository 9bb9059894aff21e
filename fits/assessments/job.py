"""Work for a worker as a row: what assessments and the parts of a search for features have in common."""

from typing import Any, ClassVar

from django.db import models


class Job(models.Model):
    """One computation that lives from queue to end. Who computes it is settled in leases.py."""

    class Status(models.TextChoices):
        QUEUED = "queued", "queued"
        RUNNING = "running", "running"
        DONE = "done", "done"
        FAILED = "failed", "failed"
        CANCELLED = "cancelled", "cancelled"

    LIVING = (Status.QUEUED, Status.RUNNING)
    ENDED = (Status.DONE, Status.FAILED, Status.CANCELLED)
    # The name of the task that computes a job of this kind, and whether somebody waits for it: the others never keep
    # those waiting in the queue.
    TASK: ClassVar[str]
    IS_URGENT: ClassVar[bool] = True
    # What else is written when a job of this kind ends, however it ends.
    AT_THE_END: ClassVar[dict[str, Any]] = {}

    created_at = models.DateTimeField(auto_now_add=True)
    status = models.CharField(max_length=10, choices=Status.choices, default=Status.QUEUED)
    attempt = models.PositiveSmallIntegerField(default=0)
    heartbeat_at = models.DateTimeField(null=True, blank=True)
    cancel_requested = models.BooleanField(default=False)
    started_at = models.DateTimeField(null=True, blank=True)
    ended_at = models.DateTimeField(null=True, blank=True)
    # Why it failed: a stable code and a sentence; for a fault of ours the sentence holds its id in the log.
    failure_code = models.CharField(max_length=60, blank=True)
    failure = models.TextField(blank=True)

    class Meta:
        abstract = True

    @property
    def has_ended(self) -> bool:
        """Whether nothing more will happen to it."""
        return self.status in self.ENDED
