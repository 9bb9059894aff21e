"""Every page of the site: its address, who looks at it, and with which status it answers."""

from collections.abc import Callable
from dataclasses import dataclass
from datetime import timedelta

from allauth.account.forms import default_token_generator
from allauth.account.utils import user_pk_to_url_str
from django.urls import reverse
from django.utils import timezone
from playwright.sync_api import FilePayload
from playwright.sync_api import Page as BrowserPage

from core.measurements import services
from core.measurements.models import Measurement
from core.measurements.seal_terms import SealTerms
from core.people.log import Deed, record
from core.people.models import Role, User
from core.people.services import invite_by_link
from core.theories.models import Batch, Theory
from core.theories.services import draft_batch
from fits.talk.services import comment, remove_comment
from tests.browser.survey import Survey, computed, curve_of
from tests.browser.written_reports import (
    draft,
    draft_part,
    frozen,
    frozen_key,
    give_a_wrong_passphrase,
    give_no_heading_and_show_nothing,
    later_draft,
    locked_secret,
    show_the_second_part,
)
from tests.permissions.world import assessment_of
from tests.theories.batches import submit


@dataclass(frozen=True)
class Row:
    """A page. `route` is the name of its address; several rows may show one address in several states."""

    name: str
    route: str
    key: Callable[[Survey], object] | None = None
    who: str = "lead"
    status: int = 200
    then: Callable[[BrowserPage], None] | None = None

    def address(self, survey: Survey) -> str:
        """Where it is."""
        key = () if self.key is None else self.key(survey)
        return reverse(self.route, args=key if isinstance(key, tuple) else (key,))


def compare_two(page: BrowserPage) -> None:
    """Choose two theories."""
    page.get_by_label("The other").select_option(index=1)
    page.get_by_role("button", name="Compare").click()
    page.get_by_text("best: their curves are").wait_for()


def key_of_a_new_password(survey: Survey) -> tuple[str, str]:
    """What the e-mail that sets a password carries."""
    return user_pk_to_url_str(survey.member), default_token_generator.make_token(survey.member)


def ask_for_too_much(page: BrowserPage) -> None:
    """Have a form come back with faults."""
    page.get_by_label("Levels, in %").fill("none of these")
    page.get_by_role("button", name="Start the assessment").click()


def take_the_last_lead_away(page: BrowserPage) -> None:
    """Ask for what a rule forbids."""
    page.get_by_text("Leave this collaboration").click()
    page.get_by_role("button", name="Leave").click()


def upload_nonsense(page: BrowserPage) -> None:
    """Upload a table with a fault in it."""
    table = "x,y,error\n" + "".join(f"{x},{x},0.1\n" for x in range(9)) + "9,=1+1,0.1\n"
    file: FilePayload = {"name": "merrow.csv", "mimeType": "text/csv", "buffer": table.encode()}
    page.get_by_label("Data table").set_input_files(files=[file])
    page.get_by_role("button", name="Read it").click()


def make_a_link(page: BrowserPage) -> None:
    """Make a share link, whose secret is shown once."""
    page.get_by_label("For whom").fill("the harbour office")
    page.get_by_role("button", name="Make a link").click()


def invited(survey: Survey) -> str:
    """The secret of an invitation that was made for one."""
    return invite_by_link(
        by=survey.lead,
        collaboration=survey.collaboration,
        role=Role.STUDENT,
        expires_at=timezone.now() + timedelta(days=7),
        label="The second year",
    ).secret


def make_an_invitation(page: BrowserPage) -> None:
    """Make the link of an invitation, which is shown once."""
    page.get_by_label("For whom").fill("the second year")
    page.get_by_role("button", name="Make an invitation link").click()


def give_two_passwords(page: BrowserPage) -> None:
    """Have the form of a newcomer come back with faults."""
    page.get_by_label("E-mail address").fill("nell@merrow.example")
    page.get_by_label("Name").fill("Nell New")
    page.get_by_label("Password", exact=True).fill("a calm made-up lake")
    page.get_by_label("Password, once more").fill("another calm lake")
    page.get_by_role("button", name="Make the account and join").click()


