"""Every address of the site: each app brings its own."""

from django.urls import include, path

from config.health import healthz

urlpatterns = [
    path("healthz/", healthz, name="healthz"),
    path("", include("fleet.urls")),
    path("", include("samples.urls")),
    path("", include("alerts.urls")),
]
