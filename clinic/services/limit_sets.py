"""Limit sets: seeded as immutable text, proposed by a steward, confirmed by a clinician."""

import datetime as dt
from collections.abc import Collection

from django.db import transaction
from django.db.models import Max

from clinic.models import Adoption, AdoptionConfirmed, LimitSetText, Membership, Patient, Site, User
from clinic.selectors.adopted import parsed
from clinic.services import ledger
from clinic.services.projection import eye_now_refresh
from clinic.services.reviews import review_latest
from trends.errors import EbblineError
from trends.limits import LimitSet, shipped, shipped_names


class AdoptionRefused(EbblineError):
    """An adoption that can't be confirmed; nothing changed."""


@transaction.atomic
def limit_set_seed(*, at: dt.datetime) -> list[LimitSetText]:
    """Store the shipped sets that aren't stored yet; files only seed this table."""
    rows = []
    for name in shipped_names():
        limits = shipped(name)
        row, made = LimitSetText.objects.get_or_create(
            digest=limits.digest,
            defaults={
                "name": limits.name,
                "version": limits.version,
                "text": limits.text,
                "at": at.replace(microsecond=0),
            },
        )
        if made:
            ledger.record(
                chain=ledger.SYSTEM, action="limit set seeded", by=None, at=at, rows=[row]
            )
        rows.append(row)
    return rows


def from_memory(limits: LimitSet) -> list[str]:
    """Return the entries that must be checked against the original before adoption."""
    return [f"{table}.{name}" for table, name, entry in limits.entries() if entry.memory]


@transaction.atomic
def adoption_propose(
    *, site: Site, limit_set: LimitSetText, cause: str = "", by: User, at: dt.datetime
) -> Adoption:
    """Propose a set for a cause ("" for every cause); not in force until confirmed.

    Raises ``AdoptionRefused`` for a cause the set isn't made for.
    """
    made_for = parsed(limit_set.text).causes
    if cause and cause not in made_for:
        raise AdoptionRefused(
            "cause",
            cause,
            ", ".join(made_for),
            "Limits made for one cause say nothing of another.",
            "Choose a set that names this cause.",
        )
    Site.objects.select_for_update().only("pk").get(pk=site.pk)
    last = Adoption.objects.filter(site=site).aggregate(last=Max("seq"))["last"] or 0
    adoption = Adoption.objects.create(
        site=site,
        limit_set=limit_set,
        cause=cause,
        seq=last + 1,
        by=by,
        at=at.replace(microsecond=0),
    )
    ledger.record(
        chain=site,
        action="limit set proposed",
        by=by,
        at=at,
        subject=str(limit_set),
        rows=[adoption],
    )
    return adoption


def adoption_confirm(
    *, adoption: Adoption, ticked: Collection[str], by: User, at: dt.datetime, today: dt.date
) -> AdoptionConfirmed:
    """Confirm a proposal from a clinician's own account, every value from memory ticked.

    Latest visits are reviewed anew after it. Raises ``AdoptionRefused``.
    """
    _refuse_unfit(adoption, ticked, by)
    with transaction.atomic():
        confirmed = AdoptionConfirmed.objects.create(
            adoption=adoption, ticked=sorted(ticked), by=by, at=at.replace(microsecond=0)
        )
        ledger.record(
            chain=adoption.site,
            action="limit set adopted",
            by=by,
            at=at,
            subject=str(adoption.limit_set),
            rows=[confirmed],
        )
    reviewed_anew(site=adoption.site, by=by, at=at, today=today, why="limit set adopted")
    return confirmed


def _refuse_unfit(adoption: Adoption, ticked: Collection[str], by: User) -> None:
    if AdoptionConfirmed.objects.filter(adoption=adoption).exists():
        raise AdoptionRefused(
            "adoption",
            str(adoption.limit_set),
            "a proposal that waits",
            "It was confirmed before.",
            "Load the page again.",
        )
    is_clinician = Membership.objects.filter(
        user=by, site=adoption.site, role=Membership.Role.CLINICIAN, active=True
    ).exists()
    if not is_clinician:
        raise AdoptionRefused(
            "adoption",
            str(by),
            "a clinician of this clinic",
            "A clinician answers for the limits a clinic uses.",
            "Ask a clinician to confirm it from their own account.",
        )
    lacking = sorted(set(from_memory(parsed(adoption.limit_set.text))) - set(ticked))
    if lacking:
        raise AdoptionRefused(
            "values from memory",
            f"{len(lacking)} not ticked: {', '.join(lacking[:4])}",
            "every one ticked",
            "A number from memory may be wrong.",
            "Check each against the original, tick it, then confirm.",
        )


def reviewed_anew(*, site: Site, by: User, at: dt.datetime, today: dt.date, why: str) -> int:
    """Review the latest visit of every eye of a site and refresh the projection."""
    patients = list(Patient.objects.filter(site=site).select_related("site").order_by("pk"))
    rows = review_latest(patients=patients, by=by, at=at, today=today, why=why)
    for start in range(0, len(patients), 200):
        with transaction.atomic():
            eye_now_refresh(patients=patients[start : start + 200])
    return len(rows)
