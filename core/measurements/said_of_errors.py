"""What a lead can say of the errors of a release, in plain words, and what it comes to."""

from collections.abc import Sequence
from enum import StrEnum

from core.measurements.reading.roles import UNUSED
from core.user_error import UserError
from fits.engine.data import ErrorSource


class SaidOfErrors(StrEnum):
    """Where the errors come from, in the words of the page."""

    COLUMN = "column"
    COVARIANCE = "covariance"
    ONE_SIZE = "one-size"
    RELATIVE = "relative"
    COUNTS = "counts"
    PROFILE = "profile"

    @property
    def source(self) -> ErrorSource:
        """As the engine takes it."""
        return SOURCES[self]


SOURCES = {
    SaidOfErrors.COLUMN: ErrorSource.GIVEN,
    SaidOfErrors.COVARIANCE: ErrorSource.GIVEN,
    SaidOfErrors.ONE_SIZE: ErrorSource.ESTIMATE,
    SaidOfErrors.RELATIVE: ErrorSource.ESTIMATE,
    SaidOfErrors.COUNTS: ErrorSource.COUNTS,
    SaidOfErrors.PROFILE: ErrorSource.PROFILE,
}
SENTENCES = {
    SaidOfErrors.COLUMN: "They are given for each point, in the error column.",
    SaidOfErrors.COVARIANCE: "They are given as a covariance, in a file of its own, which replaces an error column.",
    SaidOfErrors.ONE_SIZE: "They have one size at all points, which is not known: it is estimated from the data.",
    SaidOfErrors.RELATIVE: "The error column, or the covariance, is relative: its common scale is estimated.",
    SaidOfErrors.COUNTS: "y are counts, whole numbers whose errors follow from themselves.",
    SaidOfErrors.PROFILE: "They change along x and are not given: a smooth profile is estimated from the data.",
}
# Under these an error column says nothing.
WITHOUT_COLUMN = (SaidOfErrors.ONE_SIZE, SaidOfErrors.COUNTS, SaidOfErrors.PROFILE)


def what_is_said(source: ErrorSource, roles: Sequence[str], *, has_covariance: bool) -> SaidOfErrors:
    """The words for what a release holds."""
    if source is ErrorSource.COUNTS:
        return SaidOfErrors.COUNTS
    if source is ErrorSource.PROFILE:
        return SaidOfErrors.PROFILE
    if source is ErrorSource.ESTIMATE:
        return SaidOfErrors.RELATIVE if has_covariance or "error" in roles else SaidOfErrors.ONE_SIZE
    return SaidOfErrors.COVARIANCE if has_covariance else SaidOfErrors.COLUMN


def roles_under(said: SaidOfErrors, roles: Sequence[str]) -> list[str]:
    """The guessed roles, with the error column not used where nothing is to be read from it."""
    if said not in WITHOUT_COLUMN:
        return list(roles)
    return [UNUSED if role == "error" else role for role in roles]


def refuse_contradiction(said: SaidOfErrors, roles: Sequence[str], *, has_covariance: bool) -> None:
    """Refuse words that would come to something else than they say."""
    has_column = "error" in roles
    if said is SaidOfErrors.ONE_SIZE and (has_column or has_covariance):
        what = "the covariance" if has_covariance else "the error column"
        reason = f"one size at all points leaves {what} without use"
        remedy = (
            f"Say that {what} is relative, or {'leave it out' if has_covariance else 'mark it as not used'}"
        )
        raise UserError("errors-unused", reason, remedy)
    if said is SaidOfErrors.RELATIVE and not has_column and not has_covariance:
        remedy = "Mark the column of relative errors, or say that they have one size"
        raise UserError("no-errors", "no column is marked as relative errors", remedy)
    if said is SaidOfErrors.COVARIANCE and not has_covariance:
        raise UserError("no-errors", "there is no covariance", "Upload it with the table")
    if said is SaidOfErrors.COLUMN and has_covariance:
        remedy = "Upload the table without it, or say that errors are given as a covariance"
        raise UserError("covariance-unused", "the covariance replaces an error column", remedy)
