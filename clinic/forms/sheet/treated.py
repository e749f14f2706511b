"""What was given to one eye, and the check after it."""

from typing import Any

from django import forms

from clinic.forms.fields import FreeTextField, ParsedField, choices, dose_ug
from clinic.forms.sheet.eye import TEXT, EyeForm
from clinic.forms.sheet.words import AGENTS, METHODS
from clinic.models import Treated
from trends.measures import pressure


class TreatedForm(EyeForm):
    """What was given to one eye, and the check after it."""

    groups = (
        (
            "outcome",
            "agent",
            "dose",
            "agent2",
            "dose2",
            "route",
            "implant",
            "lot",
            "laser",
            "not_given_because",
        ),
        ("iop_after", "iop_after_method"),
    )

    outcome = forms.ChoiceField(
        choices=[("", "not recorded"), *Treated.Outcome.choices], required=False, label="Treatment"
    )
    agent = forms.ChoiceField(choices=choices(*AGENTS, blank="no agent"), required=False)
    dose = ParsedField(dose_ug, label="Dose (mg)", widget=TEXT(attrs={"inputmode": "decimal"}))
    agent2 = forms.ChoiceField(
        choices=choices(*AGENTS, blank="no second agent"), required=False, label="Second agent"
    )
    dose2 = ParsedField(dose_ug, label="Its dose (mg)")
    route = forms.ChoiceField(
        choices=choices("intravitreal", "sub_tenon", "topical", "oral"), required=False
    )
    implant = forms.BooleanField(required=False, label="implant")
    lot = forms.CharField(required=False, max_length=20, label="Lot (optional; + joins two)")
    laser = forms.ChoiceField(
        choices=choices("focal", "grid", "panretinal", blank="no laser"), required=False
    )
    not_given_because = FreeTextField(
        required=False, max_length=280, label="Why not given", widget=TEXT(attrs={"class": "wide"})
    )
    perception_after = forms.ChoiceField(
        choices=choices("fingers", "hand_movements", "light", "no_perception"),
        required=False,
        label="Perception after",
    )
    iop_after = ParsedField(pressure.tenths, label="IOP after (mmHg)")
    iop_after_method = forms.ChoiceField(choices=METHODS, required=False)
    complications = FreeTextField(
        required=False, max_length=160, label="Complications", widget=TEXT(attrs={"class": "wide"})
    )
    station = ("iop_after_method",)

    def clean(self) -> dict[str, Any]:
        """Given needs an agent or laser; not given needs why."""
        data = super().clean() or self.cleaned_data
        outcome = data.get("outcome")
        if not outcome and not self.is_blank:
            self.add_error("outcome", "Say whether something was given; blank is not recorded.")
        if outcome == "given" and not (data.get("agent") or data.get("laser")):
            self.add_error("agent", "Given: choose the agent, or the laser.")
        if outcome == "nothing" and (data.get("agent") or data.get("laser")):
            self.add_error("outcome", "Nothing given, but an agent or laser is chosen.")
        if outcome == "not_given" and not data.get("not_given_because"):
            self.add_error("not_given_because", "Planned but not given: say why in a few words.")
        if data.get("dose2") and not data.get("agent2"):
            self.add_error("agent2", "A second dose is typed: choose its agent.")
        return data

    def values(self) -> dict[str, Any]:
        """Return the columns of ``Treated``."""
        data = self.cleaned_data
        texts = (
            "outcome",
            "agent",
            "route",
            "lot",
            "laser",
            "not_given_because",
            "perception_after",
            "complications",
        )
        return {
            **{name: data.get(name) or "" for name in texts},
            "dose_ug": data.get("dose"),
            "implant": bool(data.get("implant")),
            "iop_after_tenths": data.get("iop_after"),
            "iop_after_method": data.get("iop_after_method", "")
            if data.get("iop_after") is not None
            else "",
        }

    def children(self) -> dict[str, list[dict[str, Any]]]:
        """Return a second treatment of the same day."""
        data = self.cleaned_data
        if not data.get("agent2"):
            return {}
        second = {"agent": data["agent2"], "dose_ug": data.get("dose2"), "route": "", "lot": ""}
        return {"more_treatments": [second]}
