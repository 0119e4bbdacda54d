"""What a mail says, read as a person would: subject, plain text and HTML."""

from datetime import timedelta

import pytest
from django.core.mail import EmailMultiAlternatives

from alerts import handling, mail
from alerts.models import Delivery, Rule
from fleet.models import Role, Site
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import CLEAN, PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db


def mail_about(**more: object) -> EmailMultiAlternatives:
    press = scene.reservoir(**more)
    scene.subscriber(press)
    for days, p14 in ((200, 28.0), (140, 31.0), (80, 45.0)):
        builders.sample(press, days_ago(days), CLEAN | {"p14": p14})
    scene.arrives(press, days_ago(2), PAST)
    return mail.build(mail.with_everything(Delivery.objects.all()).get())


def both_bodies(message: EmailMultiAlternatives) -> list[str]:
    return [str(message.body), str(message.alternatives[0][0])]


def test_the_subject_says_what_where_how_much_and_when_drawn() -> None:
    assert mail_about().subject == ("Past limit · Press 4 drive pack · ≥14 µm(c) code 16, limit 14 · oil drawn 30 May")


def test_both_bodies_say_the_value_the_limit_and_where_the_limit_is_from() -> None:
    for body in both_bodies(mail_about()):
        assert "≥14 µm(c) code 16, limit 14" in body
        assert "600 per mL; past its limit by 1.9 code steps; limit from: test: plant decision." in body


def test_both_bodies_show_the_three_values_before_with_their_days_and_the_direction() -> None:
    for body in both_bodies(mail_about()):
        assert body.index("13 Mar 2026") < body.index("12 Jan 2026") < body.index("13 Nov 2025")
        assert "up 3.7 code steps on the sample before" in body


def test_both_bodies_say_how_sure_what_next_and_what_to_beware_of() -> None:
    for body in both_bodies(mail_about(hazards="Hot, pressure")):
        assert "The sample is accepted; the trend rests on 4 samples." in body
        assert "Past it since 30 May 2026." in body
        assert "Look at the breather" in body
        assert "Isolate, lock and tag" in body
        assert "injection injury" in body
        assert "Hot oil burns" in body
        assert "Site procedures, local rules and licensed people come first." in body


def test_both_bodies_link_to_the_alert_and_tell_why_it_came_and_how_to_change_that() -> None:
    message = mail_about()
    alert = Delivery.objects.get().alert
    for body in both_bodies(message):
        assert f"http://testserver/alerts/{alert.pk}/" in body
        assert "You asked for mail about every alert at Test works." in body
        assert "http://testserver/account/" in body


def test_a_forecast_says_when_and_how_likely() -> None:
    press = scene.reservoir()
    scene.subscriber(press)
    for days, p14 in ((200, 22.0), (150, 34.0), (100, 52.0), (50, 85.0), (1, 140.0)):
        builders.sample(press, days_ago(days), CLEAN | {"p14": p14})
    scene.judged(press)
    message = mail.build(mail.with_everything(Delivery.objects.all()).get())
    assert message.subject.startswith("Forecast to pass the limit · Press 4 drive pack")
    for body in both_bodies(message):
        assert "80 % range" in body
        assert "Chance of passing before the next planned sample" in body
        assert "The limit is not passed" in body


def test_an_overdue_sample_says_which_day_it_was_planned_for() -> None:
    press = scene.reservoir(interval_days=60)
    scene.arrives(press, days_ago(50), CLEAN)
    Rule.objects.filter(kind="overdue").update(mails=True)
    scene.subscriber(press)
    scene.judged(press, NOON + timedelta(days=20))
    message = mail.build(mail.with_everything(Delivery.objects.all()).get())
    assert "Sample overdue · Press 4 drive pack · Sample due 11 Jun 2026 has not come" in message.subject
    assert "The sample planned for 11 Jun 2026 has not come. The last one was drawn 12 Apr 2026." in str(message.body)


def test_a_demo_site_says_that_it_is_made_up() -> None:
    builders.site(is_demo=True)
    assert all("made up" in body for body in both_bodies(mail_about()))
    Site.objects.update(is_demo=False)
    again = mail.build(mail.with_everything(Delivery.objects.all()).get())
    assert not any("made up" in body for body in both_bodies(again))


def test_an_alert_closed_meanwhile_says_so() -> None:
    mail_about()
    alert = Delivery.objects.get().alert
    handling.close(alert, builders.person(Role.ENGINEER), "false_alarm", "valve grit", NOON)
    message = mail.build(mail.with_everything(Delivery.objects.all()).get())
    assert all("closed meanwhile" in body and "valve grit" in body for body in both_bodies(message))


def test_a_name_cannot_add_a_header_or_markup() -> None:
    message = mail_about(name="pack\r\nBcc: thief@elsewhere.example\n\n<script>alert(1)</script>")
    raw = message.message()
    assert "\n" not in message.subject
    assert raw["Bcc"] is None
    assert message.recipients() == [Delivery.objects.get().address]
    assert "<script>" not in both_bodies(message)[1]


def test_the_same_delivery_has_the_same_message_id_and_one_alert_is_one_thread() -> None:
    message = mail_about()
    again = mail.build(mail.with_everything(Delivery.objects.all()).get())
    assert message.message()["Message-ID"] == again.message()["Message-ID"]
    assert message.message()["Message-ID"].endswith("@testserver>")
    assert message.message()["References"] == mail.thread_id(Delivery.objects.get().alert)


def test_a_very_long_subject_is_cut() -> None:
    press = scene.reservoir(name="n" * 80, machine="m" * 80)
    scene.subscriber(press)
    scene.arrives(press, days_ago(2), PAST)
    assert len(mail.build(mail.with_everything(Delivery.objects.all()).get()).subject) == 200
