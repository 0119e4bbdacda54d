"""Log a result in Chromium: type, paste, see what it means while typing, save."""

from datetime import timedelta
from typing import TYPE_CHECKING

import pytest
from django.utils import timezone

from fleet.models import Reservoir, Role
from samples.models import Sample
from tests import builders

if TYPE_CHECKING:
    from playwright.sync_api import Page

pytestmark = pytest.mark.browser


@pytest.fixture
def press(browser_page: "Page") -> Reservoir:
    """One reservoir with a sample of 19/17/13 a month ago, and a technician who is logged in."""
    made = builders.reservoir(tag="PR-104")
    builders.reservoir("lube sump", machine="Winder 2", tag="WI-2")
    builders.target(made, "18/16/13")
    builders.sample(made, timezone.now() - timedelta(days=30), {"p4": 3912.0, "p6": 961.0, "p14": 71.0})
    builders.person(Role.TECHNICIAN, username="sand")
    browser_page.goto("/login/?next=/log/")
    browser_page.locator("[name=username]").fill("sand")
    browser_page.locator("[name=password]").fill("a long enough word")
    browser_page.get_by_role("button", name="Log in").click()
    return made


def open_form(page: "Page") -> None:
    page.get_by_label("Reservoir").press_sequentially("press 4", delay=20)
    page.locator("#found").get_by_text("Winder 2").wait_for(state="detached")
    page.get_by_role("link", name="Press 4").click()


def fill_in(page: "Page", pasted: str) -> None:
    page.get_by_label("Drawn", exact=False).first.fill((timezone.now() - timedelta(days=1)).date().isoformat())
    page.get_by_label("Paste a code or counts").fill(pasted)


def test_typing_finds_pasting_shows_and_saving_keeps(browser_page: "Page", press: Reservoir) -> None:
    open_form(browser_page)
    fill_in(browser_page, "217800 84700 6300 /100 ml")
    panel = browser_page.locator("#preview")
    panel.get_by_text("18/17/13", exact=True).wait_for()
    panel.get_by_text("19/17/13", exact=True).wait_for()
    panel.get_by_text("Nothing contradicts this oil’s history.").wait_for()
    browser_page.get_by_role("button", name="Save result").click()
    browser_page.get_by_text("Saved for").wait_for()
    assert Sample.objects.latest("drawn_at").verdict == Sample.Verdict.ACCEPTED


def test_a_unit_that_is_missing_is_asked_for_before_saving(browser_page: "Page", press: Reservoir) -> None:
    open_form(browser_page)
    fill_in(browser_page, "2178 847 63")
    panel = browser_page.locator("#preview")
    panel.get_by_text("Choose what the counts are for").wait_for()
    browser_page.get_by_label("Counts are").select_option("per mL")
    panel.get_by_text("18/17/13", exact=True).wait_for()


def test_a_doubt_appears_while_typing(browser_page: "Page", press: Reservoir) -> None:
    open_form(browser_page)
    fill_in(browser_page, "391 96 7 per mL")
    browser_page.locator("#preview").get_by_text("All counts fell by 3 code steps or more at once.").wait_for()
    assert Sample.objects.count() == 1


def test_enter_checks_and_never_saves(browser_page: "Page", press: Reservoir) -> None:
    open_form(browser_page)
    fill_in(browser_page, "18/17/13")
    browser_page.get_by_label("Bottle label").press("Enter")
    browser_page.wait_for_load_state()
    assert browser_page.get_by_label("Paste a code or counts").input_value() == "18/17/13"
    assert Sample.objects.count() == 1


def test_the_form_fits_a_phone(browser_page: "Page", press: Reservoir) -> None:
    browser_page.set_viewport_size({"width": 360, "height": 740})
    open_form(browser_page)
    fill_in(browser_page, "2178 847 63 per mL")
    browser_page.locator("#preview").get_by_text("18/17/13", exact=True).wait_for()
    assert browser_page.evaluate("document.documentElement.scrollWidth") <= 360
