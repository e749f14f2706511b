"""Sign-ins and sign-outs, recorded on the chains of the person's sites."""

import datetime as dt

from django.db import transaction

from clinic.models import Membership, User
from clinic.services import ledger


def _note(action: str, by: User, at: dt.datetime) -> None:
    with transaction.atomic():
        slugs = (
            Membership.objects.filter(user=by, active=True)
            .order_by("site__slug")
            .values_list("site__slug", flat=True)
            .distinct()
        )
        chains = [f"site:{slug}" for slug in slugs] or [ledger.SYSTEM]
        items = [ledger.Item(chain, action, by.username) for chain in chains]
        ledger.record_many(items, by=by, at=at)


def signed_in(*, by: User, at: dt.datetime) -> None:
    """Record a sign-in."""
    _note("signed in", by, at)


def signed_out(*, by: User, at: dt.datetime) -> None:
    """Record a sign-out."""
    _note("signed out", by, at)


def demo_passwords_renewed(*, at: dt.datetime) -> None:
    """Record that the demo people got new passwords."""
    with transaction.atomic():
        ledger.record(chain=ledger.SYSTEM, action="demo passwords renewed", by=None, at=at)
