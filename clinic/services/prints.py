"""Prints leave the house on paper: each is noted in the ledger of every person on it."""

import datetime as dt
from collections.abc import Sequence

from django.db import transaction

from clinic.models import Patient, Site, User
from clinic.services import ledger


@transaction.atomic
def report_printed(*, patients: Sequence[Patient], by: User | None, at: dt.datetime) -> None:
    """Note that the trend report of these people was printed."""
    ledger.record_many(
        [ledger.Item(patient, "report.printed", patient.code) for patient in patients],
        by=by,
        at=at,
    )


@transaction.atomic
def list_printed(*, site: Site, day: dt.date, by: User | None, at: dt.datetime) -> None:
    """Note that the clinic list of a day was printed."""
    ledger.record(chain=site, action="list.printed", subject=day.isoformat(), by=by, at=at)
