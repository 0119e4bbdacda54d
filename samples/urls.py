"""Addresses of the samples app."""

from django.urls import URLPattern

urlpatterns: list[URLPattern] = []
