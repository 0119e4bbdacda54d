"""Addresses of the alerts app."""

from django.urls import path

from alerts.views import alerts, mail_choices, rules

urlpatterns = [
    path("alerts/", alerts.alerts, name="alerts"),
    path("alerts/rules/", rules.rules, name="rules"),
    path("alerts/<int:pk>/", alerts.alert, name="alert"),
    path("alerts/<int:pk>/acknowledge/", alerts.acknowledge, name="alert-acknowledge"),
    path("alerts/<int:pk>/close/", alerts.close, name="alert-close"),
    path("account/mail/add/", mail_choices.add, name="mail-choice-add"),
    path("account/mail/<int:pk>/remove/", mail_choices.remove, name="mail-choice-remove"),
]
