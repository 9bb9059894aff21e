"""The rows of a large table as text: a template filled for each of hundreds of cells would take longer than all else
of its page. Everything is escaped by format_html."""

from collections.abc import Iterable

from django.utils.html import format_html, format_html_join
from django.utils.safestring import SafeString

from fits.assessments.three_verdicts import INSIDE, OUTSIDE
from fits.engine.joint import Joint
from fits.overviews.signs import sign_of
from fits.overviews.standings import Standing

ROW = '<tr><th scope="row"><a href="{}">{}</a></th>{}{}</tr>\n'
JOINT = (
    '<td>{}{}<br><span class="small">p {}, entry {}</span><br><span class="quiet small">m = {}</span></td>'
)
OPEN = SafeString(' <span class="quiet small">open</span>')
JUDGED = (
    '<td>{}<br><a class="small" href="{}">rank {} of {}</a><br><span class="quiet small">p {}</span></td>'
)
UNJUDGED = '<td class="quiet">{}</td>'


def row_html(url: str, name: str, joint: SafeString, cells: Iterable[SafeString]) -> SafeString:
    """A theory with its joint verdict and its cells."""
    return format_html(ROW, url, name, joint, format_html_join("", "{}", ((cell,) for cell in cells)))


def joint_html(joint: Joint | None, p_value: str, entry_level: str) -> SafeString:
    """The joint verdict."""
    if joint is None:
        return format_html(UNJUDGED, "not judged")
    sign = sign_of(INSIDE if joint.is_inside else OUTSIDE)
    is_open = "" if joint.is_settled else OPEN
    return format_html(JOINT, sign, is_open, p_value, entry_level, joint.measurements)


def cell_html(standing: Standing | None, word: str, url: str) -> SafeString:
    """The verdict of one measurement, which opens its assessment."""
    if standing is None:
        return format_html(UNJUDGED, word)
    return format_html(JUDGED, sign_of(word), url, standing.rank, standing.of, standing.p_value_written)
