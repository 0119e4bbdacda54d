"""Addresses of the samples app."""

from django.urls import URLPattern, path

from fleet.views.register_paths import noun_paths
from samples.views.laboratories import LABORATORY
from samples.views.reservoir import reservoir

urlpatterns: list[URLPattern] = [
    path("reservoirs/<str:tag>/", reservoir, name="reservoir"),
    *noun_paths(LABORATORY),
]
