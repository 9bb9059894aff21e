"""The changes that can be made to comments, one function each."""

from fits.talk.services.comment import comment
from fits.talk.services.remove import remove_comment

__all__ = ["comment", "remove_comment"]
