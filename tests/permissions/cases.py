"""What each address is asked about: its arguments, for somebody in this world.

One line an address. `Key` gets the world and the name of who asks ("lead", "member", "student", "observer",
"stranger"), since a student works with rows of their own desk and a draft is there for its owner alone.
"""

from collections.abc import Callable
from datetime import timedelta
from typing import Any

from django.utils import timezone

from core.measurements.models import Measurement
from core.people.models import Invitation
from core.people.services.invite import hashed
from core.theories.models import Batch
from fits.reports.models import Report, ReportPart
from tests.permissions.world import World

Key = Callable[[World, str], tuple[Any, ...]]


def nothing(world: World, who: str) -> tuple[Any, ...]:
    return ()


def collaboration(world: World, who: str) -> tuple[Any, ...]:
    return (world.collaboration.pk,)


def measurement(world: World, who: str) -> tuple[Any, ...]:
    return (world.measurement.pk,)


def sealed(world: World, who: str) -> tuple[Any, ...]:
    """A sealed measurement, made anew where a test before has taken it back."""
    lead = world.people["lead"]
    words = {"x_name": "frequency", "y_name": "power", "created_by": lead, "sealed_at": timezone.now()}
    made, _ = Measurement.objects.get_or_create(
        collaboration=world.collaboration, name="Power at the outflow", defaults=words
    )
    return (made.pk,)


def release(world: World, who: str) -> tuple[Any, ...]:
    return (world.release.pk,)


def draft_release(world: World, who: str) -> tuple[Any, ...]:
    return (world.draft.pk,)


def theory(world: World, who: str) -> tuple[Any, ...]:
    return (world.around(who).theory.pk,)


def curve(world: World, who: str) -> tuple[Any, ...]:
    return (world.around(who).curve.pk,)


def batch(world: World, who: str) -> tuple[Any, ...]:
    """Curves that were submitted together, at the same desk as the others that they work with."""
    theory = world.around(who).theory
    made, _ = Batch.objects.get_or_create(
        collaboration=world.collaboration,
        measurement=world.measurement,
        desk=theory.desk,
        uploaded_by=theory.submitted_by,
        file_name="submitted.zip",
        defaults={"submitted_at": timezone.now()},
    )
    return (made.pk,)


def waiting_batch(world: World, who: str) -> tuple[Any, ...]:
    """Curves of theirs that wait to be submitted; of the lead's for those who have none."""
    owner = who if who in ("lead", "member", "student") else "lead"
    made, _ = Batch.objects.get_or_create(
        collaboration=world.collaboration,
        measurement=world.measurement,
        desk=world.around(owner).theory.desk,
        uploaded_by=world.people[owner],
        file_name="waiting.zip",
    )
    return (made.pk,)


def draft_curve(world: World, who: str) -> tuple[Any, ...]:
    return (world.draft_curve(who).pk,)


def done(world: World, who: str) -> tuple[Any, ...]:
    return (world.around(who).done.pk,)


def running(world: World, who: str) -> tuple[Any, ...]:
    return (world.around(who).running.pk,)


def report(world: World, who: str) -> tuple[Any, ...]:
    return (world.report.pk,)


def draft_part(world: World, who: str) -> tuple[Any, ...]:
    """A part of a draft of the lead's."""
    draft, _ = Report.objects.get_or_create(
        collaboration=world.collaboration, title="What is being written", author=world.people["lead"]
    )
    part, _ = ReportPart.objects.get_or_create(
        report=draft, order=1, defaults={"assessment": world.rows[None].done}
    )
    return (part.pk,)


def draft_report(world: World, who: str) -> tuple[Any, ...]:
    """The draft."""
    (part,) = draft_part(world, who)
    return (ReportPart.objects.get(pk=part).report_id,)


def secret(world: World, who: str) -> tuple[Any, ...]:
    return (world.secret,)


def membership_of_member(world: World, who: str) -> tuple[Any, ...]:
    person = world.collaboration.memberships.get(user=world.people["member"])
    return (world.collaboration.pk, person.pk)


def comment(world: World, who: str) -> tuple[Any, ...]:
    """One on the theory that they work with, by who submitted that."""
    theory = world.around(who).theory
    made, _ = theory.comments.get_or_create(
        collaboration=world.collaboration, author=theory.submitted_by, desk=theory.desk, words="Calm."
    )
    return (made.pk,)


INVITED = "a-made-up-secret"


