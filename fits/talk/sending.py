"""Sends the digests that are due."""

import smtplib
from dataclasses import dataclass
from datetime import datetime, timedelta

from django.conf import settings
from django.core.mail import EmailMessage
from django.db.models import Q, QuerySet
from django.template.loader import render_to_string
from django.urls import reverse

from core.errors import record_fault
from core.people.models import DigestPace, Membership, User
from fits.talk.digest import Digest, Window, digest_of

EVERY = {DigestPace.DAILY: timedelta(days=1), DigestPace.WEEKLY: timedelta(days=7)}
# What happened at this moment may not be written yet: it is left to the next digest, so that none misses it.
SETTLED_AFTER = timedelta(minutes=1)
AT_FIRST = timedelta(days=7)


@dataclass(frozen=True)
class Letter:
    """An e-mail of what is new."""

    subject: str
    text: str


def send_due(now: datetime) -> int:
    """Send a digest to everyone whose pace lets them have one and for whom something is new; how many were sent.

    One that cannot be sent is tried again the next time, and keeps nobody else from theirs.
    """
    sent = 0
    for pk in _due(now).values_list("pk", flat=True):
        try:
            sent += _send(pk, now)
        except smtplib.SMTPException as error:
            record_fault(error, f"sending a digest to user {pk}")
        except OSError as error:
            # The mail server is away, and would keep this worker waiting for each of the others too.
            record_fault(error, "sending digests")
            break
        except Exception as error:
            record_fault(error, f"sending a digest to user {pk}")
    return sent


def letter_to(reader: User, digest: Digest, since: datetime) -> Letter:
    """The digest as an e-mail."""
    places = digest.places
    where = places[0] if len(places) == 1 else f"{len(places)} collaborations"
    context = {
        "reader": reader,
        "digest": digest,
        "since": since,
        "site": settings.SITE_URL,
        "preferences": f"{settings.SITE_URL}{reverse('people:preferences')}",
        "home": f"{settings.SITE_URL}{reverse('overviews:home')}",
        "is_proven": _is_proven(reader),
        "pace": DigestPace(reader.digest).label,
    }
    # A name with a line break in it would end the subject.
    subject = " ".join(f"What is new in {where}".split())
    return Letter(subject, render_to_string("talk/digest.txt", context))


def _due(now: datetime) -> QuerySet[User]:
    rested = Q(digest_sent_at=None)
    for pace, pause in EVERY.items():
        rested |= Q(digest=pace, digest_sent_at__lte=now - pause)
    members = Membership.objects.values("user")
    return User.objects.filter(rested, digest__in=list(EVERY), is_active=True, pk__in=members)


def _send(pk: int, now: datetime) -> bool:
    """Send it if something is new, unless another worker does. The claim comes first: nobody gets it twice."""
    reader = _due(now).filter(pk=pk).first()
    if reader is None:
        return False
    last = reader.digest_sent_at
    window = Window((last or now - AT_FIRST) - SETTLED_AFTER, now - SETTLED_AFTER)
    digest = digest_of(reader, window)
    if not digest.parts:
        return False
    letter = letter_to(reader, digest, window.since)
    if not User.objects.filter(pk=pk, digest_sent_at=last).update(digest_sent_at=now):
        return False
    message = EmailMessage(
        letter.subject, letter.text, to=[reader.email], headers={"Auto-Submitted": "auto-generated"}
    )
    try:
        message.send()
    except BaseException:
        User.objects.filter(pk=pk, digest_sent_at=now).update(digest_sent_at=last)
        raise
    return True


def _is_proven(reader: User) -> bool:
    """Whether the address is known to be the reader's. Who joined by a link alone may have typed somebody else's."""
    return Membership.objects.filter(user=reader).exclude(came_by=Membership.CameBy.LINK).exists()
