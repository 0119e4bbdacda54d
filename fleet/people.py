"""Who may log in and as what. Somebody must always be left who can let others in."""

from fleet.models import Person, Role
from fleet.refusals import RefusedError, refusing

LAST_ONE = "This is the last active administrator. Make another person administrator first."


def save_person(person: Person) -> Person:
    """Save a person. Two administrators who step down at once come one after the other, and the second is refused."""
    with refusing():
        administrators = Person.objects.filter(role=Role.ADMINISTRATOR, is_active=True)
        could = set(administrators.select_for_update().order_by("pk").values_list("pk", flat=True))
        person.save()
        if could and not administrators.exists():
            raise RefusedError(LAST_ONE, "role" if person.is_active else "is_active", code="last_administrator")
    return person


def names_of_administrators(at_most: int = 3) -> list[str]:
    """Whom to ask for a role, by name."""
    return [str(person) for person in Person.objects.filter(role=Role.ADMINISTRATOR, is_active=True)[:at_most]]
