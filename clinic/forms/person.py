"""Forms of enrolment and of what is known of persons and eyes."""

import datetime as dt
from typing import Any

from django import forms

from clinic.forms.fields import (
    ClockField,
    FreeTextField,
    IsoDateField,
    ParsedField,
    birth_year,
    choices,
    dose_ug,
    whole_number,
)
from clinic.forms.sheet.words import AGENTS, LENSES, SYMPTOMS
from clinic.models import EyeEvent, EyeState, Patient, PatientStatus, Plan
from clinic.services.patients import EyeIn
from trends.measures import pressure, thickness
from trends.regimens import registry as regimens

YES_NO = (("", "not known"), ("yes", "yes"), ("no", "no"))
TRUTH = {"yes": True, "no": False}


def letters(text: str) -> int:
    """Read a letter score."""
    return whole_number("letters")(text)


def regimen_choices(blank: str) -> list[tuple[str, str]]:
    """Return the regimens by title."""
    return [("", blank), *((n, str(m.INFO.title)) for n, m in regimens.of_courses().items())]


class PersonForm(forms.Form):
    """A person to enrol: nothing that identifies, only what thresholds need."""

    birth_year = forms.CharField(required=False, label="Year of birth")
    age_90_or_over = forms.BooleanField(required=False, label="90 or over (no year is kept)")
    sex = forms.ChoiceField(choices=Patient.Sex.choices, required=False)

    def __init__(self, *args: Any, today: dt.date, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.fields["birth_year"] = ParsedField(birth_year(today), label="Year of birth")

    def clean(self) -> dict[str, Any]:
        """Refuse a year together with "90 or over"."""
        data = super().clean() or self.cleaned_data
        if data.get("birth_year") and data.get("age_90_or_over"):
            self.add_error("birth_year", "Either a year or 90 and over, not both.")
        return data


class HistoryForm(forms.Form):
    """What is known of an eye before the log. Blank is not known."""

    MODES = (
        ("", "not entered yet"),
        ("new_eye", "new eye: treatment starts here"),
        ("entered", "has a history, as below"),
    )
    mode = forms.ChoiceField(choices=MODES, required=False, label="History")
    diagnosed_on = IsoDateField(label="Diagnosed on")
    treatments_so_far = forms.IntegerField(required=False, min_value=0, max_value=400)
    agent = forms.ChoiceField(choices=choices(*AGENTS, blank="not known"), required=False)
    last_treatment_on = IsoDateField(label="Last treatment on")
    interval_weeks = ParsedField(whole_number("due_weeks"), label="Current interval (weeks)")
    loading_done = forms.ChoiceField(choices=YES_NO, required=False)
    steroid_ever = forms.ChoiceField(choices=YES_NO, required=False, label="Steroid ever")
    pressure_rise_after_steroid = forms.ChoiceField(choices=YES_NO, required=False)
    baseline_letters = ParsedField(letters, label="Baseline letters")
    baseline_cst = ParsedField(thickness.micrometres, label="Baseline CST (µm)")
    baseline_iop = ParsedField(pressure.tenths, label="Baseline IOP (mmHg)")
    lens = forms.ChoiceField(choices=LENSES, required=False)
    vitrectomy = forms.ChoiceField(choices=YES_NO, required=False)
    laser = forms.ChoiceField(choices=YES_NO, required=False, label="Laser ever")

    def clean(self) -> dict[str, Any]:
        """Say when facts would be lost without "has a history"."""
        data = super().clean() or self.cleaned_data
        own = {"mode", "reason", "followed", "cause", "status"}
        facts = [n for n, v in data.items() if n not in own and v not in (None, "")]
        if data.get("mode") != "entered" and facts:
            self.add_error("mode", "Facts of a history are filled in: choose 'has a history'.")
        if data.get("mode") == "entered" and not facts and not self.errors:
            self.add_error("mode", "Fill in at least one fact, or leave the history not entered.")
        return data

    def values(self) -> dict[str, Any] | None:
        """Return the columns of ``History``; None when it isn't entered."""
        data = self.cleaned_data
        if not data.get("mode"):
            return None
        if data["mode"] == "new_eye":
            return {"new_eye": True}
        names = (
            "diagnosed_on",
            "treatments_so_far",
            "last_treatment_on",
            "interval_weeks",
            "baseline_letters",
        )
        truths = (
            "loading_done",
            "steroid_ever",
            "pressure_rise_after_steroid",
            "vitrectomy",
            "laser",
        )
        return {
            **{name: data.get(name) for name in names},
            **{name: TRUTH.get(data.get(name, "")) for name in truths},
            "agent": data.get("agent", ""),
            "lens": data.get("lens", ""),
            "baseline_cst_um": data.get("baseline_cst"),
            "baseline_iop_tenths": data.get("baseline_iop"),
        }


class EyeEnrolForm(HistoryForm):
    """One eye at enrolment."""

    field_order = ("followed", "cause", "status", "mode")

    followed = forms.BooleanField(required=False, label="This eye is followed here")
    cause = forms.ChoiceField(choices=EyeState.Cause.choices, required=False)
    status = forms.ChoiceField(
        choices=EyeState.Status.choices, required=False, initial=EyeState.Status.IN_TREATMENT
    )

    def clean(self) -> dict[str, Any]:
        """Refuse facts of an eye that isn't ticked."""
        data = super().clean()
        if not data.get("followed") and (data.get("mode") or data.get("cause")):
            self.add_error("followed", "Tick it: something is filled in for this eye.")
        return data

    def eye(self) -> EyeIn | None:
        """Return the eye to enrol, or None."""
        data = self.cleaned_data
        if not data.get("followed"):
            return None
        return EyeIn(data.get("cause", ""), data.get("status", ""), self.values())


class ReasonForm(forms.Form):
    """A reason in a few words."""

    reason = FreeTextField(required=False, max_length=280, label="Reason")

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.order_fields([*(name for name in self.fields if name != "reason"), "reason"])


class HistoryPageForm(HistoryForm):
    """The history of an eye, entered later or corrected."""

    reason = FreeTextField(required=False, max_length=280, label="Reason, if it is corrected")


class StateForm(ReasonForm):
    """Cause and status of an eye from a day on."""

    cause = forms.ChoiceField(choices=EyeState.Cause.choices, required=False)
    status = forms.ChoiceField(choices=EyeState.Status.choices)
    stop_reason = forms.ChoiceField(choices=EyeState.StopReason.choices, required=False)
    from_day = IsoDateField(label="From", required=True)

    def clean(self) -> dict[str, Any]:
        """Ask why a stopped eye was stopped."""
        data = super().clean() or self.cleaned_data
        if data.get("status") == "stopped" and not data.get("stop_reason"):
            self.add_error("stop_reason", "Stopped: dry, no benefit, patient's choice or other.")
        return data


class EventForm(ReasonForm):
    """A dated event of an eye."""

    kind = forms.ChoiceField(choices=EyeEvent.Kind.choices, label="What")
    day = IsoDateField(label="When", required=True)


class CourseForm(forms.Form):
    """A treatment course, opened by a clinician with a reason."""

    regimen = forms.ChoiceField(
        choices=regimen_choices("no regimen (ends the course)"), required=False
    )
    agent = forms.ChoiceField(choices=choices(*AGENTS, blank="none named"), required=False)
    from_day = IsoDateField(label="From", required=True)
    reason = FreeTextField(
        max_length=280,
        error_messages={"required": "A course is opened with a reason; a few words are enough."},
    )

    def values(self) -> dict[str, Any]:
        """Return the columns of ``Course``."""
        return {
            name: self.cleaned_data[name] for name in ("regimen", "agent", "from_day", "reason")
        }


class PlanForm(ReasonForm):
    """A due day, a booking, or what became of one."""

    due_day = IsoDateField(label="Due on")
    booked_day = IsoDateField(label="Booked on")
    booked_time = ClockField(label="at")
    planned_agent = forms.ChoiceField(choices=choices(*AGENTS, blank="no agent"), required=False)
    planned_dose = ParsedField(dose_ug, label="Planned dose (mg)")
    check_only = forms.BooleanField(required=False, label="check only")
    attendance = forms.ChoiceField(
        choices=Plan.Attendance.choices, required=False, label="The booking before"
    )

    def values(self) -> dict[str, Any]:
        """Return the columns of ``Plan``."""
        data = self.cleaned_data
        return {
            **{n: data.get(n) for n in ("due_day", "booked_day", "booked_time")},
            "planned_agent": data.get("planned_agent", ""),
            "planned_dose_ug": data.get("planned_dose"),
            "check_only": bool(data.get("check_only")),
            "attendance": data.get("attendance", ""),
        }


class PersonStatusForm(ReasonForm):
    """Whether a person is active, moved away or died; a newer entry reverses it."""

    status = forms.ChoiceField(choices=PatientStatus.Status.choices)
    from_day = IsoDateField(label="From", required=True)


class ContactForm(forms.Form):
    """A contact: what was told, for which eye, who took it, whom they told."""

    DIRECTIONS = (
        ("from_patient", "patient or carer told us"),
        ("to_patient", "we tried to reach them"),
    )
    OUTCOMES = choices("spoke", "no_answer", "message_left", "came_in", "sent_on", blank="not said")
    request_id = forms.UUIDField(widget=forms.HiddenInput)
    day = IsoDateField(label="Day", required=True)
    direction = forms.ChoiceField(choices=DIRECTIONS, label="Who called")
    eyes = forms.MultipleChoiceField(
        choices=(("R", "right eye"), ("L", "left eye")),
        widget=forms.CheckboxSelectMultiple,
        error_messages={"required": "Tick the eye it is about; both if it is about both."},
    )
    symptoms_now = forms.MultipleChoiceField(
        choices=SYMPTOMS, required=False, widget=forms.CheckboxSelectMultiple, label="Symptoms now"
    )
    symptoms_gone = forms.MultipleChoiceField(
        choices=SYMPTOMS, required=False, widget=forms.CheckboxSelectMultiple, label="Passed"
    )
    symptoms_none = forms.BooleanField(required=False, label="asked, none")
    symptoms_onset = IsoDateField(label="Since")
    outcome = forms.ChoiceField(choices=OUTCOMES, required=False)
    told_whom = FreeTextField(required=False, max_length=60, label="Told whom (role, no name)")
    note = FreeTextField(required=False, max_length=280, label="Note (no names)")

    def symptoms(self) -> str:
        """Return the symptoms as one text."""
        data = self.cleaned_data
        if data.get("symptoms_none") and not (data["symptoms_now"] or data["symptoms_gone"]):
            return "none"
        return "+".join([*data["symptoms_now"], *(f"{one}:gone" for one in data["symptoms_gone"])])

    def values(self) -> dict[str, Any]:
        """Return the columns of ``ContactEntry``."""
        data = self.cleaned_data
        return {
            "direction": data["direction"],
            "symptoms": self.symptoms(),
            "symptoms_onset": data.get("symptoms_onset"),
            "outcome": data.get("outcome", ""),
            "told_whom": data.get("told_whom", ""),
        }
