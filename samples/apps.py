"""Django's entry for the samples app."""

from django.apps import AppConfig


class SamplesConfig(AppConfig):
    name = "samples"
