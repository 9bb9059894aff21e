"""Changes to theories and curves, one function each."""

from core.theories.services.batch_draft import discard_batch, draft_batch
from core.theories.services.batch_submission import submit_batch
from core.theories.services.discard import discard_curve
from core.theories.services.draft import draft_curve
from core.theories.services.submit import submit_curve
from core.theories.services.theory import create_theory, edit_theory

__all__ = [
    "create_theory",
    "discard_batch",
    "discard_curve",
    "draft_batch",
    "draft_curve",
    "edit_theory",
    "submit_batch",
    "submit_curve",
]
