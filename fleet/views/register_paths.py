"""The addresses of one noun of the register."""

from typing import Any

from django.urls import URLPattern, path

from fleet.views import register
from fleet.views.register_noun import Noun


def noun_paths(noun: Noun) -> list[URLPattern]:
    """List, page, add, edit and, where rows go, remove: register-sites, register-site, register-site-add and so on."""
    base = f"register/{noun.slug}/"
    told: dict[str, Any] = {"noun": noun}
    found = [
        path(base, register.listing, told, name=noun.list_name),
        path(f"{base}add/", register.change, told, name=f"{noun.name}-add"),
        path(f"{base}<int:pk>/", register.detail, told, name=noun.name),
        path(f"{base}<int:pk>/edit/", register.change, told, name=f"{noun.name}-edit"),
    ]
    if noun.remove is not None:
        found.append(path(f"{base}<int:pk>/remove/", register.remove, told, name=f"{noun.name}-remove"))
    return found
