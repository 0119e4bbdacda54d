"""Each person's own account: name, e-mail, password. And an administrator's way to give somebody a new password."""

from django.contrib import messages
from django.contrib.auth import update_session_auth_hash
from django.contrib.auth.decorators import login_not_required
from django.contrib.auth.forms import PasswordChangeForm, SetPasswordForm
from django.contrib.auth.views import LoginView
from django.http import HttpRequest, HttpResponse
from django.shortcuts import get_object_or_404, redirect, render
from django.utils import timezone
from django.utils.decorators import method_decorator

from fleet.access import require, role_required
from fleet.forms.base import summary
from fleet.forms.people import AccountForm, LoginForm
from fleet.models import Person, Role

MAY = {
    Role.READER: "look at everything",
    Role.TECHNICIAN: "look at everything, log results and events, and fit elements",
    Role.ENGINEER: "read and log everything, judge results, and edit reservoirs, fluids, targets and limits",
    Role.ADMINISTRATOR: "do everything, and look after people and sites",
}


@method_decorator(login_not_required, name="dispatch")
class Login(LoginView):
    template_name = "registration/login.html"
    authentication_form = LoginForm
    redirect_authenticated_user = True


def account(request: HttpRequest) -> HttpResponse:
    person = require(request, Role.READER)
    # A fresh copy: a form that does not fit must not change the name at the top of the page.
    form = AccountForm(request.POST or None, instance=Person.objects.get(pk=person.pk), now=timezone.now())
    if request.method == "POST" and form.is_valid():
        form.save()
        messages.success(request, "Your account is saved.")
        return redirect("account")
    return _form_page(request, form, "fleet/account.html", {"person": person, "may": MAY[Role(person.role)]})


def password(request: HttpRequest) -> HttpResponse:
    person = require(request, Role.READER)
    form = PasswordChangeForm(person, request.POST or None)
    if request.method == "POST" and form.is_valid():
        update_session_auth_hash(request, form.save())
        messages.success(request, "Your password is changed.")
        return redirect("account")
    return _form_page(request, form, "fleet/password.html", {"whose": "Your password", "back": "account"})


@role_required(Role.ADMINISTRATOR)
def person_password(request: HttpRequest, pk: int) -> HttpResponse:
    person = get_object_or_404(Person, pk=pk)
    form = SetPasswordForm(person, request.POST or None)
    if request.method == "POST" and form.is_valid():
        form.save()
        messages.success(request, f"{person} has a new password. Everybody logged in as {person.username} is out.")
        return redirect("register-person", pk=pk)
    return _form_page(request, form, "fleet/password.html", {"whose": f"A new password for {person}", "person": person})


def _form_page(request: HttpRequest, form: object, template: str, more: dict[str, object]) -> HttpResponse:
    context = {"form": form, "summary": summary(form), **more}  # type: ignore[arg-type]
    return render(request, template, context, status=422 if context["summary"] else 200)