def talk_about(survey: Survey) -> int:
    """A theory that two have spoken about, one of them too soon."""
    said = comment(
        by=survey.member,
        on=survey.theory,
        words="@Lin Lead, is the third rise in\nhttps://merrow.example/tables/a-long-address-of-a-table?of=2026&and=more\n"
        "the same?",
    )
    remove_comment(by=survey.lead, comment=comment(by=survey.member, on=survey.theory, words="It is not."))
    comment(by=survey.lead, on=survey.theory, words="As far as the gauge can tell.")
    return int(said.theory_id or 0)


def unfold_a_removal(page: BrowserPage) -> None:
    """Ask to remove a comment, and whom a comment can mention."""
    page.get_by_text("Remove this comment").first.click()
    page.get_by_text("Who can be mentioned here").click()


def say_nothing(page: BrowserPage) -> None:
    """Send a comment without words."""
    page.get_by_label("Your comment").fill("  ")
    page.get_by_role("button", name="Comment").click()


def logged(survey: Survey) -> int:
    """A collaboration whose log tells of something."""
    talk_about(survey)
    record(
        Deed.CHANGED_ROLE,
        who=survey.lead,
        collaboration=survey.collaboration,
        about="Mo Member",
        detail={"role_before": "observer", "role": "member"},
    )
    return survey.collaboration.pk


def sealed(survey: Survey) -> int:
    """A sealed measurement with a curve, at whose data a lead has looked."""
    made = Measurement.objects.create(
        collaboration=survey.collaboration,
        name="Power at the outflow",
        x_name="frequency",
        x_unit="cycles per hour",
        y_name="power",
        created_by=survey.lead,
    )
    soon = (timezone.now() + timedelta(days=7)).replace(second=0, microsecond=0)
    terms = SealTerms(soon + timedelta(days=7), soon, 0.5, 4.5)
    services.seal_measurement(user=survey.lead, measurement=made, seen=0, terms=terms)
    services.look_early(user=survey.lead, measurement=made)
    curve_of(survey.theory, made, survey.member, stretch=1.0, version=1)
    curve_of(survey.theory, made, survey.lead, stretch=1.1, version=2)
    return made.pk


def withdrawn(survey: Survey) -> int:
    """A release that has been taken back."""
    services.withdraw_release(user=survey.lead, release=survey.release, reason="The gauge stuck for a week.")
    return survey.release.pk


def unfold_the_numbers(page: BrowserPage) -> None:
    """Open the table behind a plot."""
    page.get_by_text("The curve’s numbers").click()


def unfold_the_ball(page: BrowserPage) -> None:
    """Open the shortest of the tables behind a result's charts, which are all made alike."""
    page.get_by_text("Table: The ball seen from above").click()


def a_batch(survey: Survey) -> Batch:
    """Curves for the measurement, uploaded together: two that are accepted and one that is not."""
    rows = [f"{0.4 + 0.03 * step:.2f},{1.5 + 0.01 * step:.2f},{1.0 + 0.02 * step:.2f}" for step in range(141)]
    table = "\n".join(["x,Flat floor of the lake,Deep floor,Odd floor", *(f"{row}," for row in rows)])
    return draft_batch(
        user=survey.lead, measurement=survey.measurement, content=table.encode(), file_name="many.csv"
    )


def waiting_batch(survey: Survey) -> int:
    """A measurement for which curves wait to be submitted."""
    return a_batch(survey).measurement_id


