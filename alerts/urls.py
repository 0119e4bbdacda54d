"""Addresses of the alerts app."""

from django.urls import URLPattern

urlpatterns: list[URLPattern] = []
