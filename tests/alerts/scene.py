"""A reservoir with a target of 18/16/13 and a limit of 19/17/14, and a way to let a bottle arrive and be judged."""

from datetime import datetime
from typing import Any

from alerts import evaluation
from alerts.models import Alert, Subscription
from fleet.models import Person, Reservoir, Standing
from samples.models import Sample
from samples.outlooks import refresh_outlook
from tests import builders
from tests.builders import NOON

# Particles per mL at ≥4, ≥6 and ≥14 µm(c): well within target, over it, and past the limit.
CLEAN = {"p4": 1000.0, "p6": 300.0, "p14": 30.0}
OVER = {"p4": 1000.0, "p6": 300.0, "p14": 100.0}
PAST = {"p4": 1000.0, "p6": 300.0, "p14": 600.0}


def reservoir(**more: Any) -> Reservoir:
    made = builders.reservoir(**more)
    builders.target(made, "18/16/13")
    builders.limit(made, "19/17/14")
    return made


def judged(of: Reservoir, as_of: datetime = NOON, mail: bool = True) -> None:
    """The outlook refreshed and the alerts evaluated, as the two tasks do it."""
    refresh_outlook(of.pk, as_of)
    evaluation.evaluate_changed(as_of, mail)
    evaluation.evaluate_by_time(as_of, mail)


def arrives(of: Reservoir, drawn_at: datetime, values: dict[str, float], as_of: datetime = NOON, **more: Any) -> Sample:
    made = builders.sample(of, drawn_at, values, **more)
    judged(of, as_of)
    return made


def subscriber(of: Reservoir, **more: Any) -> Person:
    who = builders.person(**more)
    Subscription.objects.create(person=who, site=of.area.site)
    return who


def the_alert(of: Reservoir) -> Alert:
    found: Alert = Alert.objects.open().get(reservoir=of)
    return found


def standing(of: Reservoir) -> Standing:
    return Standing.objects.get(reservoir=of)


def story(alert: Alert) -> list[str]:
    """Oldest line first."""
    return [entry.text for entry in reversed(alert.story.all())]
