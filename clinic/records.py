"""The records an eye has at a visit, by the name of their part."""

from clinic.models import (
    ContactEntry,
    Decided,
    Eye,
    EyeRecord,
    Measured,
    NextStep,
    Treated,
    Visit,
)

PARTS: dict[str, type[EyeRecord]] = {
    "measured": Measured,
    "decided": Decided,
    "treated": Treated,
    "next": NextStep,
    "contact": ContactEntry,
}


def newest(model: type[EyeRecord], visit: Visit, eye: Eye) -> EyeRecord | None:
    """Return the newest revision of a record, withdrawn or not."""
    rows = model._default_manager.filter(**{"visit": visit, "eye": eye})
    return rows.order_by("-rev").first()
