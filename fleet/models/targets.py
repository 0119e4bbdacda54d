"""Targets and limits: dated, with their source, set for a plant, a class, a fluid or one reservoir."""

from datetime import date

from django.core.exceptions import ValidationError
from django.db import models
from django.db.models import F, Q

from fleet.codes import CodeError, parse_target_code
from fleet.models.measurands import Measurand
from fleet.models.oil import Fluid
from fleet.models.people import Person
from fleet.models.places import Site
from fleet.models.reservoirs import Reservoir, ReservoirClass
from fleet.querysets import FigureQuerySet


class Scope(models.TextChoices):
    """Whom a figure is for. The nearer one wins: reservoir before fluid before class before plant."""

    PLANT = "plant", "the whole plant"
    CLASS = "class", "one class"
    FLUID = "fluid", "one fluid"
    RESERVOIR = "reservoir", "one reservoir"


SCOPE_COLUMNS = (
    Q(scope="plant", site__isnull=False, reservoir_class="", fluid=None, reservoir=None)
    | (Q(scope="class", site__isnull=False, fluid=None, reservoir=None) & ~Q(reservoir_class=""))
    | Q(scope="fluid", site__isnull=False, fluid__isnull=False, reservoir_class="", reservoir=None)
    | Q(scope="reservoir", reservoir__isnull=False, site=None, reservoir_class="", fluid=None)
)
ONE_FIGURE = (~Q(code="") & Q(low=None, high=None)) | (Q(code="") & (Q(low__isnull=False) | Q(high__isnull=False)))


class Figure(models.Model):
    """What a target and a limit have in common. A sample is judged by the figure valid on the day it was drawn."""

    class Basis(models.TextChoices):
        ABSOLUTE = "absolute", "the value itself"
        PERCENT = "percent", "% change from the new oil"
        CHANGE = "change", "change from the new oil"

    scope = models.CharField("set for", max_length=10, choices=Scope)
    site = models.ForeignKey(Site, on_delete=models.CASCADE, null=True, blank=True, related_name="+")
    reservoir_class = models.CharField("class", max_length=12, choices=ReservoirClass, blank=True)
    fluid = models.ForeignKey(Fluid, on_delete=models.CASCADE, null=True, blank=True, related_name="+")
    reservoir = models.ForeignKey(Reservoir, on_delete=models.CASCADE, null=True, blank=True, related_name="%(class)ss")
    measurand = models.ForeignKey(Measurand, on_delete=models.PROTECT, related_name="+")
    code = models.CharField(
        "ISO 4406 code", max_length=16, blank=True, help_text="Three numbers, 18/16/13. A dash leaves a size out."
    )
    low = models.FloatField("not below", null=True, blank=True)
    high = models.FloatField("not above", null=True, blank=True)
    basis = models.CharField("figure is", max_length=10, choices=Basis, default=Basis.ABSOLUTE)
    valid_from = models.DateField("from")
    source = models.CharField(
        max_length=200, help_text="Where the figure comes from: the maker's manual, a standard, a decision."
    )
    reason = models.CharField("why", max_length=200, blank=True)
    author = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    entered_at = models.DateTimeField(auto_now_add=True)

    objects = FigureQuerySet.as_manager()

    class Meta:
        abstract = True
        ordering = ["measurand", "-valid_from"]

    def __str__(self) -> str:
        return self.text

    @property
    def text(self) -> str:
        """The figure as a person writes it: 18/16/13, at most 200 mg/kg, −10 to 10 % of new."""
        one_sided = "" if self.code or (self.low is not None and self.high is not None) else self._side_word
        return f"{one_sided} {self.amount}".strip()

    @property
    def amount(self) -> str:
        """The same without the word for its side: 200 mg/kg."""
        unit = {"percent": "% of new", "change": f"{self.measurand.unit} over new"}.get(self.basis, self.measurand.unit)
        return self.code or f"{self.numbers} {unit}".strip()

    @property
    def numbers(self) -> str:
        """The bare numbers, for a column that has its unit at the head; a percentage keeps its sign."""
        if self.code:
            return self.code
        sides = [f"{side:g}".replace("-", "\N{MINUS SIGN}") for side in (self.low, self.high) if side is not None]
        return " to ".join(sides)

    @property
    def _side_word(self) -> str:
        return "at most" if self.high is not None else "at least"

    def clean(self) -> None:
        if self.code:
            try:
                self.code = str(parse_target_code(self.code))
            except CodeError as error:
                raise ValidationError({"code": ValidationError(str(error), code=error.code)}) from error
        if self.low is not None and self.high is not None and self.low >= self.high:
            crossed = ValidationError("The upper side must lie above the lower one.", code="sides_crossed")
            raise ValidationError({"high": crossed})

    def is_valid_on(self, day: date) -> bool:
        return self.valid_from <= day


def figure_constraints(name: str) -> list[models.BaseConstraint]:
    """The rules both tables hold in the database."""
    return [
        models.CheckConstraint(condition=SCOPE_COLUMNS, name=f"{name}_scope_columns"),
        models.CheckConstraint(condition=ONE_FIGURE, name=f"{name}_one_figure"),
        models.CheckConstraint(
            condition=Q(low=None) | Q(high=None) | Q(low__lt=F("high")), name=f"{name}_sides_in_order"
        ),
        models.CheckConstraint(condition=~Q(source=""), name=f"{name}_has_source"),
        models.UniqueConstraint(
            fields=["scope", "site", "reservoir_class", "fluid", "reservoir", "measurand", "valid_from"],
            nulls_distinct=False,
            name=f"{name}_once_a_day",
        ),
    ]


class Target(Figure):
    """What the team wants to hold."""

    class Meta(Figure.Meta):
        abstract = False
        constraints = figure_constraints("target")


class Limit(Figure):
    """Act now."""

    class Meta(Figure.Meta):
        abstract = False
        constraints = figure_constraints("limit")
