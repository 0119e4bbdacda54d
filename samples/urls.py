"""Addresses of the samples app."""

from django.urls import URLPattern, path, re_path

from fleet.views.register_paths import noun_paths
from samples.views.laboratories import LABORATORY
from samples.views.log import log, log_find, log_preview
from samples.views.reservoir import reservoir
from samples.views.sample import judge, sample
from samples.views.samples import samples
from samples.views.upload import upload

urlpatterns: list[URLPattern] = [
    re_path(r"^reservoirs/(?P<tag>[\w.: -]{1,40})/$", reservoir, name="reservoir"),
    path("log/", log, name="log"),
    path("log/find/", log_find, name="log-find"),
    path("log/preview/", log_preview, name="log-preview"),
    path("samples/", samples, name="samples"),
    path("samples/upload/", upload, name="upload"),
    path("samples/<int:pk>/", sample, name="sample"),
    path("samples/<int:pk>/judge/", judge, name="sample-judge"),
    *noun_paths(LABORATORY),
]
