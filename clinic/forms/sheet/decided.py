"""What a clinician decided for one eye."""

from typing import Any

from django import forms

from clinic.forms.fields import FreeTextField, ParsedField, choices, whole_number
from clinic.forms.sheet.eye import TEXT, EyeForm
from clinic.forms.sheet.words import AGENTS
from clinic.models import Decided


class DecidedForm(EyeForm):
    """What the clinician decided for one eye."""

    groups = (("choice", "interval_weeks", "agent", "departs_because"),)

    choice = forms.ChoiceField(
        choices=[("", "not decided"), *Decided.Choice.choices], required=False, label="Decision"
    )
    interval_weeks = ParsedField(whole_number("due_weeks"), label="Interval (weeks)")
    agent = forms.ChoiceField(choices=choices(*AGENTS, blank="none named"), required=False)
    departs_because = FreeTextField(
        required=False,
        max_length=280,
        label="Reason, if it departs",
        widget=TEXT(attrs={"class": "wide"}),
    )

    def clean(self) -> dict[str, Any]:
        """Refuse a detail without a decision: it only adds to one."""
        data = super().clean() or self.cleaned_data
        if not data.get("choice") and not self.is_blank:
            self.add_error("choice", "Choose what was decided; the other fields only add to it.")
        return data

    def values(self) -> dict[str, Any]:
        """Return the columns of ``Decided``."""
        data = self.cleaned_data
        return {
            name: data.get(name) or (None if name == "interval_weeks" else "")
            for name in ("choice", "interval_weeks", "agent", "departs_because")
        }
