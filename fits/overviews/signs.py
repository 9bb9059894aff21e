"""The sign of a verdict, drawn once by its template: pages write it hundreds of times."""

from functools import cache

from django.template.loader import render_to_string
from django.utils.safestring import SafeString

from fits.assessments.three_verdicts import OFF, OUTSIDE


@cache
def sign_of(word: str) -> SafeString:
    """Shape and word of "inside", "inside, but off" or "outside"."""
    standing = {"is_off": word == OFF, "is_inside": word != OUTSIDE}
    return render_to_string("overviews/parts/standing.html", {"standing": standing})
