"""The main job from the first click to the mail, with the real worker, mail server and browser."""

from datetime import timedelta
from typing import TYPE_CHECKING

import pytest
from django.utils import timezone

from alerts.models import Subscription
from fleet.models import Reservoir, Role
from tests import builders
from tests.smtp_sink import SmtpSink
from tests.worker_process import Worker

if TYPE_CHECKING:
    from playwright.sync_api import Page

pytestmark = [pytest.mark.browser, pytest.mark.worker]


def calm_press() -> Reservoir:
    """Ten samples a month apart, close below a limit of 20/18/15."""
    made = builders.reservoir("drive pack", machine="Press 4", tag="PR-104", interval_days=30)
    builders.target(made, "19/17/14")
    builders.limit(made, "20/18/15")
    today = timezone.now()
    for n in range(10):
        wobble = 1 + 0.05 * (-1) ** n
        counts = {"p4": 7000 * wobble, "p6": 1900 * wobble, "p14": 240 * wobble}
        builders.sample(made, today - timedelta(days=30 * (10 - n)), counts)
    return made


def log_in(page: "Page", username: str) -> None:
    page.goto("/login/")
    page.locator("[name=username]").fill(username)
    page.locator("[name=password]").fill("a long enough word")
    page.locator("main button[type=submit]").first.click()


def log_counts(page: "Page", counts: str) -> None:
    page.get_by_role("link", name="Log a result").first.click()
    page.get_by_label("Reservoir").fill("press dri")
    page.get_by_role("link", name="Press 4").click()
    page.locator("[name=drawn_on]").fill(timezone.now().date().isoformat())
    page.locator("[name=drawn_time]").fill("00:00")
    page.locator("[name=laboratory]").select_option(label="Bench counter")
    page.locator("[name=paste]").fill(counts)
    page.locator("#preview").get_by_text("20/18/16").wait_for()
    page.get_by_role("button", name="Save result").click()


def test_a_result_past_the_limit_reaches_board_reservoir_alert_and_mail(
    worker: Worker, smtp_sink: SmtpSink, browser_page: "Page"
) -> None:
    press = calm_press()
    builders.person(Role.TECHNICIAN, username="sand")
    engineer = builders.person(Role.ENGINEER, username="ito")
    Subscription.objects.create(person=engineer, site=press.area.site)
    log_in(browser_page, "sand")
    log_counts(browser_page, "8900 2400 420 per mL")

    browser_page.get_by_role("link", name="Board").click()
    row = browser_page.get_by_role("row").filter(has_text="Press 4")
    row.get_by_text("past limit", exact=True).wait_for()
    row.get_by_role("link", name="Press 4").click()
    browser_page.get_by_text("Past the limit.").wait_for()
    assert "since the sample of" in browser_page.locator(".lead").inner_text()

    worker.wait_until(lambda: bool(smtp_sink.messages))
    worker.wait_idle()
    browser_page.get_by_role("navigation", name="Pages").get_by_role("link", name="Alerts").click()
    browser_page.locator("main").get_by_role("link", name="Press 4").first.wait_for()
    (mail,) = smtp_sink.messages
    assert list(mail.recipients) == [engineer.email]
    assert "code 16, limit 15" in mail.message["Subject"]
    assert "/alerts/" in mail.body()
