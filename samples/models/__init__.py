"""What came out of the bottle: one module a noun."""

from samples.models.intake import IntakeFile, PendingFile
from samples.models.laboratories import Laboratory
from samples.models.outlooks import Outlook
from samples.models.results import Doubt, Judgement, Result
from samples.models.samples import Sample

__all__ = ["Doubt", "IntakeFile", "Judgement", "Laboratory", "Outlook", "PendingFile", "Result", "Sample"]
