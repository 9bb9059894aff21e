"""Close a link."""

from django.utils import timezone

from fits.reports.models import ShareLink


def revoke_link(link: ShareLink) -> None:
    """From now on it opens nothing; revoking it again changes nothing."""
    ShareLink.objects.filter(pk=link.pk, revoked_at=None).update(revoked_at=timezone.now())
    link.refresh_from_db()
