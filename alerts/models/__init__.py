"""Who must know: one module a noun."""

from alerts.models.alerts import Alert, StoryEntry
from alerts.models.deliveries import Delivery
from alerts.models.rules import Rule, Subscription

__all__ = ["Alert", "Delivery", "Rule", "StoryEntry", "Subscription"]
