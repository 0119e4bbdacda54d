"""Addresses of lists: the page one is on, narrowed and sorted as it is, with something changed."""

from django.http import HttpRequest
from django.utils.http import urlencode

# What belongs to one answer and not to the list: which part of it, and in which form.
PASSING = {"page", "format"}


def same_list(request: HttpRequest, **changed: str) -> str:
    """This list's address with some parameters changed; an empty one drops out, and the page begins anew."""
    kept = {key: str(value) for key, value in request.GET.items() if value and key not in PASSING}
    wanted = {key: value for key, value in (kept | changed).items() if value}
    return f"{request.path}?{urlencode(wanted)}"
