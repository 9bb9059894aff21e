"""`{% load talk %}{% comments_on theory %}`: the section of comments, for pages of apps below this one too."""

from typing import Any

from django import template
from django.template.context import RequestContext

from fits.talk.comments import comments_on as gathered
from fits.talk.subject import Subject

register = template.Library()


@register.inclusion_tag("talk/comments.html", takes_context=True)
def comments_on(context: RequestContext, target: Subject) -> dict[str, Any]:
    """The comments on a theory or an assessment, as the reader of the page sees them."""
    return {"talk": gathered(target, context["request"].user)}
