"""Adds somebody who may log in: how the first administrator of an installation comes to be."""

import getpass
import os
from argparse import ArgumentParser
from typing import Any

from django.contrib.auth.password_validation import validate_password
from django.core.exceptions import ValidationError
from django.core.management.base import BaseCommand, CommandError

from fleet.models import Person, Role
from fleet.people import save_person
from fleet.refusals import RefusedError

NO_TERMINAL = (
    "There is no terminal to ask for the password at: put it into a variable and use --password-from VARIABLE."
)


class Command(BaseCommand):
    help = "Add a person. The password is asked for, or taken from the variable that --password-from names."

    def add_arguments(self, parser: ArgumentParser) -> None:
        parser.add_argument("username")
        parser.add_argument("--role", choices=Role.values, default=Role.ADMINISTRATOR)
        parser.add_argument("--email", default="")
        parser.add_argument("--password-from", metavar="VARIABLE", default="")

    def handle(self, *args: Any, **options: Any) -> None:
        person = Person(username=options["username"], role=options["role"], email=options["email"])
        password = self._password(options["password_from"])
        try:
            validate_password(password, person)
            person.set_password(password)
            person.full_clean()
            save_person(person)
        except ValidationError as error:
            raise CommandError(" ".join(error.messages)) from error
        except RefusedError as refusal:
            raise CommandError(refusal.sentence) from refusal
        self.stdout.write(f"{person.username} may log in as {person.get_role_display()}.")

    def _password(self, variable: str) -> str:
        if variable:
            if not os.environ.get(variable):
                raise CommandError(f"The variable {variable} holds no password.")
            return os.environ[variable]
        try:
            return getpass.getpass("Password: ")
        except EOFError as error:
            raise CommandError(NO_TERMINAL) from error
