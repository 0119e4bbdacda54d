"""Forms of targets and limits."""

from typing import Any, ClassVar

from django.core.exceptions import ValidationError

from fleet.codes import CodeError, parse_target_code
from fleet.forms.base import PlantForm, PlantMeta
from fleet.models import Limit, Machine, Measurand, Reservoir, Scope, Site, Target
from fleet.models.targets import Figure

# What each scope needs beside it; everything else is emptied.
NEEDS: dict[str, tuple[str, ...]] = {
    Scope.PLANT: ("site",),
    Scope.CLASS: ("site", "reservoir_class"),
    Scope.FLUID: ("site", "fluid"),
    Scope.RESERVOIR: ("reservoir",),
}
ABOUT = ("site", "reservoir_class", "fluid", "reservoir")
AGAINST_NEW_OIL = ("viscosity_40", "viscosity_100", "acid_number")
FIELDS = [
    *("scope", "site", "reservoir_class", "fluid", "reservoir", "measurand", "code", "low", "high", "basis"),
    *("valid_from", "source", "reason"),
]


class FigureForm(PlantForm):
    """A target or a limit: whom it is for, the figure, from when, and where it comes from."""

    groups = [
        ("Whom it is for", ["scope", *ABOUT]),
        ("The figure", ["measurand", "code", "low", "high", "basis"]),
        ("Since when and why", ["valid_from", "source", "reason"]),
    ]
    caution = "The equipment maker's figure goes first. Note the document it stands in as the source."
    labels: ClassVar[dict[str, str]] = {"measurand": "what is measured", "valid_from": "valid from"}
    help_texts: ClassVar[dict[str, str]] = {
        "scope": "The nearer figure wins: one reservoir, then one fluid, then one class, then the whole plant.",
        "reservoir_class": "For a figure of one class.",
        "fluid": "For a figure of one fluid.",
        "reservoir": "For a figure of one reservoir.",
        "code": "For cleanliness. Three numbers, 18/16/13; a dash leaves a size out.",
        "high": "In the unit beside the name of what is measured.",
        "valid_from": "Samples drawn earlier stay judged by the figure of their day.",
    }

    def __init__(self, *args: Any, **more: Any) -> None:
        super().__init__(*args, **more)
        measurand = self.chooser("measurand")
        measurand.queryset = Measurand.objects.exclude(kind=Measurand.Kind.COUNT)
        measurand.label_from_instance = _with_unit  # type: ignore[method-assign,assignment]
        self.chooser("reservoir").queryset = Reservoir.objects.select_related("machine")
        only = list(Site.objects.all()[:2])
        if len(only) == 1:
            self.initial.setdefault("site", only[0].pk)
        if self.initial.get("reservoir") and self.instance.pk is None:
            self.initial.setdefault("scope", Scope.RESERVOIR)

    @property
    def maker_requirement(self) -> str:
        """What the maker of the reservoir's machine asks for, when the form was opened for a reservoir."""
        chosen = str(self.initial.get("reservoir") or "")
        machine = Machine.objects.filter(reservoirs=int(chosen)).first() if chosen.isdigit() else None
        return machine.maker_requirement if machine else ""

    def clean_code(self) -> str:
        code = self.cleaned_data["code"]
        try:
            return str(parse_target_code(code)) if code else ""
        except CodeError as error:
            raise ValidationError(error.sentence, code=error.code) from error

    def clean(self) -> dict[str, Any]:
        cleaned = super().clean()
        if scope := cleaned.get("scope"):
            self._fit_scope(scope, cleaned)
        if measurand := cleaned.get("measurand"):
            self._fit_measurand(measurand, cleaned)
        return cleaned

    def _fit_scope(self, scope: str, cleaned: dict[str, Any]) -> None:
        for name in ABOUT:
            if name not in NEEDS[scope]:
                cleaned[name] = "" if name == "reservoir_class" else None
            elif not cleaned.get(name) and name not in self.errors:
                word = Scope(scope).label
                self.add_error(name, ValidationError(f"Choose it: the figure is set for {word}.", code="scope_missing"))

    def _fit_measurand(self, measurand: Measurand, cleaned: dict[str, Any]) -> None:
        sides = [name for name in ("low", "high") if cleaned.get(name) is not None]
        if measurand.kind == Measurand.Kind.CODE:
            if not cleaned.get("code") and "code" not in self.errors:
                self._refuse("code", "Give the code as three numbers, 18/16/13.", "code_missing")
            for name in sides:
                self._refuse(name, "Cleanliness is set by its code; leave this empty.", "side_beside_code")
            return
        if cleaned.get("code"):
            self._refuse("code", f"{measurand.name} has no code; use the two fields below.", "code_not_for_this")
        self._fit_sides(measurand, sides, cleaned)

    def _fit_sides(self, measurand: Measurand, sides: list[str], cleaned: dict[str, Any]) -> None:
        bad_side = {"up": "high", "down": "low"}.get(measurand.direction)
        if bad_side and bad_side not in sides and bad_side not in self.errors:
            self._refuse(bad_side, f"{measurand.name}: {measurand.get_direction_display()}, so fill this in.", "side")
        elif not sides and not {"low", "high"} & set(self.errors):
            self._refuse("high", "Fill in one side or both.", "side")
        if len(sides) == 2 and cleaned["low"] >= cleaned["high"]:
            self._refuse("high", "The upper side must lie above the lower one.", "sides_crossed")
        if cleaned.get("basis") != Figure.Basis.ABSOLUTE and measurand.key not in AGAINST_NEW_OIL:
            self._refuse("basis", f"No new-oil figure is kept for {measurand.name}: choose the value itself.", "basis")

    def _refuse(self, name: str, sentence: str, code: str) -> None:
        self.add_error(name, ValidationError(sentence, code=code))


def _with_unit(measurand: Any) -> str:
    return f"{measurand.name}, {measurand.unit}" if measurand.unit else str(measurand.name)


class TargetForm(FigureForm):
    class Meta(PlantMeta):
        model = Target
        fields = FIELDS
        labels = FigureForm.labels
        help_texts = FigureForm.help_texts


class LimitForm(FigureForm):
    class Meta(PlantMeta):
        model = Limit
        fields = FIELDS
        labels = FigureForm.labels
        help_texts = FigureForm.help_texts
