"""Who may do what."""

from django.contrib.auth.models import AbstractUser
from django.db import models


class Role(models.TextChoices):
    """What a person may do; each role may do everything that the one before it may."""

    READER = "reader", "reader"
    TECHNICIAN = "technician", "technician"
    ENGINEER = "engineer", "engineer"
    ADMINISTRATOR = "administrator", "administrator"

    @property
    def rank(self) -> int:
        return list(Role).index(self)


class Person(AbstractUser):
    """Somebody of the plant: reads the board, draws and logs, judges, or looks after the installation."""

    role = models.CharField(max_length=16, choices=Role, default=Role.READER)

    class Meta:
        ordering = ["first_name", "last_name", "username"]
        constraints = [
            models.CheckConstraint(condition=models.Q(role__in=Role.values), name="person_role_known"),
        ]

    def __str__(self) -> str:
        return self.get_full_name() or self.username

    def may_act_as(self, role: Role) -> bool:
        """Whether this person may do what the role may; who was made by `createsuperuser` may do everything."""
        return self.is_active and (self.is_superuser or Role(self.role).rank >= role.rank)
