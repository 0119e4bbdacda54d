"""Log a result: find the reservoir, see what is wrong before saving, save once."""

from datetime import timedelta

import pytest
from django.test import Client
from django.urls import reverse
from django.utils import timezone

from fleet.models import Person, Reservoir, ReservoirAlias, Role, SamplePoint
from samples.models import Result, Sample
from tests import builders
from tests.samples.scene import client_as, errors_of, everything, published_sets, typed, when

pytestmark = pytest.mark.django_db
LOG = "/log/"


@pytest.fixture
def press() -> Reservoir:
    return builders.reservoir(tag="PR-104")


@pytest.fixture
def client() -> Client:
    return client_as(Role.TECHNICIAN)


def test_a_reader_is_told_what_is_missing() -> None:
    assert client_as(Role.READER).get(LOG).status_code == 403


def test_typing_a_few_letters_finds_by_machine_area_tag_and_other_name(client: Client, press: Reservoir) -> None:
    ReservoirAlias.objects.create(reservoir=press, name="Stamper pack")
    for letters in ("press dri", "PR-1", "hall", "stamper"):
        assert b"PR-104" in client.get(reverse("log-find"), {"q": letters}).content


def test_nothing_found_says_what_to_try(client: Client, press: Reservoir) -> None:
    assert b"Nothing found" in client.get(reverse("log-find"), {"q": "windmill"}).content


def test_a_retired_reservoir_is_not_found(client: Client) -> None:
    builders.reservoir(tag="OLD-1", retired_on=timezone.now().date())
    assert b"OLD-1" not in client.get(reverse("log-find"), {"q": "old"}).content


def test_the_search_works_as_a_plain_form(client: Client, press: Reservoir) -> None:
    builders.reservoir("cooler pack", tag="PR-105")
    assert b"?reservoir=PR-104" in client.get(LOG, {"q": "press"}).content


def test_a_name_that_fits_one_reservoir_opens_the_form_at_once(client: Client, press: Reservoir) -> None:
    builders.reservoir("cooler pack", tag="PR-105")
    assert client.get(LOG, {"q": "drive"})["Location"] == "/log/?reservoir=PR-104"


def test_the_first_field_has_the_keyboard_and_after_a_check_the_panel(client: Client, press: Reservoir) -> None:
    fresh = client.get(LOG, {"reservoir": "PR-104"}).content.decode()
    checked = client.post(LOG, typed(press, then="check", water="140")).content.decode()
    assert '<select name="point" autofocus' in fresh
    assert 'tabindex="-1" autofocus' not in fresh
    assert checked.count("autofocus") == 1
    assert 'tabindex="-1" autofocus' in checked


def test_a_scanned_label_opens_the_form_at_once(client: Client, press: Reservoir) -> None:
    assert client.get(LOG, {"q": "pr-104"})["Location"] == "/log/?reservoir=PR-104"


def test_the_form_shows_the_planned_point_the_last_meter_and_the_new_oil(client: Client, press: Reservoir) -> None:
    builders.sample(press, timezone.now() - timedelta(days=30), {"water": 90}, machine_hours=17961)
    page = client.get(LOG, {"reservoir": "PR-104"}).content.decode()
    assert "SP-1 return line" in page
    assert "last 17,961 on" in page
    assert "new oil 46" in page


def test_an_unknown_tag_in_the_address_offers_the_search(client: Client) -> None:
    assert "carries the tag “NO-1”" in client.get(LOG, {"reservoir": "NO-1"}).content.decode()


@pytest.mark.parametrize("row", published_sets(), ids=lambda row: row["id"])
def test_published_counts_come_out_with_their_published_code(
    client: Client, press: Reservoir, row: dict[str, str]
) -> None:
    counts = {"p4": row["four"], "p6": row["six"], "p14": row["fourteen"]}
    response = client.post(LOG, typed(press, basis="per_ml", counted_ml=row["counted_ml"], **counts), follow=True)
    assert response.resolver_match.url_name == "sample"
    assert f'<p class="big-code">{row["expected"]}</p>' in response.content.decode()


def test_a_pasted_line_of_a_mail_is_understood(client: Client, press: Reservoir) -> None:
    """AWEA RP 508, Figure A: 2178, 847 and 63 per mL make 18/17/13."""
    client.post(LOG, typed(press, paste="Result for the drive pack: 217800 84700 6300 /100 ml, regards"))
    assert [result.value for result in Result.objects.order_by("measurand__position")] == [2178.0, 847.0, 63.0]
    assert {result.reported_unit for result in Result.objects.all()} == {"1/100 mL"}


