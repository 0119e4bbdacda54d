"""Who may open what: a view says the least role it needs; who has less reads what is missing and whom to ask."""

from collections.abc import Callable
from functools import wraps
from typing import Concatenate, ParamSpec, TypeVar

from django.core.exceptions import PermissionDenied
from django.http import HttpRequest, HttpResponseBase

from fleet.models import Person, Role
from fleet.people import names_of_administrators

P = ParamSpec("P")
R = TypeVar("R", bound=HttpResponseBase)


def require(request: HttpRequest, role: Role) -> Person:
    """The person asking, if they may act as `role`.

    :raises PermissionDenied: with a plain sentence that templates/403.html shows
    """
    person = request.user
    if isinstance(person, Person) and person.may_act_as(role):
        return person
    have = person.get_role_display() if isinstance(person, Person) else "no role"
    ask = " or ".join(names_of_administrators()) or "an administrator"
    raise PermissionDenied(f"This needs the role {role.label}; yours is {have}. To get it, ask {ask}.")


def role_required(
    role: Role,
) -> Callable[[Callable[Concatenate[HttpRequest, P], R]], Callable[Concatenate[HttpRequest, P], R]]:
    """Decorate a view that needs at least `role`; login itself is required everywhere already."""

    def decorate(view: Callable[Concatenate[HttpRequest, P], R]) -> Callable[Concatenate[HttpRequest, P], R]:
        @wraps(view)
        def guarded(request: HttpRequest, /, *args: P.args, **kwargs: P.kwargs) -> R:
            require(request, role)
            return view(request, *args, **kwargs)

        return guarded

    return decorate
