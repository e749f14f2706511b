"""The visit sheet's forms, one an eye and part. They check shape and range, nothing clinical.

``part()`` returns what is to be stored; ``questions`` lists unlikely values, asked once and kept
when the person says so.
"""

import datetime as dt
from typing import Any

from django import forms

from clinic.forms.fields import (
    ClockField,
    IsoDateField,
    ParsedField,
    choices,
    dose_ug,
    sentence,
    whole_number,
)
from clinic.models import Decided, Scanner, Site, Treated
from clinic.services.parts import EyePart
from trends.errors import EbblineError
from trends.measures import acuity as acuities
from trends.measures import pressure, thickness
from trends.measures.ranges import ranges

NOTATIONS = ("etdrs_letters", "snellen_ft", "snellen_m", "decimal", "logmar", "off_chart")
NOTATION_WORDS = {
    "etdrs_letters": "ETDRS letters",
    "snellen_ft": "Snellen, feet (20/40)",
    "snellen_m": "Snellen, metres (6/12)",
    "decimal": "decimal (0.5)",
    "logmar": "logMAR (0.30)",
    "off_chart": "off the chart (CF, HM, LP, NLP)",
}
CHARTS = (
    ("", "chart not recorded"),
    ("etdrs", "ETDRS"),
    ("electronic_etdrs", "electronic ETDRS"),
    ("snellen", "Snellen"),
    ("other", "other"),
)
CORRECTIONS = choices("refracted", "glasses", "pinhole", "none", blank="correction not recorded")
METHODS = choices("applanation", "rebound", "non_contact", "other", blank="tonometer not recorded")
GRADES = choices("yes", "no", "unsure", "not_graded", blank="blank: not looked at")
GRADERS = choices("clinician", "technician", "reading_centre", blank="grader not recorded")
SYMPTOMS = (
    ("pain", "pain"),
    ("redness", "redness"),
    ("vision_loss", "vision loss"),
    ("blurred", "blurred"),
    ("floaters", "floaters"),
    ("light_sensitivity", "light sensitivity"),
    ("no_perception", "no perception"),
)
LENSES = choices("clear", "cataract", "artificial", "none", "not_seen")
AGENTS = (*ranges("agents").texts("anti_vegf"), *ranges("agents").texts("steroid"))
NOTE_HINT = "No names, dates or numbers of persons; a bare name can't be caught."
TEXT = forms.TextInput


class EyeForm(forms.Form):
    """One eye of a part. ``side`` is its prefix; ``keep`` says that unlikely values are meant."""

    keep = forms.BooleanField(required=False)
    base_rev = forms.IntegerField(widget=forms.HiddenInput, required=False, min_value=0)
    note = forms.CharField(
        required=False, max_length=280, widget=TEXT(attrs={"class": "wide"}), help_text=NOTE_HINT
    )

    def __init__(self, *args: Any, site: Site, day: dt.date, **kwargs: Any) -> None:
        self.site, self.day = site, day
        self.questions: list[str] = []
        kwargs.setdefault("use_required_attribute", False)
        super().__init__(*args, **kwargs)

    def ask(self, question: str) -> None:
        """Question an unlikely value once."""
        if not self.cleaned_data.get("keep"):
            self.questions.append(question)

    @property
    def is_blank(self) -> bool:
        """Say whether nothing was typed for this eye."""
        ignored = {"keep", "base_rev", *self.station}
        return not any(
            value not in (None, "", [], False)
            for name, value in self.cleaned_data.items()
            if name not in ignored
        )

    # Facts of the station that carry over; alone they are no measurement.
    station: tuple[str, ...] = ()

    def values(self) -> dict[str, Any]:
        """Return the model's column values."""
        raise TypeError("each part says its own values")

    def children(self) -> dict[str, list[dict[str, Any]]]:
        """Return the values of child rows."""
        return {}

    def booking(self) -> dict[str, Any]:
        """Return booked day and time, for the next part."""
        return {}

    def part(self) -> EyePart:
        """Return what is to be stored for this eye."""
        return EyePart(
            values=self.values(),
            base_rev=self.cleaned_data.get("base_rev") or 0,
            children=self.children(),
            note=self.cleaned_data.get("note", ""),
            booking=self.booking(),
        )


