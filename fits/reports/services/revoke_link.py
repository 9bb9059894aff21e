"""Close a link."""

from django.db import transaction
from django.utils import timezone

from core.people.log import Deed
from core.people.models import User
from fits.reports.models import ShareLink
from fits.reports.services.create_link import record_link


@transaction.atomic
def revoke_link(link: ShareLink, *, by: User) -> None:
    """From now on it opens nothing; revoking it again changes nothing."""
    if ShareLink.objects.filter(pk=link.pk, revoked_at=None).update(revoked_at=timezone.now()):
        record_link(Deed.REVOKED_LINK, link, by)
    link.refresh_from_db()