def test_a_pasted_code_is_kept_as_ranges(client: Client, press: Reservoir) -> None:
    """ISO 4406, Table 1: number 13 is more than 40 and up to 80 per mL."""
    client.post(LOG, typed(press, paste="19/17/13"))
    last = Result.objects.get(measurand__key="p14")
    assert (last.value, last.low, last.high) == (None, 40.0, 80.0)


def test_every_figure_lands_in_its_own_measurand(client: Client, press: Reservoir) -> None:
    figures = {"water": "0.02", "viscosity_40": "45,1", "acid_number": "0.41", "fe": "<1", "zn": "380"}
    client.post(LOG, typed(press, **figures, water_unit="%"))
    found = {result.measurand.key: (result.value, result.high) for result in Result.objects.select_related("measurand")}
    assert found == {
        "water": (200.0, None),
        "viscosity_40": (45.1, None),
        "acid_number": (0.41, None),
        "fe": (None, 1.0),
        "zn": (380.0, None),
    }


def test_the_bottle_is_kept_with_who_entered_it(client: Client, press: Reservoir) -> None:
    lab = builders.laboratory("Fernlab")
    told = {"machine_hours": "18 432", "litres_added": "0", "oil_temperature_c": "52", "running": "yes"}
    client.post(LOG, typed(press, water="140", laboratory=str(lab.pk), lab_number="F-1", label_code="B-9", **told))
    sample = Sample.objects.get()
    assert (sample.machine_hours, sample.litres_added, sample.oil_temperature_c) == (18432, 0, 52)
    assert (sample.running, sample.laboratory, sample.lab_number, sample.label_code) == (True, lab, "F-1", "B-9")
    assert sample.entered_by == Person.objects.get()


def test_the_laboratory_tells_the_volume_where_the_report_does_not(client: Client, press: Reservoir) -> None:
    """ISO 4406, low-count rule: 10 particles counted in 10 mL are fewer than 20, so the number gets a ≥."""
    lab = builders.laboratory("Fernlab", counted_ml=10)
    told = {"p4": "100", "p6": "30", "p14": "1.0", "basis": "per_ml", "laboratory": str(lab.pk)}
    assert "14/12/≥7" in client.post(LOG, typed(press, **told), follow=True).content.decode()


def test_the_outlook_is_asked_for(client: Client, press: Reservoir) -> None:
    client.post(LOG, typed(press, water="140"))
    press.refresh_from_db()
    assert press.standing.wanted_at is not None


def test_save_and_next_goes_back_to_the_search(client: Client, press: Reservoir) -> None:
    response = client.post(LOG, typed(press, then="next", water="140"), follow=True)
    assert response.redirect_chain == [(LOG, 302)]
    assert reverse("reservoir", args=["PR-104"]) in response.content.decode()


def test_a_day_without_a_time_stands_for_noon(client: Client, press: Reservoir) -> None:
    client.post(LOG, typed(press, water="140", drawn_time=""))
    assert Sample.objects.get().drawn_at.strftime("%H:%M") == "12:00"


def test_the_site_clock_is_meant(client: Client) -> None:
    """Vienna is two hours ahead of UTC in July (IANA time zone database)."""
    site = builders.site("Alpine works", time_zone="Europe/Vienna")
    press = builders.reservoir(area=builders.area("Hall", at=site))
    client.post(LOG, typed(press, water="140", drawn_on="2025-07-01", drawn_time="07:40"))
    assert Sample.objects.get().drawn_at.isoformat() == "2025-07-01T05:40:00+00:00"


