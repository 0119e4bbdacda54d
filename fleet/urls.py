"""Addresses of the fleet app."""

from django.contrib.auth.views import LogoutView
from django.urls import URLPattern, path

from fleet.views import accounts, register
from fleet.views.board import board
from fleet.views.register_oil import OIL
from fleet.views.register_paths import noun_paths
from fleet.views.register_places import PLACES

urlpatterns: list[URLPattern] = [
    path("", board, name="board"),
    path("login/", accounts.Login.as_view(), name="login"),
    path("logout/", LogoutView.as_view(), name="logout"),
    path("account/", accounts.account, name="account"),
    path("account/password/", accounts.password, name="account-password"),
    path("register/people/<int:pk>/password/", accounts.person_password, name="register-person-password"),
    path("register/", register.overview, name="register"),
    *(pattern for noun in (*PLACES, *OIL) for pattern in noun_paths(noun)),
]
