"""Comments: who writes, sees and removes them, and whom they mention."""

import re

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from core.errors import UserError
from core.measurements.models import Release
from core.people.models import Collaboration, LogEntry, Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment
from fits.talk import services
from fits.talk.models import Comment, Mention
from fits.talk.services import comment, remove_comment
from fits.talk.services import remove as remove_module
from fits.talk.words import MOST_LETTERS
from tests.browser.survey import assessment_of, computed
from tests.meanwhile import meanwhile
from tests.talk.conftest import SignedIn


def on_theory(theory: Theory) -> str:
    return reverse("talk:comment_theory", args=[theory.pk])


def removal(of: Comment) -> str:
    return reverse("talk:remove", args=[of.pk])


def page_of(signed_in: SignedIn, user: User, target: Theory | Assessment) -> str:
    return signed_in(user).get(target.get_absolute_url()).content.decode()


# ---- Writing ----


def test_a_member_comments_and_is_led_to_the_comment(
    signed_in: SignedIn, member: User, theory: Theory
) -> None:
    answer = signed_in(member).post(on_theory(theory), {"words": " Too flat\r\nat the end. "})
    made = Comment.objects.get()
    assert answer.headers["Location"] == f"{theory.get_absolute_url()}#comment-{made.pk}"
    assert (made.words, made.author, made.theory) == ("Too flat\nat the end.", member, theory)
    page = page_of(signed_in, member, theory)
    assert "Too flat<br>at the end." in page
    assert page.count('id="comments"') == 1


def test_a_comment_on_an_assessment_stands_on_its_page(
    signed_in: SignedIn, member: User, release: Release, curve: Curve
) -> None:
    done = computed(assessment_of(release, [curve], member, "a"))
    address = reverse("talk:comment_assessment", args=[done.pk])
    assert signed_in(member).post(address, {"words": "The third rise?"}).status_code == 302
    made = Comment.objects.get()
    assert made.measurement == release.measurement
    assert made.collaboration == release.measurement.collaboration
    page = page_of(signed_in, member, done)
    assert "The third rise?" in page
    assert address in page


def test_a_student_comments_at_the_own_desk_alone(
    signed_in: SignedIn, student: User, other_student: User, theory: Theory, desk_theory: Theory
) -> None:
    assert signed_in(student).post(on_theory(desk_theory), {"words": "Mine."}).status_code == 302
    assert Comment.objects.get().desk == student
    assert signed_in(student).post(on_theory(theory), {"words": "Yours."}).status_code == 404
    assert signed_in(other_student).post(on_theory(desk_theory), {"words": "Hm."}).status_code == 404


def test_an_observer_reads_comments_and_has_no_form(
    signed_in: SignedIn, member: User, observer: User, theory: Theory
) -> None:
    comment(by=member, on=theory, words="Too flat.")
    page = page_of(signed_in, observer, theory)
    assert "Too flat." in page
    assert on_theory(theory) not in page
    assert signed_in(observer).post(on_theory(theory), {"words": "x"}).status_code == 403


def test_a_stranger_gets_404(signed_in: SignedIn, stranger: User, theory: Theory, judged: Assessment) -> None:
    for address in (on_theory(theory), reverse("talk:comment_assessment", args=[judged.pk])):
        assert signed_in(stranger).post(address, {"words": "x"}).status_code == 404


@pytest.mark.parametrize("words", ["", " \n ", "x" * (MOST_LETTERS + 1)])
def test_a_comment_that_is_refused_stands_in_the_form_again(
    signed_in: SignedIn, member: User, theory: Theory, words: str
) -> None:
    answer = signed_in(member).post(on_theory(theory), {"words": words})
    assert answer.status_code == 400
    assert words.strip() in answer.content.decode()
    assert not Comment.objects.exists()


@pytest.mark.parametrize(("words", "code"), [("\r\n", "no-words"), ("x" * 4001, "too-long")])
def test_the_service_itself_refuses_no_words_and_too_many(
    member: User, theory: Theory, words: str, code: str
) -> None:
    with pytest.raises(UserError) as refused:
        comment(by=member, on=theory, words=words)
    assert refused.value.code == code


def test_an_assessment_without_a_result_takes_no_comment(member: User, judged: Assessment) -> None:
    Assessment.objects.filter(pk=judged.pk).update(status="running")
    with pytest.raises(UserError) as refused:
        comment(by=member, on=judged, words="Soon.")
    assert refused.value.code == "assessment-not-done"