def desks(survey: Survey) -> int:
    """A collaboration with two students, one of whom has submitted a curve."""
    for name in ("Ada Able", "Bo Brief"):
        student = User.objects.create_user(f"{name[:2]}@merrow.example", name=name)
        survey.collaboration.memberships.create(user=student, role=Role.STUDENT)
    theory = Theory.objects.create(
        collaboration=survey.collaboration, name="Flat floor", submitted_by=student, desk=student
    )
    curve = curve_of(theory, survey.measurement, student, stretch=1.1, version=1)
    computed(assessment_of(survey.release, curve, "desk"))
    return survey.collaboration.pk


PAGES = [
    Row("sign-in", "account_login", who="nobody"),
    Row("sign-up-closed", "account_signup", who="nobody"),
    Row("password-reset", "account_reset_password", who="nobody"),
    Row("password-reset-sent", "account_reset_password_done", who="nobody"),
    Row("password-reset-form", "account_reset_password_from_key", key_of_a_new_password, who="nobody"),
    Row("password-reset-done", "account_reset_password_from_key_done", who="nobody"),
    Row("inactive", "account_inactive", who="nobody"),
    Row("sign-out", "account_logout"),
    Row("password-change", "account_change_password"),
    Row("reauthenticate", "account_reauthenticate"),
    Row("explained", "reports:explained", who="nobody"),
    Row("home", "overviews:home"),
    Row("home-of-a-stranger", "overviews:home", who="stranger"),
    Row("collaboration", "overviews:collaboration", lambda survey: survey.collaboration.pk),
    Row("comparison", "overviews:comparison", lambda survey: survey.collaboration.pk),
    Row("separation", "overviews:separation", lambda survey: survey.collaboration.pk, then=compare_two),
    Row("desks", "overviews:desks", desks),
    Row("measurement", "overviews:measurement", lambda survey: survey.measurement.pk),
    Row("pairs", "overviews:pairs", lambda survey: survey.measurement.pk),
    Row("theory", "overviews:theory", lambda survey: survey.theory.pk),
    Row("theory-with-comments", "overviews:theory", talk_about, then=unfold_a_removal),
    Row("comment-with-faults", "overviews:theory", talk_about, status=400, then=say_nothing),
    Row("log", "talk:log", logged),
    Row("new-collaboration", "people:new_collaboration"),
    Row("edit-collaboration", "people:edit_collaboration", lambda survey: survey.collaboration.pk),
    Row("people", "people:people", lambda survey: survey.collaboration.pk),
    Row("people-as-a-member", "people:people", lambda survey: survey.collaboration.pk, who="member"),
    Row(
        "people-with-new-invitation",
        "people:people",
        lambda survey: survey.collaboration.pk,
        then=make_an_invitation,
    ),
    Row(
        "hand-over",
        "people:hand_over",
        lambda survey: (survey.collaboration.pk, survey.member.memberships.get().pk),
    ),
    Row("permissions", "people:permissions", who="stranger"),
    Row("preferences", "people:preferences", who="stranger"),
    Row("invitation", "people:invitation", invited, who="nobody"),
    Row("invitation-with-faults", "people:invitation", invited, who="nobody", then=give_two_passwords),
    Row("invitation-signed-in", "people:invitation", invited, who="stranger"),
    Row("invitation-here-already", "people:invitation", invited, who="member"),
    Row("invitation-closed", "people:invitation", lambda survey: "unknown", who="nobody", status=404),
    Row("new-measurement", "measurements:new_measurement", lambda survey: survey.collaboration.pk),
    Row("edit-measurement", "measurements:edit_measurement", lambda survey: survey.measurement.pk),
    Row("seal", "measurements:seal", sealed),
    Row("seal-too-late", "measurements:seal", lambda survey: survey.measurement.pk),
    Row("open", "measurements:open", sealed),
    Row("sealed-measurement", "overviews:measurement", sealed, who="member"),
    Row("register", "theories:register", sealed, who="member"),
    Row("withdraw", "measurements:withdraw", lambda survey: survey.release.pk),
    Row("withdrawn", "measurements:release", withdrawn, who="member"),
    Row("upload", "measurements:upload", lambda survey: survey.measurement.pk),
    Row("draft-release", "measurements:release", lambda survey: survey.draft.pk),
    Row("draft-release-with-faults", "measurements:release", lambda survey: survey.unmapped.pk),
    Row("release", "measurements:release", lambda survey: survey.release.pk),
    Row("new-theory", "theories:new_theory", lambda survey: survey.collaboration.pk),
    Row("edit-theory", "theories:edit_theory", lambda survey: survey.theory.pk),
    Row("new-curve", "theories:new_curve", lambda survey: survey.theory.pk),
    Row("draft-curve", "theories:curve", lambda survey: survey.draft_curve.pk, then=unfold_the_numbers),
    Row("curve", "theories:curve", lambda survey: survey.curve.pk),
    Row("new-batch", "theories:new_batch", waiting_batch),
    Row("batch", "theories:batch", lambda survey: a_batch(survey).pk),
    Row("batch-submitted", "theories:batch", lambda survey: submit(a_batch(survey)).pk),
    Row("assess", "assessments:new", lambda survey: survey.release.pk),
    Row("assess-with-faults", "assessments:new", lambda survey: survey.release.pk, then=ask_for_too_much),
    Row("assessment-queued", "reports:assessment", lambda survey: survey.queued.pk),
    Row("assessment-running", "reports:assessment", lambda survey: survey.running.pk),
    Row("assessment-failed", "reports:assessment", lambda survey: survey.failed.pk),
    Row("assessment-cancelled", "reports:assessment", lambda survey: survey.cancelled.pk),
    Row("result", "reports:assessment", lambda survey: survey.done.pk, then=unfold_the_ball),
    Row("new-report", "reports:new", lambda survey: survey.done.pk),
    Row("reports", "reports:reports", lambda survey: draft(survey) and survey.collaboration.pk),
    Row("new-draft-report", "reports:new_draft", lambda survey: survey.collaboration.pk),
    Row("draft-report", "reports:report", draft),
    Row("later-draft-report", "reports:report", later_draft),
    Row("draft-report-words", "reports:words", draft),
    Row("draft-report-part", "reports:part", draft_part),
    Row("draft-report-part-with-faults", "reports:part", draft_part, then=give_no_heading_and_show_nothing),
    Row("preview-of-report", "reports:preview", draft),
    Row("report-of-parts", "reports:report", frozen_key, who="member"),
    Row("report-of-parts-second", "reports:report", frozen_key, then=show_the_second_part),
    Row("report-later", "reports:report", lambda survey: frozen(survey).pk),
    Row("report-being-printed", "reports:print", lambda survey: (survey.report.pk, "a4")),
    Row(
        "shared-report-being-printed",
        "reports:shared_print",
        lambda survey: (survey.secret, "letter"),
        who="nobody",
    ),
    Row("locked-report", "reports:shared", locked_secret, who="nobody"),
    Row(
        "locked-report-with-faults",
        "reports:shared",
        locked_secret,
        who="nobody",
        status=400,
        then=give_a_wrong_passphrase,
    ),
    Row("report", "reports:report", lambda survey: survey.report.pk),
    Row("report-with-new-link", "reports:report", lambda survey: survey.report.pk, then=make_a_link),
    Row("shared-report", "reports:shared", lambda survey: survey.secret, who="nobody"),
    Row("revoked-link", "reports:shared", lambda survey: survey.revoked_secret, who="nobody", status=404),
    Row(
        "upload-refused",
        "measurements:upload",
        lambda survey: survey.measurement.pk,
        status=400,
        then=upload_nonsense,
    ),
    Row(
        "user-error",
        "people:people",
        lambda survey: survey.collaboration.pk,
        status=400,
        then=take_the_last_lead_away,
    ),
    Row("not-found", "reports:report", lambda survey: survey.report.pk, who="stranger", status=404),
    Row("forbidden", "reports:new", lambda survey: survey.done.pk, who="member", status=403),
]
