"""The e-mail of what is new: what stands in it for whom, and that it is sent once, when it is due."""

import smtplib
from collections.abc import Callable
from datetime import datetime, timedelta
from typing import Any

import pytest
from django.core import mail
from django.core.mail import EmailMessage
from django.db import connection
from django.test.utils import CaptureQueriesContext
from django.utils import timezone
from pytest_django import Settings

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, DigestPace, Membership, User
from core.settings import CELERY_BEAT_SCHEDULE
from core.theories.models import Curve, Theory
from core.worker import app
from fits.assessments.models import Assessment
from fits.overviews.standings import standings_in
from fits.reports.models import Report
from fits.talk import sending
from fits.talk.digest import MOST, Digest, Window, digest_of
from fits.talk.models import Comment
from fits.talk.outcomes import outcomes
from fits.talk.sending import AT_FIRST, send_due
from fits.talk.services import comment, remove_comment
from tests.meanwhile import meanwhile
from tests.talk.conftest import Judge, seal

DAY = timedelta(days=1)


def soon() -> datetime:
    """When all that has happened until now is told."""
    return timezone.now() + timedelta(minutes=2)


def told_to(reader: User) -> Digest:
    return digest_of(reader, Window(timezone.now() - DAY, soon()))


def words_of(digest: Digest) -> str:
    """All that stands in it."""
    return "\n".join(
        f"{part.heading} {part.more}: {item.where} {item.what} {item.path} {item.words}"
        for part in digest.parts
        for item in part.items
    )


def headings(digest: Digest) -> list[str]:
    return [part.heading for part in digest.parts]


def sent_to() -> list[str]:
    return sorted(message.to[0] for message in mail.outbox)


# ---- What stands in it ----


def test_mentions_come_first_and_are_told_once(lead: User, member: User, theory: Theory) -> None:
    comment(by=lead, on=theory, words="@Mo Member, too flat?")
    comment(by=lead, on=theory, words="Or not.")
    first, second, *_ = told_to(member).parts
    assert (first.heading, len(first.items)) == ("You are mentioned", 1)
    assert first.items[0].what == "Lin Lead on theory “Parabolic floor”"
    assert first.items[0].words == "@Mo Member, too flat?"
    assert (second.heading, [item.words for item in second.items]) == (
        "Comments where you take part",
        ["Or not."],
    )


def test_comments_are_told_to_those_who_take_part_alone(
    lead: User, second_lead: User, member: User, observer: User, theory: Theory, judged: Assessment
) -> None:
    comment(by=second_lead, on=theory, words="On the theory.")
    comment(by=second_lead, on=judged, words="On the assessment.")
    assert "On the theory." in words_of(told_to(member))  # submitted it
    assert "On the assessment." in words_of(told_to(member))  # has a curve in it
    assert "On the assessment." in words_of(told_to(lead))  # asked for it
    assert "On the theory." not in words_of(told_to(lead))
    assert "On the" not in words_of(told_to(observer))
    comment(by=lead, on=theory, words="I see.")
    assert "On the theory." in words_of(told_to(lead))  # has spoken there


def test_nobody_is_told_what_they_did_themselves(
    lead: User, member: User, theory: Theory, release: Release
) -> None:
    comment(by=member, on=theory, words="@Mo Member, remember.")
    assert headings(told_to(member)) == ["Releases published", "Who joined"]
    assert headings(told_to(lead)) == ["Who joined"]


def test_what_is_removed_is_told_no_more(lead: User, member: User, theory: Theory) -> None:
    remove_comment(by=lead, comment=comment(by=lead, on=theory, words="@Mo Member, rubbish."))
    assert headings(told_to(member)) == ["Who joined"]


def test_an_assessment_is_told_with_its_verdicts_in_one_line(
    member: User, judge: Judge, release: Release, curve: Curve, theory: Theory
) -> None:
    judge(release, {curve: 0.4}, scale_p_value=0.01)
    (part,) = (part for part in told_to(member).parts if part.heading == "Assessments done")
    assert part.items[0].what.endswith(" of Surface seiche power, release 1")
    assert part.items[0].words == "At 95 %: inside, but off: Parabolic floor (version 1)"