@pytest.mark.parametrize(
    ("field", "told", "sentence"),
    [
        ("p4", {"p4": "10", "p6": "500", "p14": "7", "basis": "per_ml"}, "higher than that of the smaller one"),
        ("p6", {"p4": "10", "p6": "-5", "basis": "per_ml"}, "below zero"),
        ("p4", {"p4": "many", "basis": "per_ml"}, "is not a number"),
        ("p4", {"p4": "1e15", "basis": "per_ml"}, "do not fit into the oil"),
        ("p4", {"p4": "9e9", "basis": "per_ml"}, "cannot be"),
        ("basis", {"p4": "300", "p6": "50", "p14": "7"}, "1 mL or 100 mL"),
        ("basis", {"p4": "300", "basis": "per_barrel"}, "per mL or per 100 mL"),
        ("basis", {"paste": "3000 500 7"}, "1 mL or 100 mL"),
        ("paste", {"paste": "37/20/15"}, "Code 37 does not exist"),
        ("paste", {"paste": "3000 500 7 per mL", "p4": "9", "p6": "8", "p14": "7", "basis": "per_ml"}, "Clear the one"),
        ("p4", {"p4": "9", "p6": "8", "basis": "per_ml", "microscope": "on"}, "no 4 µm size"),
        ("microscope", {"paste": "19/17/13", "microscope": "on"}, "comes from a counter"),
        ("by_counter", {"paste": "19/17", "microscope": "on", "by_counter": "on"}, "not both"),
        ("water", {"water": "wet"}, "is not a number"),
        ("water", {"water": "101", "water_unit": "%"}, "cannot be"),
        ("water", {"water": "9" * 39}, "beyond any measured value"),
        ("water", {"water": "1\x00"}, "Null characters"),
        ("water_unit", {"water": "140", "water_unit": "mg/L"}, "mg/kg or %"),
        ("water_unit", {"water": "140", "water_unit": ""}, "mg/kg or %"),
        ("viscosity_40", {"viscosity_40": "0"}, "cannot be"),
        ("machine_hours", {"water": "1", "machine_hours": "1e9"}, "is outside"),
        ("litres_added", {"water": "1", "litres_added": "<5"}, "only a bound"),
        ("drawn_on", {"water": "1", "drawn_on": "2099-01-01"}, "still to come"),
        ("drawn_on", {"water": "1", "drawn_on": "31.2.2026"}, "not in the calendar"),
        ("drawn_on", {"water": "1", "drawn_on": ""}, "Give the day"),
        ("drawn_time", {"water": "1", "drawn_time": "25:00"}, "is not a time"),
        ("point", {"water": "1", "point": "999999999999999999999"}, "not a sample point"),
        ("laboratory", {"water": "1", "laboratory": "x"}, "not registered"),
        ("lab_number", {"water": "1", "lab_number": "9" * 61}, "at most 60"),
        ("reservoir", {"water": "1", "reservoir": "NO-1"}, "carries the tag “NO-1”"),
        ("paste", {}, "no result yet"),
    ],
)
def test_bad_input_is_told_at_its_field_and_nothing_is_saved(
    client: Client, press: Reservoir, field: str, told: dict[str, str], sentence: str
) -> None:
    response = client.post(LOG, typed(press) | told)
    assert response.status_code == 422
    assert sentence in errors_of(response)[field]
    assert not any(everything().values())


def test_what_was_typed_is_kept_beside_the_error(client: Client, press: Reservoir) -> None:
    page = client.post(LOG, typed(press, water="wet", lab_number="F-77", remark="smells burnt")).content.decode()
    assert 'value="wet"' in page
    assert 'value="F-77"' in page
    assert "smells burnt" in page
    assert 'href="#id_water"' in page


def test_a_point_of_another_reservoir_is_refused(client: Client, press: Reservoir) -> None:
    other = SamplePoint.objects.get(reservoir=builders.reservoir("cooler pack"))
    assert "point" in errors_of(client.post(LOG, typed(press, water="1", point=str(other.pk))))


def test_an_hour_that_the_clocks_skipped_is_refused(client: Client) -> None:
    """Vienna, 30 March 2025: 02:00 to 03:00 did not exist (IANA time zone database)."""
    press = builders.reservoir(area=builders.area("Hall", at=builders.site("Alpine", time_zone="Europe/Vienna")))
    response = client.post(LOG, typed(press, water="1", drawn_on="2025-03-30", drawn_time="02:30"))
    assert "did not exist" in errors_of(response)["drawn_time"]


def test_a_time_later_today_is_refused(client: Client, press: Reservoir) -> None:
    soon = when(timezone.now() + timedelta(minutes=2))
    response = client.post(LOG, typed(press, water="1", **soon))
    assert "still to come" in str(errors_of(response))


def test_a_second_click_saves_nothing_more_and_says_so(client: Client, press: Reservoir) -> None:
    told = typed(press, paste="19/17/13")
    client.post(LOG, told)
    before = everything()
    assert "on record already" in errors_of(client.post(LOG, told))["drawn_on"]
    assert everything() == before


def test_a_laboratory_number_or_label_is_used_once(client: Client, press: Reservoir) -> None:
    lab = str(builders.laboratory("Fernlab").pk)
    other = builders.reservoir("cooler pack")
    same = when(timezone.now() - timedelta(days=2))
    client.post(LOG, typed(press, **same, water="1", laboratory=lab, lab_number="F-1"))
    response = client.post(LOG, typed(other, **same, water="1", laboratory=lab, lab_number="F-1"))
    assert "laboratory number" in errors_of(response)["lab_number"]