def test_desk_and_seal_are_those_of_this_moment_not_of_what_the_page_held(
    lead: User, student: User, theory: Theory
) -> None:
    held = Theory.objects.get(pk=theory.pk)
    Theory.objects.filter(pk=theory.pk).update(desk=student)
    assert comment(by=lead, on=held, words="Whose?").desk == student


def test_hostile_words_are_shown_as_words(signed_in: SignedIn, member: User, theory: Theory) -> None:
    comment(by=member, on=theory, words='<script>alert(1)</script> https://x.example/"><img src=x>')
    page = page_of(signed_in, member, theory)
    assert "&lt;script&gt;alert(1)&lt;/script&gt;" in page
    assert "<img src=x" not in page
    assert '<a href="https://x.example/" rel="noreferrer noopener nofollow">' in page


# ---- Mentions ----


def test_who_may_see_it_can_be_mentioned_by_name_or_by_the_beginning_of_the_address(
    lead: User, member: User, observer: User, theory: Theory
) -> None:
    comment(by=lead, on=theory, words="@Mo Member and @obi, look")
    assert set(Mention.objects.values_list("user", flat=True)) == {member.pk, observer.pk}


def test_nobody_is_mentioned_who_may_not_see_it_and_nothing_tells_that_they_are_here(
    signed_in: SignedIn, member: User, student: User, stranger: User, theory: Theory
) -> None:
    comment(by=member, on=theory, words="@Stu Student @Sal Stranger @Nobody There")
    assert not Mention.objects.exists()
    page = page_of(signed_in, member, theory)
    assert "@Stu Student @Sal Stranger @Nobody There" in page
    assert "<li>@Stu Student</li>" not in page
    assert "<li>@Lin Lead</li>" in page


def test_at_a_desk_the_leads_and_the_student_can_be_mentioned(
    signed_in: SignedIn, student: User, lead: User, member: User, desk_theory: Theory
) -> None:
    comment(by=student, on=desk_theory, words="@Lin Lead @Mo Member")
    assert [mention.user for mention in Mention.objects.all()] == [lead]
    page = page_of(signed_in, student, desk_theory)
    assert "<strong>@Lin Lead</strong> @Mo Member" in page
    assert "<li>@Mo Member</li>" not in page


def test_the_home_page_tells_whom_a_comment_mentions_and_nobody_else(
    signed_in: SignedIn, lead: User, member: User, observer: User, theory: Theory, sealed: Assessment
) -> None:
    made = comment(by=lead, on=theory, words="@Mo Member, @Obi Observer")
    address = f"{theory.get_absolute_url()}#comment-{made.pk}"
    home = reverse("overviews:home")
    assert address in signed_in(member).get(home).content.decode()
    assert "by Lin Lead" in signed_in(member).get(home).content.decode()
    assert "You are mentioned" not in signed_in(lead).get(home).content.decode()
    # A role that no longer sees it is told no longer.
    Membership.objects.filter(user=observer).update(role=Role.STUDENT)
    assert "You are mentioned" not in signed_in(observer).get(home).content.decode()
    remove_comment(by=lead, comment=made)
    assert "You are mentioned" not in signed_in(member).get(home).content.decode()


# ---- Removing ----


@pytest.fixture
def said(member: User, lead: User, theory: Theory) -> Comment:
    return comment(by=member, on=theory, words="Rubbish, @Lin Lead.")


def test_its_author_removes_a_comment_and_its_place_stays(
    signed_in: SignedIn, member: User, said: Comment, theory: Theory
) -> None:
    assert signed_in(member).post(removal(said)).status_code == 302
    said.refresh_from_db()
    assert (said.words, said.removed_by) == ("", member)
    assert not Mention.objects.exists()
    page = page_of(signed_in, member, theory)
    assert "Rubbish" not in page
    assert re.search(r"Removed by Mo Member on <time", page)


def test_a_lead_removes_what_others_wrote(signed_in: SignedIn, lead: User, said: Comment) -> None:
    assert signed_in(lead).post(removal(said)).status_code == 302
    said.refresh_from_db()
    assert said.removed_by == lead


def test_nobody_else_removes_it(
    signed_in: SignedIn,
    collaboration: Collaboration,
    said: Comment,
    student: User,
    observer: User,
    stranger: User,
) -> None:
    other = User.objects.create_user("other@merrow.example")
    Membership.objects.create(user=other, collaboration=collaboration, role=Role.MEMBER)
    for user, status in ((other, 403), (observer, 403), (student, 404), (stranger, 404)):
        assert signed_in(user).post(removal(said)).status_code == status
    said.refresh_from_db()
    assert said.removed_at is None