class MeasuredForm(EyeForm):
    """What was measured on one eye. Blank is not done, never a value."""

    station = (
        "scanner",
        "acuity_chart",
        "acuity_notation",
        "iop_method",
        "iop2_method",
        "acuity2_notation",
        "acuity2_chart",
        "grader",
    )

    cst = ParsedField(
        thickness.micrometres, label="CST (µm)", widget=TEXT(attrs={"inputmode": "numeric"})
    )
    scanner = forms.ModelChoiceField(
        Scanner.objects.none(), required=False, label="Scanner", empty_label="scanner not recorded"
    )
    scan_quality = forms.ChoiceField(
        choices=choices("good", "poor", blank="quality not recorded"), required=False
    )
    irf = forms.ChoiceField(choices=GRADES, required=False, label="IRF")
    srf = forms.ChoiceField(choices=GRADES, required=False, label="SRF")
    grader = forms.ChoiceField(choices=GRADERS, required=False, label="Graded by")
    acuity = forms.CharField(required=False, max_length=16, label="Acuity")
    acuity_notation = forms.ChoiceField(
        choices=[("", "choose the notation"), *NOTATION_WORDS.items()], required=False
    )
    acuity_chart = forms.ChoiceField(choices=CHARTS, required=False, label="Chart")
    acuity_correction = forms.ChoiceField(choices=CORRECTIONS, required=False)
    acuity_distance = forms.CharField(required=False, max_length=8, label="Distance")
    acuity2 = forms.CharField(required=False, max_length=16, label="Another acuity")
    acuity2_notation = forms.ChoiceField(
        choices=[("", "choose the notation"), *NOTATION_WORDS.items()], required=False
    )
    acuity2_chart = forms.ChoiceField(choices=CHARTS, required=False)
    acuity2_correction = forms.ChoiceField(choices=CORRECTIONS, required=False)
    iop = ParsedField(
        pressure.tenths, label="IOP (mmHg)", widget=TEXT(attrs={"inputmode": "decimal"})
    )
    iop_method = forms.ChoiceField(choices=METHODS, required=False, label="Tonometer")
    iop2 = ParsedField(pressure.tenths, label="Another IOP (mmHg)")
    iop2_method = forms.ChoiceField(choices=METHODS, required=False)
    lens = forms.ChoiceField(choices=LENSES, required=False, label="Lens")
    symptoms_now = forms.MultipleChoiceField(
        choices=SYMPTOMS, required=False, widget=forms.CheckboxSelectMultiple, label="Symptoms now"
    )
    symptoms_gone = forms.MultipleChoiceField(
        choices=SYMPTOMS, required=False, widget=forms.CheckboxSelectMultiple, label="Passed"
    )
    symptoms_none = forms.BooleanField(required=False, label="asked, none")
    symptoms_onset = IsoDateField(label="Since")

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        scanners = Scanner.objects.filter(site=self.site, retired_on=None).order_by("label")
        self.fields["scanner"].queryset = scanners  # type: ignore[attr-defined]
        self.read: dict[str, acuities.Acuity] = {}

    def clean(self) -> dict[str, Any]:
        """Read the acuities with their notation, and question what is unlikely."""
        data = super().clean() or self.cleaned_data
        for name in ("acuity", "acuity2"):
            self._acuity(name)
        if data.get("cst") is not None:
            if thickness.is_unlikely(data["cst"]):
                self.ask(f"CST {data['cst']} µm: {ranges('cst_um').text('unlikely_why')}.")
            if not data.get("scanner"):
                self.ask(
                    "No scanner chosen: without its class this scan can be compared with none."
                )
        bounds = ranges("iop_tenths")
        iop = data.get("iop")
        low, high = bounds.number("unlikely_below"), bounds.number("unlikely_above")
        if iop is not None and (iop < low or iop > high):
            self.ask(f"IOP {pressure.shown(iop)} mmHg: {bounds.text('unlikely_why')}.")
        if data.get("symptoms_none") and (data.get("symptoms_now") or data.get("symptoms_gone")):
            self.add_error("symptoms_none", "Either symptoms or 'asked, none', not both.")
        both = set(data.get("symptoms_now", [])) & set(data.get("symptoms_gone", []))
        if both:
            self.add_error("symptoms_gone", f"Both now and passed: {', '.join(sorted(both))}.")
        return data

    def _acuity(self, name: str) -> None:
        data = self.cleaned_data
        text = (data.get(name) or "").strip()
        if not text:
            return
        try:
            found = acuities.checked(
                data.get(f"{name}_notation") or "", text, data.get(f"{name}_chart") or ""
            )
        except EbblineError as error:
            self.add_error(name, sentence(error))
            return
        self.read[name] = found
        for doubt in found.doubts:
            self.ask(f"Acuity {text}: {doubt}")

    def _acuity_values(self, name: str) -> dict[str, Any]:
        found = self.read.get(name)
        if found is None:
            return {}
        data = self.cleaned_data
        return {
            "acuity": found.text,
            "acuity_notation": found.notation,
            "acuity_chart": found.chart,
            "acuity_correction": data.get(f"{name}_correction") or "",
            "acuity_distance": data.get("acuity_distance", "") if name == "acuity" else "",
            "letters": found.letters,
            "logmar_e4": found.logmar_e4,
        }

    def values(self) -> dict[str, Any]:
        """Return the columns of ``Measured``."""
        data = self.cleaned_data
        scanner = data.get("scanner") if data.get("cst") is not None else None
        graded = data.get("irf") or data.get("srf")
        return {
            "cst_um": data.get("cst"),
            "scanner_id": scanner.pk if scanner else None,
            "scanner_label": scanner.label if scanner else "",
            "oct_class": scanner.oct_class if scanner else "",
            "scan_quality": data.get("scan_quality", ""),
            "irf": data.get("irf", ""),
            "srf": data.get("srf", ""),
            "grader": data.get("grader", "") if graded else "",
            "iop_tenths": data.get("iop"),
            "iop_method": data.get("iop_method", "") if data.get("iop") is not None else "",
            "lens": data.get("lens", ""),
            "symptoms": self.symptoms(),
            "symptoms_onset": data.get("symptoms_onset"),
            **self._acuity_values("acuity"),
        }

    def symptoms(self) -> str:
        """Return the symptoms as one text: present bare, passed with ``:gone``."""
        data = self.cleaned_data
        if data.get("symptoms_none"):
            return "none"
        passed = [f"{one}:gone" for one in data.get("symptoms_gone", [])]
        return "+".join([*data.get("symptoms_now", []), *passed])

    def children(self) -> dict[str, list[dict[str, Any]]]:
        """Return a second acuity and a second pressure."""
        data = self.cleaned_data
        found: dict[str, list[dict[str, Any]]] = {}
        more = self._acuity_values("acuity2")
        if more:
            found["more_acuities"] = [more]
        if data.get("iop2") is not None:
            found["more_pressures"] = [
                {"iop_tenths": data["iop2"], "iop_method": data.get("iop2_method", "")}
            ]
        return found


