"""What follows from every write about a person: reviews made anew, and the eyes projected."""

import datetime as dt

from clinic.models import Patient, User
from clinic.services.projection import eye_now_write, read_of, rows_for
from clinic.services.reviews import review_person


def renew(
    *, patient: Patient, from_day: dt.date, by: User, at: dt.datetime, today: dt.date, why: str
) -> None:
    """Review both eyes from a day on and project them; inside the caller's transaction.

    The records are read once for both: saving a part is waited for.
    """
    read = read_of([patient])
    review_person(
        patient=patient, from_day=from_day, by=by, at=at, today=today, why=why, loaded=read[1]
    )
    eye_now_write(rows_for([patient], read))
