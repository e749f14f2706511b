"""One writer a person at a time, so that revisions, reviews and plans are numbered in order."""

from collections.abc import Sequence

from clinic.models import Patient

BATCH = 400


def locked(patient: Patient) -> Patient:
    """Lock a person's row until the transaction ends, and return the person as given.

    SQLite has one writer at a time anyway and ignores the lock.
    """
    Patient.objects.select_for_update().only("pk").get(pk=patient.pk)
    return patient


def locked_all(patients: Sequence[Patient]) -> None:
    """Lock many people's rows in the order of their keys, so that two can't wait crosswise."""
    keys = sorted(patient.pk for patient in patients)
    for start in range(0, len(keys), BATCH):
        some = Patient.objects.filter(pk__in=keys[start : start + BATCH]).order_by("pk")
        list(some.select_for_update().values_list("pk"))
