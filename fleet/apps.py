"""Django's entry for the fleet app."""

from django.apps import AppConfig


class FleetConfig(AppConfig):
    name = "fleet"