def invitation(world: World) -> Invitation:
    """An open invitation, whose link ends in INVITED."""
    made, _ = Invitation.objects.get_or_create(
        token_sha256=hashed(INVITED),
        defaults={
            "collaboration": world.collaboration,
            "created_by": world.people["lead"],
            "expires_at": timezone.now() + timedelta(days=1),
        },
    )
    return made


def with_(key: Key, *rest: Any) -> Key:
    """More arguments behind."""
    return lambda world, who: (*key(world, who), *rest)


KEYS: dict[str, Key] = {
    "overviews:home": nothing,
    "overviews:collaboration": collaboration,
    "overviews:comparison": collaboration,
    "overviews:comparison_csv": collaboration,
    "overviews:separation": collaboration,
    "overviews:desks": collaboration,
    "overviews:desks_csv": collaboration,
    "overviews:measurement": measurement,
    "overviews:pairs": measurement,
    "overviews:history_chart": with_(measurement, "history", "csv"),
    "overviews:theory": theory,
    "people:new_collaboration": nothing,
    "people:edit_collaboration": collaboration,
    "people:people": collaboration,
    "people:change_role": membership_of_member,
    "people:remove": membership_of_member,
    "people:hand_over": membership_of_member,
    "people:leave": collaboration,
    "people:new_invitation": collaboration,
    "people:mail_invitation": collaboration,
    "people:revoke_invitation": lambda world, who: (invitation(world).pk,),
    "people:invitation": lambda world, who: (invitation(world) and INVITED,),
    "people:permissions": nothing,
    "people:preferences": nothing,
    "measurements:new_measurement": collaboration,
    "measurements:edit_measurement": measurement,
    "measurements:seal": sealed,
    "measurements:open": sealed,
    "measurements:look": sealed,
    "measurements:upload": measurement,
    "measurements:release": release,
    "measurements:publish": draft_release,
    "measurements:discard": draft_release,
    "measurements:withdraw": release,
    "measurements:download": release,
    "theories:new_theory": collaboration,
    "theories:edit_theory": theory,
    "theories:new_curve": theory,
    "theories:curve": curve,
    "theories:submit": draft_curve,
    "theories:discard": draft_curve,
    "theories:download": curve,
    "theories:register": sealed,
    "theories:register_csv": sealed,
    "theories:new_batch": measurement,
    "theories:batch": batch,
    "theories:submit_batch": waiting_batch,
    "theories:discard_batch": waiting_batch,
    "assessments:new": release,
    "assessments:coordinates": release,
    "assessments:progress": running,
    "assessments:cancel": running,
    "reports:explained": nothing,
    "reports:assessment": done,
    "reports:assessment_chart": with_(done, "curves", "svg"),
    "reports:assessment_json": done,
    "reports:assessment_csv": done,
    "reports:ask_features": done,
    "reports:features_progress": done,
    "reports:cancel_features": done,
    "reports:assessment_features": with_(done, "features.json"),
    "reports:new": done,
    "reports:new_draft": collaboration,
    "reports:words": draft_report,
    "reports:preview": draft_report,
    "reports:add_part": draft_report,
    "reports:part": draft_part,
    "reports:move_part": draft_part,
    "reports:remove_part": draft_part,
    "reports:renew_part": draft_part,
    "reports:freeze": draft_report,
    "reports:discard": draft_report,
    "reports:later": report,
    "reports:reports": collaboration,
    "reports:report": report,
    "reports:report_chart": with_(report, "curves", "svg"),
    "reports:report_json": report,
    "reports:report_csv": report,
    "reports:report_features": with_(report, "features.json"),
    "reports:print": with_(report, "a4"),
    "reports:print_progress": with_(report, "a4"),
    "reports:new_link": report,
    "reports:revoke": lambda world, who: (world.link.pk,),
    "reports:shared": secret,
    "reports:shared_chart": with_(secret, "curves", "svg"),
    "reports:shared_json": secret,
    "reports:shared_csv": secret,
    "reports:shared_features": with_(secret, "features.json"),
    "reports:shared_print": with_(secret, "a4"),
    "reports:shared_print_progress": with_(secret, "a4"),
    "talk:comment_theory": theory,
    "talk:comment_assessment": done,
    "talk:remove": comment,
    "talk:log": collaboration,
    "talk:log_csv": collaboration,
}

# Addresses that answer 404 to everybody in this world, since what they name is not there: here no features are found.
NOT_THERE = {"reports:assessment_features", "reports:report_features", "reports:shared_features"}
