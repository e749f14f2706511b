"""When one eye is due next, what is planned, and when it is booked."""

import datetime as dt
from typing import Any

from django import forms

from clinic.forms.fields import (
    ClockField,
    IsoDateField,
    ParsedField,
    choices,
    dose_ug,
    whole_number,
)
from clinic.forms.sheet.eye import EyeForm
from clinic.forms.sheet.words import AGENTS


class NextForm(EyeForm):
    """When the next visit of this eye is due, and what is planned and booked."""

    groups = (
        ("due_weeks", "due_day"),
        ("planned_agent", "planned_dose", "check_only"),
        ("booked_day", "booked_time"),
    )

    due_weeks = ParsedField(whole_number("due_weeks"), label="Due in weeks")
    due_day = IsoDateField(label="or due on")
    planned_agent = forms.ChoiceField(choices=choices(*AGENTS, blank="no agent"), required=False)
    planned_dose = ParsedField(dose_ug, label="Planned dose (mg)")
    check_only = forms.BooleanField(required=False, label="check only")
    booked_day = IsoDateField(label="Booked on")
    booked_time = ClockField(label="at")

    def clean(self) -> dict[str, Any]:
        """Weeks make the due day; it and the booking lie after the visit."""
        data = super().clean() or self.cleaned_data
        unchanged = data.get("due_day") == self.initial.get("due_day")
        new_weeks = data.get("due_weeks") != self.initial.get("due_weeks")
        if data.get("due_weeks") and (not data.get("due_day") or (unchanged and new_weeks)):
            data["due_day"] = self.day + dt.timedelta(weeks=data["due_weeks"])
        for name in ("due_day", "booked_day"):
            if data.get(name) and data[name] <= self.day:
                self.add_error(
                    name,
                    f"{data[name].isoformat()} is not after this visit ({self.day.isoformat()}). "
                    "A plan looks ahead. Check the year.",
                )
        if data.get("check_only") and data.get("planned_agent"):
            self.add_error("check_only", "Either check only or an agent, not both.")
        return data

    def values(self) -> dict[str, Any]:
        """Return the columns of ``NextStep``."""
        data = self.cleaned_data
        return {
            "due_weeks": data.get("due_weeks"),
            "due_day": data.get("due_day"),
            "planned_agent": data.get("planned_agent", ""),
            "planned_dose_ug": data.get("planned_dose"),
            "check_only": bool(data.get("check_only")),
        }

    def booking(self) -> dict[str, Any]:
        """Return booked day and time."""
        return {name: self.cleaned_data.get(name) for name in ("booked_day", "booked_time")}
