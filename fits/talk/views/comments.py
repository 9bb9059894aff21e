"""What is sent to comments. They stand on the pages of theories and assessments."""

from django.contrib import messages
from django.contrib.auth.decorators import login_required
from django.http import HttpResponse
from django.shortcuts import redirect, render
from django.views.decorators.http import require_POST

from core.errors import UserError
from core.people.access import Action, collaboration_of, load
from core.people.forms import explain
from core.people.signed_in import SignedInRequest
from core.theories.models import Theory
from fits.talk.forms import CommentForm
from fits.talk.models import Comment
from fits.talk.services import comment, remove_comment
from fits.talk.subject import Subject, about, address, assessments_with_place, with_subject


@login_required
@require_POST
def comment_theory(request: SignedInRequest, pk: int) -> HttpResponse:
    """Say something on a theory."""
    rows = Theory.objects.select_related("collaboration")
    return _comment(request, load(rows, request.user, Action.COMMENT, pk))


@login_required
@require_POST
def comment_assessment(request: SignedInRequest, pk: int) -> HttpResponse:
    """Say something on an assessment."""
    return _comment(request, load(assessments_with_place(), request.user, Action.COMMENT, pk))


@login_required
@require_POST
def remove(request: SignedInRequest, pk: int) -> HttpResponse:
    """Take a comment back."""
    found = load(with_subject(Comment.objects.all()), request.user, Action.COMMENT, pk)
    try:
        remove_comment(by=request.user, comment=found)
    except UserError as error:
        messages.info(request, f"{error}.")
    else:
        messages.success(request, "The words are gone; that there was a comment stays to be seen.")
    return redirect(address(found))


def _comment(request: SignedInRequest, on: Subject) -> HttpResponse:
    """Keep the comment; one that is refused stands in a form again, so that no words are lost."""
    form = CommentForm(request.POST)
    if form.is_valid():
        try:
            return redirect(address(comment(by=request.user, on=on, words=form.cleaned_data["words"])))
        except UserError as error:
            explain(form, error, "words")
    context = {"form": form, "subject": on, "about": about(on), "collaboration": collaboration_of(on)}
    return render(request, "talk/comment_form.html", context, status=400)
