"""Forms of a person's facts: one kind at a time, with that kind's fields only."""

import datetime as dt
from typing import Any

from django import forms

from clinic.adapters.facts import READINGS
from clinic.forms.fields import FreeTextField, IsoDateField, ParsedField, choices
from clinic.models import Eye, PersonFact
from clinic.services.fact_checks import HOLDS, follows
from trends.measures import blood, context

Kind = PersonFact.Kind


def _agents(blank: str) -> forms.ChoiceField:
    return forms.ChoiceField(choices=choices(*context.inflaming(), blank=blank), required=False)


FIELDS: dict[str, dict[str, Any]] = {
    "happened_on": {"field": IsoDateField, "label": "It happened on (blank if not known)"},
    "systolic_mmhg": {"read": blood.systolic, "label": "Systolic (mmHg)"},
    "diastolic_mmhg": {"read": blood.diastolic, "label": "Diastolic (mmHg)"},
    "protein_tenths": {"read": blood.protein_tenths, "label": "Total protein (g/dL)"},
}


class FactForm(forms.Form):
    """A fact of one kind, known from a day on."""

    day = IsoDateField(label="Known since", required=True)
    ask_again_by = IsoDateField(label="Ask again by")

    def __init__(self, *args: Any, kind: str, sides: list[str], **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.kind = kind
        if kind in READINGS:
            self.fields["day"].label = "Measured on"
        if kind == Kind.INFLAMMATION:
            known = [(value, label) for value, label in Eye.Side.choices if value in sides]
            first = [("", "choose the eye")]
            self.fields["eye"] = forms.ChoiceField(choices=[*first, *known], label="Eye")
        for name, must in HOLDS.get(kind, {}).items():
            self.fields[name] = self._field(name, must=must)
        own = [name for name in self.fields if name not in ("day", "ask_again_by")]
        self.order_fields([*own, "day", "ask_again_by"])

    @staticmethod
    def _field(name: str, *, must: bool) -> forms.Field:
        if name == "agent":
            field = _agents("choose" if must else "not named")
            field.required, field.label = must, "Agent"
            return field
        made = FIELDS[name]
        if "read" in made:
            return ParsedField(made["read"], label=made["label"], required=must)
        return IsoDateField(label=made["label"])

    def values(self) -> dict[str, Any]:
        """Return the columns of ``PersonFact`` this kind holds."""
        data = self.cleaned_data
        return {name: data[name] for name in data if name != "eye"}


class FactFollowForm(forms.Form):
    """What became of a fact."""

    change = forms.ChoiceField(label="What became of it")
    day = IsoDateField(label="On", required=True)
    ask_again_by = IsoDateField(label="Ask again by, if it still holds")
    reason = FreeTextField(
        required=False, max_length=280, label="Reason, if it was entered by mistake"
    )

    def __init__(self, *args: Any, kind: str, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        can = [(change.value, change.label) for change in follows(kind)]
        self.fields["change"] = forms.ChoiceField(
            choices=[("", "choose"), *can], label="What became of it"
        )

    def values(self) -> dict[str, Any]:
        """Return what the service takes."""
        return {name: self.cleaned_data[name] for name in self.fields}


def first_values(today: dt.date) -> dict[str, Any]:
    """Return the first values of either form."""
    return {"day": today}
