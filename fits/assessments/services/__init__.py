"""The changes that can be made to assessments, one function each."""

from fits.assessments.services.cancel import cancel_assessment
from fits.assessments.services.request import request_assessment

__all__ = ["cancel_assessment", "request_assessment"]
