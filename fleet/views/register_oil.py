"""The nouns of the oil, its filters and its figures: words, columns, form, and who may change it."""

from datetime import datetime
from operator import attrgetter
from typing import Any

from django.db.models import Count, F, Q

from fleet import events, filters_fitted, reservoirs, targets
from fleet.forms.figures import LimitForm, TargetForm
from fleet.forms.filters import ElementForm, PositionForm
from fleet.forms.oil import ChargeForm, EventForm, FluidForm
from fleet.models import Element, Event, FilterPosition, Fluid, Limit, OilCharge, Person, Role, Scope, Site, Target
from fleet.models.targets import Figure
from fleet.views.register_noun import IN_RESERVOIR, ITS_TAG, Column, Noun, Section, known, reservoir_page, words_in


def _at(moment: datetime | None, site: Site) -> datetime | None:
    return moment and moment.astimezone(site.zone)


def _save_fluid(form: FluidForm, by: Person, now: datetime) -> Fluid:
    return reservoirs.save_fluid(form.instance, now)


def _save_charge(form: ChargeForm, by: Person, now: datetime) -> OilCharge:
    return reservoirs.save_charge(form.instance, now)


def _save_event(form: EventForm, by: Person, now: datetime) -> Event:
    if form.instance.pk is not None:
        return events.correct(form.instance, now)
    form.instance.entered_by = by
    return events.log(form.instance, now)


def _save_element(form: ElementForm, by: Person, now: datetime) -> Element:
    if form.is_new:
        return filters_fitted.fit(form.instance, form.cleaned_data["found"], by, now)
    return filters_fitted.correct(form.instance, now)


def _save_figure(form: TargetForm | LimitForm, by: Person, now: datetime) -> Figure:
    return targets.set_figure(form.instance, by, now)


FLUID = known(
    Noun(
        key="fluid",
        listed=6,
        many="fluids",
        one="fluid",
        model=Fluid,
        form=FluidForm,
        intro="Oils as bought, with what new oil measures.",
        rows=lambda: Fluid.objects.annotate(in_use=Count("charges", filter=Q(charges__ended_at=None))).order_by("name"),
        search=words_in("name", "kind"),
        save=_save_fluid,
        columns=(
            Column("Fluid", attrgetter("name"), sort="name"),
            Column("Kind", attrgetter("kind"), sort="kind"),
            Column("ISO VG", attrgetter("viscosity_grade"), numeric=True, sort="viscosity_grade"),
            Column("Viscosity at 40 °C", attrgetter("viscosity_40"), numeric=True, sort="viscosity_40", unit="mm²/s"),
            Column(
                "Acid number of new oil", attrgetter("acid_number"), numeric=True, sort="acid_number", unit="mg KOH/g"
            ),
            Column("Reservoirs", attrgetter("in_use"), numeric=True, sort="in_use"),
        ),
        more=(
            Column("Viscosity at 100 °C", attrgetter("viscosity_100"), unit="mm²/s"),
            Column("Density at 15 °C", attrgetter("density_kg_l"), unit="kg/L"),
            Column("Notes", attrgetter("notes")),
        ),
        sections=(Section("charge", "fluid"),),
    )
)

CHARGE = known(
    Noun(
        key="charge",
        listed=7,
        many="oil charges",
        one="oil charge",
        model=OilCharge,
        form=ChargeForm,
        intro="Each filling of a reservoir. An oil change, logged as an event, ends one and begins the next.",
        rows=lambda: OilCharge.objects.select_related("fluid", *IN_RESERVOIR).order_by("-started_at", "pk"),
        search=words_in("fluid__name", "reservoir__tag", "reservoir__name", "reservoir__machine__name"),
        within={"reservoir": "reservoir", "fluid": "fluid"},
        area="reservoir__area",
        reservoir_class="reservoir__reservoir_class",
        parent="reservoir",
        save=_save_charge,
        remove=None,
        columns=(
            Column("Oil", attrgetter("fluid.name"), sort="fluid__name"),
            Column(
                "Reservoir",
                attrgetter("reservoir"),
                sort="reservoir__machine__name",
                about="reservoir",
                link=reservoir_page,
            ),
            Column("Filled in", lambda row: _at(row.started_at, row.reservoir.area.site), sort="started_at"),
            Column("Until", lambda row: _at(row.ended_at, row.reservoir.area.site), sort="ended_at"),
            Column("Volume", attrgetter("volume_l"), numeric=True, sort="volume_l", unit="L"),
        ),
        only_csv=(ITS_TAG,),
    )
)