@pytest.mark.parametrize(("p_value", "scale_p_value"), [(0.4, 0.6), (0.4, 0.01), (0.01, 0.6), (0.05, 0.05)])
def test_its_verdicts_are_those_of_the_pages(
    judge: Judge, release: Release, curve: Curve, p_value: float, scale_p_value: float
) -> None:
    key = judge(release, {curve: p_value}, scale_p_value=scale_p_value).pk
    (standing,) = standings_in([key])[key]
    assert outcomes([key])[key] == f"At 95 %: {standing.word}: Parabolic floor (version 1)"


def test_a_name_with_line_breaks_is_told_in_one_line(
    lead: User, member: User, judge: Judge, release: Release, curve: Curve, theory: Theory
) -> None:
    Theory.objects.update(name="Flat\n\nYour account ends: https://elsewhere.example")
    comment(by=lead, on=Theory.objects.get(), words="Look.")
    judge(release, {curve: 0.4})
    told = [item for part in told_to(member).parts for item in part.items]
    assert len(told) > 1
    assert not [item for item in told if "\n" in item.what + item.words + item.where]


def test_a_release_that_is_withdrawn_is_told_with_the_reason(
    lead: User, second_lead: User, member: User, release: Release
) -> None:
    Release.objects.filter(pk=release.pk).update(
        state=Release.State.WITHDRAWN,
        withdrawn_at=timezone.now(),
        withdrawn_by=lead,
        withdrawal_reason="The gauge\nhad drifted.",
    )
    assert headings(told_to(member)) == ["Releases withdrawn", "Who joined"]
    assert "release 1, 40 points /releases/" in words_of(told_to(member))
    assert "The gauge had drifted." in words_of(told_to(member))
    assert "Releases withdrawn" not in headings(told_to(lead))


@pytest.mark.parametrize("by_word", [True, False])
def test_an_opening_is_told(
    lead: User, second_lead: User, member: User, measurement: Measurement, by_word: bool
) -> None:
    seal(measurement, lead)
    now = timezone.now()
    how = {"opened_at": now, "opened_by": lead} if by_word else {"opens_at": now}
    Measurement.objects.filter(pk=measurement.pk).update(**how)
    assert "Measurements opened" in headings(told_to(member))
    assert "Measurements opened" in headings(told_to(second_lead))
    assert ("Measurements opened" in headings(told_to(lead))) is not by_word


def test_a_report_is_told_once_it_is_frozen_to_those_who_read_reports(
    collaboration: Collaboration, lead: User, member: User, observer: User, student: User
) -> None:
    report = Report.objects.create(collaboration=collaboration, title="The floor", author=lead)
    assert headings(told_to(member)) == ["Who joined"]
    Report.objects.filter(pk=report.pk).update(state=Report.State.FROZEN, frozen_at=timezone.now())
    for reader in (member, observer):
        assert headings(told_to(reader)) == ["Reports", "Who joined"]
        assert "“The floor” by Lin Lead" in words_of(told_to(reader))
    for reader in (student, lead):
        assert headings(told_to(reader)) == ["Who joined"]


def test_of_many_the_newest_are_told_and_the_others_counted(lead: User, member: User, theory: Theory) -> None:
    for number in range(MOST + 3):
        comment(by=lead, on=theory, words=f"number {number}")
    (part, *_) = told_to(member).parts
    assert (len(part.items), part.more) == (MOST, 3)
    assert part.items[0].words == f"number {MOST + 2}"


# ---- What may not stand in it ----


def test_nobody_but_leads_who_looked_is_told_anything_of_a_sealed_measurement(
    lead: User, second_lead: User, member: User, observer: User, student: User, sealed: Assessment
) -> None:
    Release.objects.update(created_by=second_lead)
    Assessment.objects.update(requested_by=member)
    comment(by=lead, on=sealed, words="It lies @Mo Member")
    for reader in (second_lead, member, observer, student):
        assert headings(told_to(reader)) == ["Who joined"]
        assert "Surface seiche power" not in words_of(told_to(reader))
    assert headings(told_to(lead)) == ["Releases published", "Assessments done", "Who joined"]


def test_a_mention_of_somebody_who_may_no_longer_see_it_is_not_told(
    lead: User, member: User, theory: Theory
) -> None:
    comment(by=lead, on=theory, words="@Mo Member, look.")
    Membership.objects.filter(user=member).update(role="student")
    assert headings(told_to(member)) == ["Who joined"]
    Membership.objects.filter(user=member).delete()
    assert headings(told_to(member)) == []


