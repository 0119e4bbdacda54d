"""Forms of people: an administrator's for anybody, and each person's own."""

from typing import Any

from django import forms
from django.contrib.auth.forms import AuthenticationForm
from django.contrib.auth.password_validation import password_validators_help_texts, validate_password
from django.core.exceptions import ValidationError

from fleet.forms.base import PlantForm, PlantMeta
from fleet.models import Person

ROLES = (
    "A reader looks; a technician also logs; an engineer also judges and sets figures; "
    "an administrator also looks after people and sites."
)


class PersonForm(PlantForm):
    """A person as an administrator sees them. A new one gets a first password, to be changed at the account page."""

    password = forms.CharField(
        label="first password",
        strip=False,
        widget=forms.PasswordInput(attrs={"autocomplete": "new-password"}),
        help_text=" ".join(password_validators_help_texts()),
    )

    class Meta(PlantMeta):
        model = Person
        fields = ["username", "first_name", "last_name", "email", "role", "is_active"]
        labels = {"username": "login name", "email": "e-mail", "is_active": "may log in"}
        help_texts = {
            "username": "Letters, digits and @ . + - _",
            "role": ROLES,
            "is_active": "Leave people on record; without this tick they cannot log in.",
        }
        error_messages = {
            "username": {
                "invalid": "Letters, digits and @ . + - _ only, without a space.",
                "unique": "Somebody logs in by this name already. Choose another.",
            }
        }

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        if self.instance.pk is not None:
            del self.fields["password"]

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        if cleaned.get("password"):
            probe = Person(**{name: cleaned.get(name, "") for name in ("username", "first_name", "last_name", "email")})
            try:
                validate_password(cleaned["password"], probe)
            except ValidationError as error:
                self.add_error("password", error)
        return cleaned

    def person(self) -> Person:
        """The person to save, with the first password set when they are new."""
        person: Person = self.instance
        if password := self.cleaned_data.get("password"):
            person.set_password(password)
        return person


class LoginForm(AuthenticationForm):
    error_messages = {
        **AuthenticationForm.error_messages,
        "invalid_login": "That login name and password do not go together. Both mind capital letters.",
    }

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        self.fields["username"].label = "login name"


class AccountForm(PlantForm):
    class Meta(PlantMeta):
        model = Person
        fields = ["first_name", "last_name", "email"]
        labels = {"email": "e-mail"}
        help_texts = {"email": "Mail about alerts goes here."}