EVENT = known(
    Noun(
        key="event",
        listed=8,
        many="events",
        one="event",
        add="Log",
        model=Event,
        form=EventForm,
        write=Role.TECHNICIAN,
        intro="What was done to the oil. Charts mark each, and slopes respect the ones that break them.",
        rows=lambda: Event.objects.select_related("fluid", "entered_by", *IN_RESERVOIR).order_by("-at", "pk"),
        search=words_in("note", "reservoir__tag", "reservoir__name", "reservoir__machine__name"),
        within={"reservoir": "reservoir"},
        area="reservoir__area",
        reservoir_class="reservoir__reservoir_class",
        parent="reservoir",
        save=_save_event,
        remove=events.remove,
        remove_note="If an oil change is removed, the oil before it counts as having gone on.",
        columns=(
            Column("Event", lambda row: row.get_kind_display(), sort="kind"),
            Column(
                "Reservoir",
                attrgetter("reservoir"),
                sort="reservoir__machine__name",
                about="reservoir",
                link=reservoir_page,
            ),
            Column("When", lambda row: _at(row.at, row.reservoir.area.site), sort="at"),
            Column("Oil filled in", attrgetter("litres"), numeric=True, sort="litres", unit="L"),
            Column("Note", attrgetter("note")),
            Column("By", attrgetter("entered_by"), sort="entered_by__last_name"),
        ),
        only_csv=(ITS_TAG,),
        more=(
            Column("Until", lambda row: _at(row.ended_at, row.reservoir.area.site)),
            Column("Oil", attrgetter("fluid")),
            Column("Flow of the offline filter", attrgetter("flow_l_min"), unit="L/min"),
            Column("Machine hours", attrgetter("machine_hours"), unit="h"),
        ),
    )
)

POSITION = known(
    Noun(
        key="position",
        listed=9,
        many="filter positions",
        one="filter position",
        model=FilterPosition,
        form=PositionForm,
        intro="Places in the circuit that hold a filter, a strainer or a breather.",
        rows=lambda: FilterPosition.objects.select_related(*IN_RESERVOIR),
        search=words_in("name", "reservoir__tag", "reservoir__name", "reservoir__machine__name"),
        within={"reservoir": "reservoir"},
        area="reservoir__area",
        parent="reservoir",
        columns=(
            Column("Position", attrgetter("name"), sort="name"),
            Column(
                "Reservoir",
                attrgetter("reservoir"),
                sort="reservoir__machine__name",
                about="reservoir",
                link=reservoir_page,
            ),
            Column("Place", lambda row: row.get_place_display(), sort="place"),
            Column("Flow", attrgetter("flow_l_min"), numeric=True, sort="flow_l_min", unit="L/min"),
            Column("Whole flow", attrgetter("full_flow")),
            Column("Bypass", attrgetter("has_bypass")),
        ),
        more=(Column("Δp when clean", attrgetter("clean_dp_bar"), unit="bar"),),
        only_csv=(ITS_TAG,),
        sections=(Section("element", "position"),),
    )
)

