"""What workers do for talk."""

from django.utils import timezone

from core import alive
from core.worker import app
from fits.talk.sending import send_due


@app.task(name="fits.talk.tasks.send_digests")  # type: ignore[untyped-decorator]
def send_digests() -> None:
    """Send the digests that are due. Two that run at once send each of them once."""
    send_due(timezone.now())
    alive.touch()
