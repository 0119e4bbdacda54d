"""Django's entry for the alerts app."""

from django.apps import AppConfig


class AlertsConfig(AppConfig):
    name = "alerts"
