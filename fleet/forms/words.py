"""What a field says when it is not filled in as it should be: short, and what to do."""

from typing import Final

from django import forms

NOT_OFFERED: Final = "That is not on the list. Choose one that is offered."
# By the kind of field and the code of the fault; the later line wins.
WORDS: Final[tuple[tuple[type[forms.Field], dict[str, str]], ...]] = (
    (
        forms.Field,
        {
            "required": "Fill this in.",
            "min_value": "Must be %(limit_value)s or more.",
            "max_value": "Must be %(limit_value)s or less.",
            "max_length": "At most %(limit_value)d characters fit; these are %(show_value)d.",
            "unique": "This is taken already. Choose another.",
        },
    ),
    (forms.ChoiceField, {"required": "Choose one.", "invalid_choice": NOT_OFFERED}),
    (forms.ModelMultipleChoiceField, {"invalid_pk_value": NOT_OFFERED}),
    (forms.IntegerField, {"invalid": "Give a whole number."}),
    (forms.FloatField, {"invalid": "Give a number."}),
    (forms.DateField, {"invalid": "Give a day, for example 2026-03-01."}),
    (forms.EmailField, {"invalid": "Write the address like name@plant.example."}),
)


def speak_plainly(form: forms.BaseForm) -> None:
    """Give every field of a form this program's sentences; a sentence that was chosen for a field stays."""
    for field in form.fields.values():
        usual = _usual(type(field))
        for code, sentence in _own(field).items():
            if field.error_messages.get(code) in (None, usual.get(code)):
                field.error_messages[code] = sentence


def _own(field: forms.Field) -> dict[str, str]:
    return {code: said for kind, words in WORDS if isinstance(field, kind) for code, said in words.items()}


def _usual(kind: type[forms.Field]) -> dict[str, object]:
    """What the kind of field would say of itself."""
    found: dict[str, object] = {}
    for step in reversed(kind.__mro__):
        found |= getattr(step, "default_error_messages", {})
    return found
