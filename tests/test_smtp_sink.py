"""The tests' mail server must itself be trustworthy: it keeps, refuses and stalls as it is told."""

import smtplib

import pytest
from django.core.mail import EmailMultiAlternatives, get_connection, send_mail

from tests.smtp_sink import SmtpSink

PEOPLE = ("plant@siltwatch.test", ["kim@siltwatch.test"])


def test_it_keeps_both_bodies_of_an_accepted_mail(smtp_sink: SmtpSink) -> None:
    mail = EmailMultiAlternatives("Past limit", "as text", *PEOPLE)
    mail.attach_alternative("<p>as page</p>", "text/html")
    mail.send()
    (kept,) = smtp_sink.wait_for(1)
    assert (kept.body().strip(), kept.body("html").strip()) == ("as text", "<p>as page</p>")
    assert kept.recipients == ("kim@siltwatch.test",)


def test_it_refuses_as_often_as_told_and_then_accepts(smtp_sink: SmtpSink) -> None:
    smtp_sink.refuse(1)
    with pytest.raises(smtplib.SMTPDataError, match="451"):
        send_mail("Past limit", "text", *PEOPLE)
    send_mail("Past limit", "text", *PEOPLE)
    assert (len(smtp_sink.messages), smtp_sink.attempts) == (1, 2)


@pytest.mark.parametrize(("stage", "kept"), [("EHLO", 0), ("DATA", 0), ("REPLY", 1)])
def test_it_stalls_where_told(smtp_sink: SmtpSink, stage: str, kept: int) -> None:
    smtp_sink.hold(stage)  # type: ignore[arg-type]  # parametrised text
    with pytest.raises((TimeoutError, smtplib.SMTPException)):
        send_mail("Past limit", "text", *PEOPLE, connection=get_connection(timeout=0.5))
    assert len(smtp_sink.messages) == kept
