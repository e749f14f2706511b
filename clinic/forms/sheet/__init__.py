"""The visit sheet's forms, one an eye and part. They check shape and range, nothing clinical."""

from django import forms

from clinic.forms.fields import FreeTextField
from clinic.forms.sheet.ahead import NextForm
from clinic.forms.sheet.decided import DecidedForm
from clinic.forms.sheet.eye import EyeForm
from clinic.forms.sheet.measured import MeasuredForm
from clinic.forms.sheet.treated import TreatedForm

__all__ = [
    "FORMS",
    "DecidedForm",
    "EyeForm",
    "MeasuredForm",
    "NextForm",
    "PostForm",
    "TreatedForm",
]
FORMS: dict[str, type[EyeForm]] = {
    "measured": MeasuredForm,
    "decided": DecidedForm,
    "treated": TreatedForm,
    "next": NextForm,
}


class PostForm(forms.Form):
    """What every posted part carries besides its eyes."""

    request_id = forms.UUIDField(widget=forms.HiddenInput)
    reason = FreeTextField(required=False, max_length=280)
