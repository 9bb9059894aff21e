"""The one table of permissions: what each role may do, and which of it each address asks for.

`access` enforces it, a page shows it, and a test walks every address as every role and as a stranger by it.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

from core.people.models import Role


class Action(StrEnum):
    """What can be done in a collaboration."""

    VIEW = "see measurements, theories and assessments"
    READ_REPORTS = "read reports"
    SUBMIT = "submit theories and curves"
    ASSESS = "start and cancel assessments"
    COMMENT = "comment on theories and assessments"
    READ_LOG = "read the log of who did what"
    PUBLISH = "add measurements, upload, publish and withdraw releases"
    SEAL = "seal a measurement, look at its data early, open it"
    REPORT = "write reports and share them by link"
    DESKS = "see the desks of all students"
    MANAGE = "invite and remove people, change roles, edit the collaboration"
    LEAVE = "leave"


LEAD, MEMBER, STUDENT, OBSERVER = Role.LEAD, Role.MEMBER, Role.STUDENT, Role.OBSERVER
ALL = frozenset(Role)
LEADS = frozenset({LEAD})
CONTRIBUTORS = frozenset({LEAD, MEMBER, STUDENT})
# Whoever sees what is shared; a student sees the theories, curves and verdicts of their own desk instead.
SHARERS = frozenset({LEAD, MEMBER, OBSERVER})

PERMITTED: dict[Action, frozenset[Role]] = {
    Action.VIEW: ALL,
    Action.READ_REPORTS: SHARERS,
    Action.SUBMIT: CONTRIBUTORS,
    Action.ASSESS: CONTRIBUTORS,
    Action.COMMENT: CONTRIBUTORS,
    Action.READ_LOG: SHARERS,
    Action.PUBLISH: LEADS,
    Action.SEAL: LEADS,
    Action.REPORT: LEADS,
    Action.DESKS: LEADS,
    Action.MANAGE: LEADS,
    Action.LEAVE: ALL,
}


class Door(StrEnum):
    """What lets someone in where no collaboration does."""

    EVERYONE = "everyone"
    SIGNED_IN = "everyone who has signed in"
    LINK = "whoever holds the link"


@dataclass(frozen=True)
class Rule:
    """Who may use an address with one method. `only`: a condition beside the role, in words."""

    asks: Action | Door
    only: str = ""


OWN_DRAFT = "a draft: who uploaded it"
LEADS_DRAFT = "a draft: leads"
OWN_OR_LEAD = "who submitted it, or a lead"
AUTHOR_OR_LEAD = "who wrote it, or a lead"

Methods = Mapping[str, Rule]


def _reads(action: Action | Door, only: str = "") -> Methods:
    return {"GET": Rule(action, only)}


def _changes(action: Action | Door, only: str = "") -> Methods:
    return {"POST": Rule(action, only)}


def _asks(action: Action | Door, only: str = "") -> Methods:
    """A form: shown and sent."""
    return {"GET": Rule(action, only), "POST": Rule(action, only)}


# By the name of the address. A new address has to be entered here: a test says so.
RULES: dict[str, Methods] = {
    # overviews
    "overviews:home": _reads(Door.SIGNED_IN),
    "overviews:collaboration": _reads(Action.VIEW),
    "overviews:comparison": _reads(Action.VIEW),
    "overviews:comparison_csv": _reads(Action.VIEW),
    "overviews:separation": _reads(Action.VIEW),
    "overviews:measurement": _reads(Action.VIEW),
    "overviews:pairs": _reads(Action.VIEW),
    "overviews:history_chart": _reads(Action.VIEW),
    "overviews:theory": _reads(Action.VIEW),
    "overviews:desks": _reads(Action.DESKS),
    "overviews:desks_csv": _reads(Action.DESKS),
    # people
    "people:new_collaboration": _asks(Door.SIGNED_IN),
    "people:edit_collaboration": _asks(Action.MANAGE),
    "people:people": _reads(Action.VIEW),
    "people:change_role": _changes(Action.MANAGE),
    "people:remove": _changes(Action.MANAGE),
    "people:hand_over": _asks(Action.MANAGE),
    "people:leave": _changes(Action.LEAVE),
    "people:new_invitation": _changes(Action.MANAGE),
    "people:mail_invitation": _changes(Action.MANAGE),
    "people:revoke_invitation": _changes(Action.MANAGE),
    "people:invitation": _asks(Door.LINK),
    "people:permissions": _reads(Door.SIGNED_IN),
    "people:preferences": _asks(Door.SIGNED_IN),
    # measurements
    "measurements:new_measurement": _asks(Action.PUBLISH),
    "measurements:edit_measurement": _asks(Action.PUBLISH),
    "measurements:seal": _asks(Action.SEAL),
    "measurements:open": _asks(Action.SEAL),
    "measurements:look": _changes(Action.SEAL),
    "measurements:upload": _asks(Action.PUBLISH),
    "measurements:release": {"GET": Rule(Action.VIEW, LEADS_DRAFT), "POST": Rule(Action.PUBLISH)},
    "measurements:publish": _changes(Action.PUBLISH),
    "measurements:discard": _changes(Action.PUBLISH),
    "measurements:withdraw": _asks(Action.PUBLISH),
    "measurements:download": _reads(Action.VIEW, LEADS_DRAFT),
    # theories
    "theories:new_theory": _asks(Action.SUBMIT),
    "theories:edit_theory": _asks(Action.SUBMIT, OWN_OR_LEAD),
    "theories:new_curve": _asks(Action.SUBMIT),
    "theories:curve": _reads(Action.VIEW, OWN_DRAFT),
    "theories:submit": _changes(Action.SUBMIT, OWN_DRAFT),
    "theories:discard": _changes(Action.SUBMIT, OWN_DRAFT),
    "theories:download": _reads(Action.VIEW, OWN_DRAFT),
    "theories:register": _reads(Action.VIEW),
    "theories:register_csv": _reads(Action.VIEW),
    "theories:new_batch": _asks(Action.SUBMIT),
    "theories:batch": _reads(Action.VIEW, OWN_DRAFT),
    "theories:submit_batch": _changes(Action.SUBMIT, OWN_DRAFT),
    "theories:discard_batch": _changes(Action.SUBMIT, OWN_DRAFT),
    # assessments
    "assessments:new": _asks(Action.ASSESS),
    "assessments:coordinates": _reads(Action.ASSESS),
    "assessments:progress": _reads(Action.VIEW),
    "assessments:cancel": _changes(Action.ASSESS),
    # reports
    "reports:explained": _reads(Door.EVERYONE),
    "reports:assessment": _reads(Action.VIEW),
    "reports:assessment_chart": _reads(Action.VIEW),
    "reports:assessment_json": _reads(Action.VIEW),
    "reports:assessment_csv": _reads(Action.VIEW),
    "reports:ask_features": _changes(Action.ASSESS),
    "reports:features_progress": _reads(Action.VIEW),
    "reports:cancel_features": _changes(Action.ASSESS),
    "reports:assessment_features": _reads(Action.VIEW),
    "reports:new": _asks(Action.REPORT),
    "reports:new_draft": _asks(Action.REPORT),
    "reports:words": _asks(Action.REPORT),
    "reports:preview": _reads(Action.REPORT),
    "reports:add_part": _changes(Action.REPORT),
    "reports:part": _asks(Action.REPORT),
    "reports:move_part": _changes(Action.REPORT),
    "reports:remove_part": _changes(Action.REPORT),
    "reports:renew_part": _changes(Action.REPORT),
    "reports:freeze": _changes(Action.REPORT),
    "reports:discard": _changes(Action.REPORT),
    "reports:later": _changes(Action.REPORT),
    "reports:reports": _reads(Action.READ_REPORTS),
    "reports:report": _reads(Action.READ_REPORTS, LEADS_DRAFT),
    "reports:report_chart": _reads(Action.READ_REPORTS, LEADS_DRAFT),
    "reports:report_json": _reads(Action.READ_REPORTS, LEADS_DRAFT),
    "reports:report_csv": _reads(Action.READ_REPORTS, LEADS_DRAFT),
    "reports:report_features": _reads(Action.READ_REPORTS, LEADS_DRAFT),
    "reports:print": {"GET": Rule(Action.READ_REPORTS), "POST": Rule(Action.REPORT)},
    "reports:print_progress": _reads(Action.READ_REPORTS),
    "reports:new_link": _changes(Action.REPORT),
    "reports:revoke": _changes(Action.REPORT),
    "reports:shared": _asks(Door.LINK),
    "reports:shared_chart": _reads(Door.LINK),
    "reports:shared_json": _reads(Door.LINK),
    "reports:shared_csv": _reads(Door.LINK),
    "reports:shared_features": _reads(Door.LINK),
    "reports:shared_print": _reads(Door.LINK),
    "reports:shared_print_progress": _reads(Door.LINK),
    # talk
    "talk:comment_theory": _changes(Action.COMMENT),
    "talk:comment_assessment": _changes(Action.COMMENT),
    "talk:remove": _changes(Action.COMMENT, AUTHOR_OR_LEAD),
    "talk:log": _reads(Action.READ_LOG),
    "talk:log_csv": _reads(Action.READ_LOG),
}