def test_check_only_shows_the_panel_without_script_and_saves_nothing(client: Client, press: Reservoir) -> None:
    builders.target(press, "18/16/13")
    response = client.post(LOG, typed(press, then="check", paste="39120 9610 710 /100 ml"))
    assert response.status_code == 200
    assert '<p class="big-code">16/14/10</p>' in response.content.decode()
    assert not Sample.objects.exists()


def test_the_preview_compares_with_last_time_and_tells_every_doubt(client: Client, press: Reservoir) -> None:
    builders.sample(press, timezone.now() - timedelta(days=30), {"p4": 3912.0, "p6": 961.0, "p14": 71.0})
    panel = client.post(reverse("log-preview"), typed(press, paste="391 96 7.1 per mL")).content.decode()
    assert "16/14/10" in panel
    assert "19/17/13" in panel
    assert "−3 steps" in panel
    assert "All counts fell by 3 code steps or more at once." in panel
    assert not Sample.objects.exclude(drawn_at__lt=timezone.now() - timedelta(days=20)).exists()


def test_the_preview_shows_a_code_before_the_day_is_filled_in(client: Client, press: Reservoir) -> None:
    panel = client.post(reverse("log-preview"), typed(press, paste="19/17/13", drawn_on="")).content.decode()
    assert "19/17/13" in panel
    assert "Fill in when it was drawn" in panel
    assert "Cannot be saved" not in panel


def test_the_preview_survives_an_empty_form(client: Client) -> None:
    assert client.post(reverse("log-preview"), {}).status_code == 200


def test_a_doubtful_sample_is_saved_as_in_doubt(client: Client, press: Reservoir) -> None:
    builders.sample(press, timezone.now() - timedelta(days=30), {"p4": 39.12, "p6": 9.61, "p14": 0.71})
    page = client.post(LOG, typed(press, paste="3912 961 71 per mL"), follow=True).content.decode()
    assert Sample.objects.order_by("-drawn_at")[0].verdict == Sample.Verdict.IN_DOUBT
    assert "a hundred times higher" in page


def test_a_code_beside_other_counts_is_doubted(client: Client, press: Reservoir) -> None:
    """AWEA RP 508, Figure A: the counts make 18/17/13, not 18/16/13."""
    client.post(LOG, typed(press, paste="18/16/13", p4="2178", p6="847", p14="63", basis="per_ml"))
    assert Sample.objects.get().doubts.get().code == "code_disagrees_with_counts"


def test_the_folded_part_stands_open_when_something_is_in_it(client: Client, press: Reservoir) -> None:
    assert '<details class="more">' in client.get(LOG, {"reservoir": "PR-104"}).content.decode()
    assert '<details class="more" open>' in client.post(LOG, typed(press, fe="rusty")).content.decode()


def test_figures_of_a_line_that_were_not_read_are_told(client: Client, press: Reservoir) -> None:
    line = "ISO 4406: 20/18/15, water 250 ppm, visc 31.9, Fe 12 ppm"
    panel = client.post(reverse("log-preview"), typed(press, paste=line)).content.decode()
    assert "Only the code was read from the line. Type the other figures below." in panel


def test_two_numbers_are_read_as_microscope_and_said_to_be(client: Client, press: Reservoir) -> None:
    panel = client.post(reverse("log-preview"), typed(press, paste="19/17")).content.decode()
    assert "Read as a microscope code, 5 and 15 µm." in panel


@pytest.mark.parametrize("pasted", ["19/17", "3900 960 per mL"])
def test_a_counter_without_four_micrometres_can_be_chosen(client: Client, press: Reservoir, pasted: str) -> None:
    client.post(LOG, typed(press, paste=pasted, by_counter="on"))
    assert set(Result.objects.values_list("measurand__key", flat=True)) == {"p6", "p14"}


def test_everything_to_mend_is_counted_and_listed_once(client: Client, press: Reservoir) -> None:
    """What the form refuses and what the checks refuse, on one list."""
    response = client.post(LOG, typed(press, water="101", water_unit="%", acid_number="sour"))
    assert len(response.context["summary"]) == 2
    page = response.content.decode()
    assert "2 things to mend" in page
    assert page.count("Cannot be saved like this.") == 1


def test_a_moment_to_come_is_told_once(client: Client, press: Reservoir) -> None:
    soon = when(timezone.now() + timedelta(minutes=2))
    panel = client.post(reverse("log-preview"), typed(press, water="1", **soon)).content.decode()
    assert panel.count("Cannot be saved like this.") == 1
    assert panel.count("still to come") == 1