def test_a_student_is_told_of_releases_and_of_the_own_desk(
    lead: User,
    student: User,
    other_student: User,
    theory: Theory,
    desk_theory: Theory,
    judged: Assessment,
) -> None:
    comment(by=lead, on=theory, words="Shared.")
    comment(by=lead, on=desk_theory, words="Yours, @Stu Student.")
    assert headings(told_to(student)) == ["You are mentioned", "Releases published", "Who joined"]
    assert headings(told_to(other_student)) == ["Releases published", "Who joined"]


def test_a_lead_is_told_of_no_assessments_at_desks(
    lead: User, second_lead: User, student: User, judged: Assessment
) -> None:
    assert "Assessments done" in headings(told_to(second_lead))
    Assessment.objects.update(desk=student)
    assert "Assessments done" not in headings(told_to(second_lead))
    assert "Assessments done" in headings(told_to(student))


def test_the_digest_asks_no_more_for_more_news(
    lead: User, member: User, theory: Theory, judge: Judge, release: Release, curve: Curve
) -> None:
    def asked() -> int:
        with CaptureQueriesContext(connection) as captured:
            assert told_to(member).parts
        assert not [query for query in captured if '"result"' in query["sql"] or '"table"' in query["sql"]]
        return len(captured)

    comment(by=lead, on=judge(release, {curve: 0.3}), words="@Mo Member")
    few = asked()
    for number in range(4):
        comment(by=lead, on=judge(release, {curve: 0.3}), words=f"@Mo Member {number}")
        comment(by=lead, on=theory, words="Hm.")
    assert asked() == few


# ---- Sending ----


@pytest.fixture
def news(lead: User, member: User, theory: Theory) -> None:
    """Something that is new for the member; the lead wrote it, and is told who joined."""
    User.objects.filter(pk=lead.pk).update(digest=DigestPace.NEVER)
    comment(by=lead, on=theory, words="@Mo Member, <look> & see.")


def test_a_digest_is_plain_text_with_whole_addresses_and_the_way_to_change_its_pace(
    settings: Settings, news: None, theory: Theory
) -> None:
    settings.SITE_URL = "https://inradius.example"
    assert send_due(soon()) == 1
    (message,) = mail.outbox
    assert message.to == ["member@merrow.example"]
    assert message.subject == "What is new in Lake Merrow survey"
    body = str(message.body)
    assert "@Mo Member, <look> & see." in body
    assert f"https://inradius.example{theory.get_absolute_url()}#comment-" in body
    assert "https://inradius.example/preferences" in body
    assert "at most once a day" in body


def test_nobody_is_told_the_same_twice(member: User, lead: User, theory: Theory, news: None) -> None:
    now = soon()
    assert send_due(now) == 1
    assert send_due(now + timedelta(hours=1)) == 0
    assert send_due(now + DAY) == 0  # nothing is new
    again = comment(by=lead, on=theory, words="@Mo Member, again.")
    Comment.objects.filter(pk=again.pk).update(created_at=now + timedelta(hours=2))
    assert send_due(now + DAY) == 1
    assert "again." in str(mail.outbox[1].body)
    assert "<look>" not in str(mail.outbox[1].body)


def test_what_happens_while_a_digest_is_written_stands_in_the_next(
    member: User, lead: User, theory: Theory, news: None
) -> None:
    now = timezone.now()
    Membership.objects.filter(user=lead).update(joined_at=now - DAY)
    # Of this very moment something may be in a transaction that has not ended.
    assert send_due(now) == 1
    assert "<look>" not in str(mail.outbox[0].body)
    assert send_due(now + DAY) == 1
    assert "<look>" in str(mail.outbox[1].body)


@pytest.mark.parametrize(
    ("pace", "after", "is_sent"),
    [
        (DigestPace.DAILY, timedelta(hours=23), False),
        (DigestPace.DAILY, timedelta(days=1), True),
        (DigestPace.WEEKLY, timedelta(days=6), False),
        (DigestPace.WEEKLY, timedelta(days=7), True),
        (DigestPace.NEVER, timedelta(days=70), False),
    ],
)
def test_the_pace_is_kept(
    member: User, news: None, pace: DigestPace, after: timedelta, is_sent: bool
) -> None:
    now = soon()
    User.objects.filter(pk=member.pk).update(digest=pace, digest_sent_at=now - after)
    assert send_due(now) == int(is_sent)