def test_the_button_is_shown_to_the_author_and_to_leads(
    signed_in: SignedIn, lead: User, member: User, observer: User, said: Comment, theory: Theory
) -> None:
    assert removal(said) in page_of(signed_in, lead, theory)
    assert removal(said) in page_of(signed_in, member, theory)
    assert removal(said) not in page_of(signed_in, observer, theory)
    remove_comment(by=lead, comment=said)
    assert removal(said) not in page_of(signed_in, lead, theory)


def test_who_removes_it_again_is_told(signed_in: SignedIn, lead: User, member: User, said: Comment) -> None:
    stale = Comment.objects.get(pk=said.pk)
    remove_comment(by=member, comment=said)
    with pytest.raises(UserError) as refused:
        remove_comment(by=lead, comment=stale)
    assert refused.value.code == "already-removed"
    answer = signed_in(lead).post(removal(said), follow=True)
    assert "has removed this comment already" in answer.content.decode()


@pytest.mark.django_db(transaction=True)
def test_of_two_who_remove_it_at_once_one_is_told(
    monkeypatch: pytest.MonkeyPatch, lead: User, member: User, said: Comment
) -> None:
    refused: list[str] = []
    with meanwhile(
        monkeypatch, remove_module, "role_of", lambda: services.remove_comment(by=member, comment=said)
    ) as others:
        try:
            services.remove_comment(by=lead, comment=Comment.objects.get(pk=said.pk))
        except UserError as error:
            refused.append(error.code)
    assert [*refused, *others] == ["already-removed"]
    assert LogEntry.objects.filter(deed="removed_comment").count() == 1


# ---- Log, seal, queries ----


def test_the_log_tells_of_both_without_the_words(member: User, lead: User, theory: Theory) -> None:
    said = comment(by=member, on=theory, words="Rubbish.")
    remove_comment(by=lead, comment=said)
    removed, made = LogEntry.objects.all()
    assert (made.deed, made.who, made.about) == ("commented", member, "theory “Parabolic floor”")
    assert (removed.deed, removed.who, removed.detail) == (
        "removed_comment",
        lead,
        {"written by": "Mo Member"},
    )
    assert made.url == f"{theory.get_absolute_url()}#comment-{said.pk}"


def test_the_log_of_a_desk_and_of_a_sealed_measurement_is_as_hidden_as_they_are(
    lead: User, student: User, desk_theory: Theory, sealed: Assessment
) -> None:
    comment(by=student, on=desk_theory, words="Mine.")
    remove_comment(by=lead, comment=comment(by=lead, on=sealed, words="Early."))
    removed, early, mine = LogEntry.objects.all()
    assert (mine.desk, mine.hidden_with) == (student, None)
    measurement = sealed.release.measurement
    assert (early.hidden_with, removed.hidden_with) == (measurement, measurement)


def test_comments_on_what_is_sealed_are_seen_by_leads_who_looked_alone(
    signed_in: SignedIn, lead: User, second_lead: User, member: User, observer: User, sealed: Assessment
) -> None:
    early = comment(by=lead, on=sealed, words="Early. @Mo Member @Leo Secondlead @Lin Lead")
    assert [mention.user for mention in Mention.objects.all()] == [lead]
    address = reverse("talk:comment_assessment", args=[sealed.pk])
    for user in (second_lead, member, observer):
        assert signed_in(user).post(address, {"words": "x"}).status_code == 404
        assert signed_in(user).post(removal(early)).status_code == 404
    assert signed_in(lead).post(address, {"words": "Again."}).status_code == 302


@pytest.mark.parametrize("reads", ["lead", "observer"])
def test_the_section_asks_no_more_for_many_comments(
    signed_in: SignedIn, lead: User, observer: User, theory: Theory, reads: str
) -> None:
    client = signed_in(lead if reads == "lead" else observer)

    def asked() -> int:
        with CaptureQueriesContext(connection) as captured:
            client.get(theory.get_absolute_url())
        return len(captured)

    few = asked()
    for number in range(5):
        comment(by=lead, on=theory, words=f"{number} @Obi Observer @Lin Lead")
    remove_comment(by=lead, comment=Comment.objects.all()[0])
    assert asked() == few
