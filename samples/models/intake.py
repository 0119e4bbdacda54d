"""A lab file that was committed."""

from django.db import models

from fleet.models import Person


class IntakeFile(models.Model):
    """One lab file whose rows went in. Its digest makes sure that the same file twice adds nothing."""

    name = models.CharField(max_length=200)
    digest = models.CharField(max_length=64, unique=True, help_text="SHA-256 of the bytes.")
    rows = models.PositiveIntegerField()
    added = models.PositiveIntegerField()
    entered_by = models.ForeignKey(Person, on_delete=models.SET_NULL, null=True, blank=True, related_name="+")
    entered_at = models.DateTimeField()

    class Meta:
        ordering = ["-entered_at"]

    def __str__(self) -> str:
        return self.name


class PendingFile(models.Model):
    """A lab file that was checked and waits for the person who brought it to say "import". Swept after a day."""

    name = models.CharField(max_length=200)
    digest = models.CharField(max_length=64, help_text="SHA-256 of the bytes.")
    data = models.BinaryField()
    laboratory = models.ForeignKey("samples.Laboratory", on_delete=models.CASCADE, null=True, related_name="+")
    brought_by = models.ForeignKey(Person, on_delete=models.CASCADE, related_name="+")
    brought_at = models.DateTimeField()

    class Meta:
        ordering = ["-brought_at"]
        constraints = [
            models.UniqueConstraint(fields=["brought_by", "digest"], name="pending_file_once_a_person"),
        ]

    def __str__(self) -> str:
        return self.name
