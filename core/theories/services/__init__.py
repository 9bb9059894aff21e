"""Changes to theories and curves, one function each."""

from core.theories.services.discard import discard_curve
from core.theories.services.draft import draft_curve
from core.theories.services.submit import submit_curve
from core.theories.services.theory import create_theory, edit_theory

__all__ = ["create_theory", "discard_curve", "draft_curve", "edit_theory", "submit_curve"]
