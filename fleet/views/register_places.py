"""The nouns of where the oil is and of who works there: words, columns, form, and who may change it."""

from datetime import datetime
from operator import attrgetter

from django.db.models import Count
from django.urls import reverse

from fleet import people, reservoirs
from fleet.forms.people import PersonForm
from fleet.forms.places import AreaForm, MachineForm, SiteForm
from fleet.forms.reservoirs import AliasForm, ReservoirForm, SamplePointForm
from fleet.models import Area, Machine, Person, Reservoir, ReservoirAlias, Role, SamplePoint, Site
from fleet.views.register_noun import IN_RESERVOIR, ITS_TAG, Column, Noun, Section, known, reservoir_page, words_in


def _history(row: Reservoir) -> str:
    return reverse("reservoir", args=[row.tag])


def _save_reservoir(form: ReservoirForm, by: Person, now: datetime) -> Reservoir:
    also_serves = form.cleaned_data["also_serves"]
    if form.is_new:
        return reservoirs.register(form.instance, also_serves, form.filling(), now)
    return reservoirs.change(form.instance, also_serves, now)


def _save_point(form: SamplePointForm, by: Person, now: datetime) -> SamplePoint:
    return reservoirs.save_point(form.instance, now)


def _save_person(form: PersonForm, by: Person, now: datetime) -> Person:
    return people.save_person(form.person())


SITE = known(
    Noun(
        key="site",
        listed=1,
        many="sites",
        one="site",
        model=Site,
        form=SiteForm,
        write=Role.ADMINISTRATOR,
        intro="A plant with its own clock.",
        rows=lambda: Site.objects.annotate(area_count=Count("areas")).order_by("name"),
        search=words_in("name"),
        columns=(
            Column("Site", attrgetter("name"), sort="name"),
            Column("Clock", attrgetter("time_zone"), sort="time_zone"),
            Column("Areas", attrgetter("area_count"), numeric=True, sort="area_count"),
        ),
        sections=(Section("area", "site"),),
    )
)

AREA = known(
    Noun(
        key="area",
        listed=2,
        many="areas",
        one="area",
        model=Area,
        form=AreaForm,
        intro="A part of the plant that people walk and plan as one.",
        rows=lambda: (
            Area.objects.select_related("site")
            .annotate(
                machine_count=Count("machines", distinct=True), reservoir_count=Count("reservoirs", distinct=True)
            )
            .order_by("site__name", "name")
        ),
        search=words_in("name", "site__name"),
        within={"site": "site"},
        columns=(
            Column("Area", attrgetter("name"), sort="name"),
            Column("Site", attrgetter("site.name"), sort="site__name", about="site"),
            Column("Machines", attrgetter("machine_count"), numeric=True, sort="machine_count"),
            Column("Reservoirs", attrgetter("reservoir_count"), numeric=True, sort="reservoir_count"),
        ),
        sections=(Section("machine", "area"), Section("reservoir", "area")),
    )
)

MACHINE = known(
    Noun(
        key="machine",
        listed=3,
        many="machines",
        one="machine",
        model=Machine,
        form=MachineForm,
        intro="What the oil works for.",
        rows=lambda: (
            Machine.objects.select_related("area")
            .annotate(reservoir_count=Count("reservoirs"))
            .order_by("area__name", "name")
        ),
        search=words_in("name", "tag", "area__name"),
        within={"area": "area"},
        area="area",
        columns=(
            Column("Machine", attrgetter("name"), sort="name"),
            Column("Tag", attrgetter("tag"), sort="tag"),
            Column("Area", attrgetter("area.name"), sort="area__name", about="area"),
            Column("Reservoirs", attrgetter("reservoir_count"), numeric=True, sort="reservoir_count"),
        ),
        more=(
            Column("Maker's requirement", attrgetter("maker_requirement")),
            Column("In service since", attrgetter("started_on")),
        ),
        sections=(Section("reservoir", "machine"),),
    )
)

