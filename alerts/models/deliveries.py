"""One mail to one person for one reason."""

from django.db import models
from django.db.models import Q

from alerts.models.alerts import Alert
from alerts.models.rules import Rule
from alerts.querysets import DeliveryQuerySet
from fleet.models import Person


class Delivery(models.Model):
    """A mail that is owed: claimed by a conditional update, and never claimed again once it is marked sent."""

    class State(models.TextChoices):
        QUEUED = "queued", "waiting"
        SENDING = "sending", "being sent"
        SENT = "sent", "sent"
        FAILED = "failed", "given up"

    alert = models.ForeignKey(Alert, on_delete=models.CASCADE, related_name="deliveries")
    person = models.ForeignKey(Person, on_delete=models.CASCADE, related_name="deliveries")
    address = models.EmailField()
    reason = models.CharField(max_length=24, help_text="The kind of rule that first spoke, or closed.")
    state = models.CharField(max_length=8, choices=State, default=State.QUEUED)
    attempts = models.PositiveSmallIntegerField(default=0)
    due_at = models.DateTimeField()
    claimed_at = models.DateTimeField(null=True, blank=True)
    sent_at = models.DateTimeField(null=True, blank=True)
    last_error = models.TextField(blank=True)
    message_id = models.CharField(max_length=120, blank=True)

    objects = DeliveryQuerySet.as_manager()

    class Meta:
        ordering = ["due_at", "pk"]
        verbose_name_plural = "deliveries"
        constraints = [
            models.UniqueConstraint(fields=["alert", "person", "reason"], name="delivery_once_a_reason"),
            models.CheckConstraint(
                condition=Q(state="sent", sent_at__isnull=False) | (~Q(state="sent") & Q(sent_at=None)),
                name="delivery_sent_has_time",
            ),
        ]
        indexes = [models.Index(fields=["due_at"], condition=Q(state__in=["queued", "sending"]), name="delivery_due")]

    def __str__(self) -> str:
        return f"{self.reason} to {self.address}: {self.state}"

    def get_reason_display(self) -> str:
        return str(dict(Rule.Kind.choices).get(self.reason, self.reason))