class DecidedForm(EyeForm):
    """What the clinician decided for one eye."""

    choice = forms.ChoiceField(
        choices=[("", "not decided"), *Decided.Choice.choices], required=False, label="Decision"
    )
    interval_weeks = ParsedField(whole_number("due_weeks"), label="Interval (weeks)")
    agent = forms.ChoiceField(choices=choices(*AGENTS, blank="none named"), required=False)
    departs_because = forms.CharField(
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


class TreatedForm(EyeForm):
    """What was given to one eye, and the check after it."""

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
    lot = forms.CharField(required=False, max_length=20, label="Lot (optional)")
    laser = forms.ChoiceField(
        choices=choices("focal", "grid", "panretinal", blank="no laser"), required=False
    )
    not_given_because = forms.CharField(
        required=False, max_length=280, label="Why not given", widget=TEXT(attrs={"class": "wide"})
    )
    perception_after = forms.ChoiceField(
        choices=choices("fingers", "hand_movements", "light", "no_perception"),
        required=False,
        label="Perception after",
    )
    iop_after = ParsedField(pressure.tenths, label="IOP after (mmHg)")
    iop_after_method = forms.ChoiceField(choices=METHODS, required=False)
    complications = forms.CharField(
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


class NextForm(EyeForm):
    """When the next visit of this eye is due, and what is planned and booked."""

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


FORMS: dict[str, type[EyeForm]] = {
    "measured": MeasuredForm,
    "decided": DecidedForm,
    "treated": TreatedForm,
    "next": NextForm,
}


class PostForm(forms.Form):
    """What every posted part carries besides its eyes."""

    request_id = forms.UUIDField(widget=forms.HiddenInput)
    reason = forms.CharField(required=False, max_length=280)
