"""Addresses of the samples app."""

from django.urls import URLPattern, path

from samples.views.reservoir import reservoir

urlpatterns: list[URLPattern] = [
    path("reservoirs/<str:tag>/", reservoir, name="reservoir"),
]
