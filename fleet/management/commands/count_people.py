"""`manage.py count_people`: how many may log in; 0 says that the first person is still to be added."""

from typing import Any

from django.core.management.base import BaseCommand

from fleet.models import Person


class Command(BaseCommand):
    help = "Print how many people may log in."

    def handle(self, *args: Any, **options: Any) -> None:
        self.stdout.write(str(Person.objects.filter(is_active=True).count()))