ELEMENT = known(
    Noun(
        key="element",
        listed=10,
        many="elements",
        one="element",
        add="Fit",
        model=Element,
        form=ElementForm,
        write=Role.TECHNICIAN,
        intro="What was fitted where, from when to when. Fitting a new one takes the old one out.",
        rows=lambda: Element.objects.select_related(
            "position__reservoir__machine", "position__reservoir__area__site"
        ).order_by("-fitted_on", "pk"),
        search=words_in("part", "position__reservoir__tag", "position__reservoir__name", "position__name"),
        within={"position": "position", "reservoir": "position__reservoir"},
        area="position__reservoir__area",
        parent="position",
        save=_save_element,
        columns=(
            Column("Element", str, sort="part"),
            Column(
                "Position",
                lambda row: f"{row.position.reservoir}, {row.position.name}",
                sort="position__name",
                about="position",
            ),
            Column("Rating", attrgetter("rating")),
            Column("Fitted", attrgetter("fitted_on"), sort="fitted_on"),
            Column("Removed", attrgetter("removed_on"), sort="removed_on"),
        ),
        only_csv=(
            Column("Tag", attrgetter("position.reservoir.tag")),
            Column("Kind of rating", lambda row: row.get_rating_kind_display()),
            Column("Beta ratio", attrgetter("beta")),
            Column("Beta ratio at", attrgetter("beta_size_um"), unit="µm(c)"),
            Column("Rating size", attrgetter("rating_um"), unit="µm"),
        ),
        more=(Column("Why removed, and what was found", attrgetter("removal_note")),),
    )
)


def _whom(figure: Figure) -> str:
    """Whom a figure is for, in words."""
    if figure.scope == Scope.RESERVOIR:
        return str(figure.reservoir)
    part = {Scope.CLASS: figure.get_reservoir_class_display(), Scope.FLUID: figure.fluid}.get(Scope(figure.scope))
    return f"{figure.site}: {part}" if part else f"{figure.site}: the whole plant"


def _figure_unit(figure: Figure) -> str:
    """The unit of the bare numbers; a code has none."""
    if figure.code:
        return ""
    return "%" if figure.basis == Figure.Basis.PERCENT else figure.measurand.unit


# A figure taken apart, so that a spreadsheet can reckon with it and send it back.
FIGURE_KEYS = (
    Column("Code", attrgetter("code")),
    Column("Not below", attrgetter("low")),
    Column("Not above", attrgetter("high")),
    Column("Unit", _figure_unit),
    Column("Figure is", lambda row: row.get_basis_display()),
    Column("Set for", lambda row: row.get_scope_display()),
    Column("Site", attrgetter("site")),
    Column("Class", lambda row: row.get_reservoir_class_display()),
    Column("Fluid", attrgetter("fluid")),
    Column("Tag", lambda row: row.reservoir.tag if row.reservoir else None),
)


def _figure_noun(key: str, listed: int, model: type[Target] | type[Limit], form: Any, intro: str) -> Noun:
    return Noun(
        key=key,
        listed=listed,
        many=f"{key}s",
        one=key,
        add="Set",
        model=model,
        form=form,
        intro=intro,
        rows=lambda: model.objects.select_related(
            "measurand", "site", "fluid", "reservoir__machine", "author"
        ).order_by(F("valid_from").desc(), "pk"),
        search=words_in("measurand__name", "source", "reservoir__tag", "reservoir__name", "fluid__name"),
        within={"reservoir": "reservoir"},
        reservoir_class="reservoir_class",
        save=_save_figure,
        remove=targets.withdraw,
        edit_note=(
            f"Correct only a slip: a correction changes how old samples are judged. "
            f"For a new figure from a day on, add a {key} instead; the old one stays on record."
        ),
        columns=(
            Column("Measurand", attrgetter("measurand.name"), sort="measurand__position"),
            Column("Figure", attrgetter("text")),
            Column("For", _whom, sort="scope", about="reservoir"),
            Column("From", attrgetter("valid_from"), sort="valid_from"),
            Column("Source", attrgetter("source"), sort="source"),
        ),
        only_csv=FIGURE_KEYS,
        more=(
            Column("Why", attrgetter("reason")),
            Column("Set by", attrgetter("author")),
        ),
    )


TARGET = known(
    _figure_noun("target", 11, Target, TargetForm, "What the team wants to hold. The maker's figure goes first.")
)
LIMIT = known(_figure_noun("limit", 12, Limit, LimitForm, "Past it, act now. The maker's figure goes first."))

OIL = (FLUID, CHARGE, EVENT, POSITION, ELEMENT, TARGET, LIMIT)
