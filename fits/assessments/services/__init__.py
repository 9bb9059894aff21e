"""The changes that can be made to assessments, one function each."""

from fits.assessments.services.assess_current import assess_current
from fits.assessments.services.cancel import cancel_assessment
from fits.assessments.services.find_features import cancel_features, request_features
from fits.assessments.services.request import request_assessment

__all__ = [
    "assess_current",
    "cancel_assessment",
    "cancel_features",
    "request_assessment",
    "request_features",
]