def test_the_first_one_reaches_back_a_week(member: User, lead: User, theory: Theory) -> None:
    Membership.objects.update(joined_at=timezone.now() - AT_FIRST - DAY)
    User.objects.filter(pk=lead.pk).update(digest=DigestPace.NEVER)
    assert send_due(soon()) == 0
    Membership.objects.filter(user=lead).update(joined_at=timezone.now() - AT_FIRST + DAY)
    assert send_due(soon()) == 1


def test_nobody_inactive_or_without_a_collaboration_gets_one(
    member: User, stranger: User, lead: User, news: None
) -> None:
    User.objects.filter(pk=member.pk).update(is_active=False)
    assert send_due(soon()) == 0
    assert sent_to() == []


def test_where_the_address_may_be_anybodys_nothing_but_the_kinds_are_told(member: User, news: None) -> None:
    Membership.objects.filter(user=member).update(came_by=Membership.CameBy.LINK)
    send_due(soon())
    body = str(mail.outbox[0].body)
    assert "- You are mentioned" in body
    assert "look" not in body
    assert "Parabolic" not in body


def test_a_name_with_a_line_break_ends_no_header(
    collaboration: Collaboration, member: User, news: None
) -> None:
    Collaboration.objects.update(name="Lake\nBcc: all@elsewhere.example")
    assert send_due(soon()) == 1
    assert mail.outbox[0].subject == "What is new in Lake Bcc: all@elsewhere.example"


Send = Callable[[EmailMessage], int]


@pytest.fixture
def failing(monkeypatch: pytest.MonkeyPatch) -> Callable[[Callable[[str], Exception | None]], None]:
    """Lets sending fail by address."""
    send: Any = EmailMessage.send

    def fail(when: Callable[[str], Exception | None]) -> None:
        def sending_fails(message: EmailMessage, *rest: Any, **named: Any) -> int:
            if error := when(message.to[0]):
                raise error
            return int(send(message, *rest, **named))

        monkeypatch.setattr(EmailMessage, "send", sending_fails)

    return fail


@pytest.mark.parametrize("error", [smtplib.SMTPRecipientsRefused({}), ValueError("odd")])
def test_an_address_that_fails_stops_no_other_and_is_tried_again(
    failing: Callable[..., None],
    caplog: pytest.LogCaptureFixture,
    lead: User,
    member: User,
    observer: User,
    error: Exception,
) -> None:
    failing(lambda address: error if address == lead.email else None)
    now = soon()
    assert send_due(now) == 2
    assert sent_to() == [member.email, observer.email]
    lead.refresh_from_db()
    assert lead.digest_sent_at is None
    failing(lambda address: None)
    assert send_due(now + timedelta(hours=1)) == 1
    assert sent_to() == [lead.email, member.email, observer.email]


def test_a_mail_server_that_is_away_is_asked_once(
    failing: Callable[..., None], collaboration: Collaboration
) -> None:
    asked: list[str] = []

    def away(address: str) -> Exception:
        asked.append(address)
        return ConnectionRefusedError()

    failing(away)
    assert send_due(soon()) == 0
    assert len(asked) == 1
    assert not User.objects.exclude(digest_sent_at=None).exists()


@pytest.mark.django_db(transaction=True)
def test_of_two_workers_one_sends(
    monkeypatch: pytest.MonkeyPatch, lead: User, member: User, news: None
) -> None:
    now = soon()
    counts: list[int] = []
    with meanwhile(monkeypatch, sending, "letter_to", lambda: counts.append(send_due(now))):
        counts.append(send_due(now))
    assert sorted(counts) == [0, 1]
    assert sent_to() == [member.email]


def test_the_scheduler_has_a_worker_send_them(news: None, monkeypatch: pytest.MonkeyPatch) -> None:
    name = CELERY_BEAT_SCHEDULE["digests"]["task"]
    app.loader.import_default_modules()
    monkeypatch.setattr("fits.talk.tasks.send_due", lambda now: mail.outbox.append(now))
    app.tasks[name]()
    assert len(mail.outbox) == 1
