"""A person's own mail: the forms stand on the account page and come back here."""

from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect
from django.views.decorators.http import require_POST

from alerts.forms import MailChoiceForm
from alerts.models import Subscription
from fleet.access import require
from fleet.models import Role


@require_POST
def add(request: HttpRequest) -> HttpResponse:
    person, form = require(request, Role.READER), MailChoiceForm(request.POST)
    if not form.is_valid():
        messages.error(request, "Choose a site or an area from the list, and what to be told about.")
    elif form.add_for(person):
        messages.success(request, "Added to your mail.")
    else:
        messages.info(request, "You get that mail already.")
    return redirect("account")


@require_POST
def remove(request: HttpRequest, pk: int) -> HttpResponse:
    """Only one's own; somebody else's is not found and stays."""
    person = require(request, Role.READER)
    gone, _ = Subscription.objects.filter(pk=pk, person=person).delete()
    messages.success(request, "You will not get that mail any more." if gone else "That choice was gone already.")
    return redirect("account")
