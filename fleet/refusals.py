"""What the database refuses, said in plain words: which field, what is wrong, what to do."""

from collections.abc import Iterator
from contextlib import contextmanager

from django.db import IntegrityError, transaction
from django.db.models import ProtectedError

# Constraint name → field it shows at, and the sentence.
SENTENCES: dict[str, tuple[str, str]] = {
    "area_once_a_site": ("name", "This site has an area of that name already. Choose another name."),
    "machine_once_an_area": ("name", "This area has a machine of that name already. Choose another name."),
    "machine_tag_once": ("tag", "Another machine carries this tag. A tag is used once."),
    "reservoir_once_a_machine": ("name", "This machine has a reservoir of that name already. Choose another name."),
    "reservoir_tag_once_any_case": (
        "tag",
        "Another reservoir carries this tag, perhaps with other capital letters. Choose another tag.",
    ),
    "reservoir_tag_printable": ("tag", "A tag is printed and typed: letters, digits, spaces and . - _ : only."),
    "reservoir_volume_positive": ("volume_l", "The volume must be more than 0 L."),
    "reservoir_interval_positive": ("interval_days", "There must be at least one day between samples."),
    "alias_once_a_reservoir": ("name", "This reservoir has that other name already."),
    "alias_span_forward": ("valid_to", "The name must end after it begins."),
    "point_once_a_reservoir": ("name", "This reservoir has a sample point of that name already."),
    "point_one_planned": ("is_default", "This reservoir has a planned sample point already."),
    "charge_span_forward": (
        "",
        "An oil change must lie between the one before it and the one after it. Check the time.",
    ),
    "charge_no_overlap": ("", "Another filling of this reservoir covers that time. Check the time."),
    "event_span_forward": ("ended_at", "It cannot end before it began."),
    "event_litres_not_negative": ("litres", "Litres cannot be negative."),
    "event_once_a_moment": (
        "at",
        "This is logged already for that moment. If there were two, give the second its own time.",
    ),
    "filter_position_once": ("name", "This reservoir has a filter position of that name already."),
    "element_span_forward": ("removed_on", "It cannot be removed before it was fitted."),
    "element_beta_with_size": ("beta_size_um", "A beta ratio needs its size, and a size its beta ratio: fill in both."),
    "element_beta_rating_has_beta": ("beta", "Give the beta ratio and its size, or choose another kind of rating."),
    "element_no_overlap": ("fitted_on", "Another element was in this position on that day. Check the day."),
    "laboratory_counted_positive": ("counted_ml", "The volume counted must be more than 0 mL."),
}
for _table in ("target", "limit"):
    SENTENCES |= {
        f"{_table}_once_a_day": ("valid_from", f"The same {_table} is set from that day already: correct that one."),
        f"{_table}_sides_in_order": ("high", "The upper side must lie above the lower one."),
        f"{_table}_one_figure": ("", "Give a code, or a lower or upper figure, but not both."),
        f"{_table}_scope_columns": ("scope", "What it is set for and the choice below it do not fit."),
        f"{_table}_has_source": ("source", "Say where the figure comes from."),
    }
for _name in ("area_once_a_site", "machine_once_an_area", "machine_tag_once"):
    SENTENCES[f"{_name}_any_case"] = SENTENCES[_name]
FALLBACK = "This would contradict what is on record already. Reload the page and look again."


class RefusedError(Exception):
    """A change that must not be made. `field` is where it shows, or empty; the sentence says what to do."""

    def __init__(self, sentence: str, field: str = "", code: str = "refused") -> None:
        super().__init__(sentence)
        self.sentence = sentence
        self.field = field
        self.code = code


def refusal_of(error: IntegrityError) -> RefusedError:
    """The plain words for what PostgreSQL said."""
    diag = getattr(error.__cause__, "diag", None)
    name = getattr(diag, "constraint_name", None) or ""
    field, sentence = SENTENCES.get(name, ("", FALLBACK))
    return RefusedError(sentence, field, code=name or "refused")


@contextmanager
def refusing() -> Iterator[None]:
    """One transaction; what it breaks comes out as `RefusedError`, and nothing is saved."""
    try:
        with transaction.atomic():
            yield
    except ProtectedError as error:
        kinds = sorted({str(row._meta.verbose_name) for row in error.protected_objects})
        raise RefusedError(
            f"It is still used by {_records(len(error.protected_objects))} ({', '.join(kinds)}), so it stays.",
            code="still_used",
        ) from error
    except IntegrityError as error:
        raise refusal_of(error) from error


def _records(count: int) -> str:
    return "1 other record" if count == 1 else f"{count} other records"
