"""`manage.py demo`: load the invented mill, or tell who can log in to it."""

from argparse import ArgumentParser
from typing import Any

from django.core.management.base import BaseCommand, CommandError
from django.utils import timezone

from alerts.demo import load_demo, logins
from fleet.models import Site
from samples.demo.load import NotEmptyError, is_loaded


class Command(BaseCommand):
    help = "Load Fernhollow Board Mill, an invented plant, into an empty database. It is never mixed with real data."

    def add_arguments(self, parser: ArgumentParser) -> None:
        parser.add_argument("--if-empty", action="store_true", help="do nothing, quietly, when any plant is registered")
        parser.add_argument("--logins", action="store_true", help="print who can log in to the demo, and load nothing")

    def handle(self, *args: Any, **options: Any) -> None:
        if options["logins"]:
            self._print_logins()
        elif options["if_empty"] and Site.objects.exists():
            return
        elif is_loaded():
            self.stdout.write("The demo is loaded already.")
        else:
            self._load()

    def _load(self) -> None:
        try:
            site = load_demo(timezone.now())
        except NotEmptyError as error:
            raise CommandError(str(error)) from error
        self.stdout.write(f"Loaded {site.name}. Everything in it is made up.")

    def _print_logins(self) -> None:
        if is_loaded():
            self.stdout.write("\n".join(logins()))