RESERVOIR = known(
    Noun(
        key="reservoir",
        listed=4,
        many="reservoirs",
        one="reservoir",
        model=Reservoir,
        form=ReservoirForm,
        intro="A body of oil that is sampled and judged as one.",
        rows=lambda: Reservoir.objects.with_place().order_by("machine__name", "name"),
        search=lambda rows, text: rows.finding(text),  # type: ignore[attr-defined]
        within={"area": "area", "machine": "machine", "fluid": "charges__fluid"},
        area="area",
        reservoir_class="reservoir_class",
        save=_save_reservoir,
        columns=(
            Column("Reservoir", str, sort="machine__name"),
            Column("Tag", attrgetter("tag"), sort="tag"),
            Column("Area", attrgetter("area.name"), sort="area__name", about="area"),
            Column("Class", lambda row: row.get_reservoir_class_display(), sort="reservoir_class"),
            Column("Criticality", attrgetter("criticality"), sort="criticality"),
            Column("Volume", attrgetter("volume_l"), numeric=True, sort="volume_l", unit="L"),
            Column("Sampled every", attrgetter("interval_days"), numeric=True, sort="interval_days", unit="days"),
        ),
        more=(
            Column("Its history", lambda row: "samples, trend and forecast", link=_history),
            Column("Pump flow", attrgetter("pump_flow_l_min"), unit="L/min"),
            Column("Working pressure", attrgetter("pressure_bar"), unit="bar"),
            Column("Most sensitive part", attrgetter("sensitive_part")),
            Column("Maker's requirement", attrgetter("machine.maker_requirement")),
            Column("Environment", attrgetter("environment")),
            Column("Cooler", lambda row: row.get_cooler_display()),
            Column("Breather", attrgetter("breather")),
            Column("Hazards", attrgetter("hazards")),
            Column("Also serves", lambda row: ", ".join(map(str, row.also_serves.all())), in_file=False),
            Column("Next planned stop", attrgetter("next_stop_on")),
            Column("Out of use since", attrgetter("retired_on")),
            Column("Notes", attrgetter("notes")),
        ),
        sections=(
            Section("event", "reservoir"),
            Section("charge", "reservoir"),
            Section("position", "reservoir"),
            Section("element", "reservoir", "elements fitted"),
            Section("target", "reservoir", "targets of its own"),
            Section("limit", "reservoir", "limits of its own"),
            Section("point", "reservoir"),
            Section("alias", "reservoir"),
        ),
    )
)

POINT = known(
    Noun(
        key="point",
        listed=5,
        many="sample points",
        one="sample point",
        model=SamplePoint,
        form=SamplePointForm,
        intro="Where the bottle is filled. Trends never mix two points.",
        rows=lambda: SamplePoint.objects.select_related(*IN_RESERVOIR),
        search=words_in("name", "place", "reservoir__tag", "reservoir__name", "reservoir__machine__name"),
        within={"reservoir": "reservoir"},
        area="reservoir__area",
        parent="reservoir",
        save=_save_point,
        columns=(
            Column("Sample point", attrgetter("name"), sort="name"),
            Column(
                "Reservoir",
                attrgetter("reservoir"),
                sort="reservoir__machine__name",
                about="reservoir",
                link=reservoir_page,
            ),
            Column("Where it is", attrgetter("place")),
            Column("Planned", attrgetter("is_default")),
            Column("May be drawn running", attrgetter("may_sample_running")),
            Column("Out of use since", attrgetter("retired_on"), sort="retired_on"),
        ),
        only_csv=(ITS_TAG,),
    )
)

ALIAS = known(
    Noun(
        key="alias",
        many="other names",
        one="other name",
        model=ReservoirAlias,
        form=AliasForm,
        intro="Names that laboratories and old labels still print.",
        rows=lambda: ReservoirAlias.objects.select_related(*IN_RESERVOIR),
        search=words_in("name", "reservoir__tag", "reservoir__name", "reservoir__machine__name"),
        within={"reservoir": "reservoir"},
        parent="reservoir",
        columns=(
            Column("Other name", attrgetter("name"), sort="name"),
            Column(
                "Reservoir",
                attrgetter("reservoir"),
                sort="reservoir__machine__name",
                about="reservoir",
                link=reservoir_page,
            ),
            Column("Used from", attrgetter("valid_from"), sort="valid_from"),
            Column("Used until", attrgetter("valid_to"), sort="valid_to"),
        ),
        only_csv=(ITS_TAG,),
    )
)

PERSON = known(
    Noun(
        key="person",
        listed=14,
        many="people",
        one="person",
        model=Person,
        form=PersonForm,
        write=Role.ADMINISTRATOR,
        read=Role.ADMINISTRATOR,
        intro="Who may log in, and as what.",
        rows=Person.objects.all,
        search=words_in("username", "first_name", "last_name", "email"),
        save=_save_person,
        remove=None,
        columns=(
            Column("Name", str, sort="last_name"),
            Column("Login name", attrgetter("username"), sort="username"),
            Column("Role", lambda row: row.get_role_display(), sort="role"),
            Column("E-mail", attrgetter("email"), sort="email"),
            Column("May log in", attrgetter("is_active"), sort="is_active"),
        ),
        more=(
            Column(
                "Password",
                lambda row: "set a new one",
                link=lambda row: reverse("register-person-password", args=[row.pk]),
            ),
        ),
    )
)

PLACES = (SITE, AREA, MACHINE, RESERVOIR, POINT, ALIAS, PERSON)
