"""The word of a person on a sample."""

from django import forms

from samples.models import Sample

CHOICES = [(Sample.Verdict.ACCEPTED, "accept"), (Sample.Verdict.SET_ASIDE, "set aside")]


class JudgeForm(forms.Form):
    """Accepting may go without a reason; setting aside may not, and the subject module says so."""

    verdict = forms.ChoiceField(choices=CHOICES)
    reason = forms.CharField(
        label="Why", required=False, max_length=240, widget=forms.Textarea(attrs={"rows": 2, "maxlength": 240})
    )
