"""What was measured on one eye: shape and range only, nothing clinical."""

from typing import Any

from django import forms
from django.db.models import Q

from clinic.forms.fields import IsoDateField, ParsedField, choices, sentence
from clinic.forms.sheet.eye import TEXT, EyeForm
from clinic.forms.sheet.words import (
    CHARTS,
    CORRECTIONS,
    GRADERS,
    GRADES,
    LENSES,
    METHODS,
    NOTATIONS,
    SYMPTOMS,
)
from clinic.models import Scanner
from trends.errors import EbblineError
from trends.measures import acuity as acuities
from trends.measures import pressure, thickness
from trends.measures.ranges import ranges


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
    )

    groups = (
        ("cst", "scanner", "scan_quality"),
        ("acuity", "acuity_notation", "acuity_chart", "acuity_correction", "acuity_distance"),
        ("acuity2", "acuity2_notation", "acuity2_chart", "acuity2_correction"),
        ("iop", "iop_method"),
        ("iop2", "iop2_method"),
    )

    cst = ParsedField(
        thickness.micrometres, label="CST (µm)", widget=TEXT(attrs={"inputmode": "numeric"})
    )
    scanner = forms.ModelChoiceField(
        Scanner.objects.none(), required=False, label="Scanner", empty_label="scanner not recorded"
    )
    scan_quality = forms.ChoiceField(
        choices=choices("good", "poor", blank="quality not recorded"),
        required=False,
        label="Scan quality",
    )
    irf = forms.ChoiceField(choices=GRADES, required=False, label="IRF")
    srf = forms.ChoiceField(choices=GRADES, required=False, label="SRF")
    grader = forms.ChoiceField(choices=GRADERS, required=False, label="Graded by")
    acuity = forms.CharField(required=False, max_length=16, label="Acuity")
    acuity_notation = forms.ChoiceField(choices=NOTATIONS, required=False, label="Acuity notation")
    acuity_chart = forms.ChoiceField(choices=CHARTS, required=False, label="Acuity chart")
    acuity_correction = forms.ChoiceField(
        choices=CORRECTIONS, required=False, label="Acuity correction"
    )
    acuity_distance = forms.CharField(required=False, max_length=8, label="Test distance")
    acuity2 = forms.CharField(required=False, max_length=16, label="Another acuity")
    acuity2_notation = forms.ChoiceField(choices=NOTATIONS, required=False, label="Its notation")
    acuity2_chart = forms.ChoiceField(choices=CHARTS, required=False, label="Its chart")
    acuity2_correction = forms.ChoiceField(
        choices=CORRECTIONS, required=False, label="Its correction"
    )
    iop = ParsedField(
        pressure.tenths, label="IOP (mmHg)", widget=TEXT(attrs={"inputmode": "decimal"})
    )
    iop_method = forms.ChoiceField(choices=METHODS, required=False, label="Tonometer")
    iop2 = ParsedField(pressure.tenths, label="Another IOP (mmHg)")
    iop2_method = forms.ChoiceField(choices=METHODS, required=False, label="Its tonometer")
    lens = forms.ChoiceField(choices=LENSES, required=False, label="Lens")
    symptoms_now = forms.MultipleChoiceField(
        choices=SYMPTOMS, required=False, widget=forms.CheckboxSelectMultiple, label="Symptoms now"
    )
    symptoms_gone = forms.MultipleChoiceField(
        choices=SYMPTOMS,
        required=False,
        widget=forms.CheckboxSelectMultiple,
        label="Symptoms passed",
    )
    symptoms_none = forms.BooleanField(required=False, label="Symptoms asked, none")
    symptoms_onset = IsoDateField(label="Symptoms since")

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        # A retired scanner stays choosable where it was used, or a correction would drop it.
        used = Q(retired_on=None) | Q(retired_on__gt=self.day)
        # From a draft it is text, and blank where none was chosen.
        if str(self.initial.get("scanner") or "").isdecimal():
            used |= Q(pk=self.initial["scanner"])
        scanners = Scanner.objects.filter(used, site=self.site).order_by("label")
        self.fields["scanner"].queryset = scanners  # type: ignore[attr-defined]
        self.read: dict[str, acuities.Acuity] = {}

    def clean(self) -> dict[str, Any]:
        """Read the acuities with their notation, and question what is unlikely."""
        data = super().clean() or self.cleaned_data
        for name in ("acuity", "acuity2"):
            self._acuity(name)
        if data.get("cst") is not None:
            if thickness.is_unlikely(data["cst"]):
                self.ask("cst", f"CST {data['cst']} µm: {ranges('cst_um').text('unlikely_why')}.")
            if not data.get("scanner"):
                self.ask(
                    "scanner",
                    "No scanner chosen: without its class this scan can be compared with none.",
                )
        bounds = ranges("iop_tenths")
        iop = data.get("iop")
        low, high = bounds.number("unlikely_below"), bounds.number("unlikely_above")
        if iop is not None and (iop < low or iop > high):
            self.ask("iop", f"IOP {pressure.shown(iop)} mmHg: {bounds.text('unlikely_why')}.")
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
            self.ask(name, f"Acuity {text}: {doubt}")

    def implied(self) -> dict[str, str]:
        """Return the other notations of each acuity that could be read, as one line, by field."""
        return {name: ", ".join(acuities.implied(one).values()) for name, one in self.read.items()}

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
