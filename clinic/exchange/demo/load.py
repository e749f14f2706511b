"""Loading the invented clinic into an empty database, whole or not at all."""

import datetime as dt
from dataclasses import dataclass

from django.db import transaction

from clinic.exchange.demo.afterwards import answer_some, correct_one
from clinic.exchange.demo.as_past import past_person
from clinic.exchange.demo.asked import ask_some
from clinic.exchange.demo.generate import demo_rows
from clinic.exchange.demo.people import STAFF
from clinic.exchange.demo.rows import DemoRows, SiteRow
from clinic.models import Membership, Patient, Scanner, Site, User
from clinic.selectors.adopted import parsed
from clinic.services import ledger
from clinic.services.bulk import visits_take_in
from clinic.services.limit_sets import (
    adoption_confirm,
    adoption_propose,
    from_memory,
    limit_set_seed,
)
from trends.errors import EbblineError

ACTION = "demo"
CORRECTED = "longest"
ADOPTED_SET = "general"
EVERY_WEEKDAY = "0,1,2,3,4,5,6"


class DemoRefused(EbblineError):
    """The demo can't be loaded into this database; nothing was stored."""


@dataclass(frozen=True)
class DemoLoaded:
    """What was loaded: the invented staff by sign-in name, sites by slug, patients by key."""

    users: dict[str, User]
    sites: dict[str, Site]
    patients: dict[str, Patient]


def demo_load(*, today: dt.date, at: dt.datetime) -> DemoLoaded:
    """Load the invented clinic as it stands on ``today``.

    The staff get no usable password; the caller sets one. Raises ``DemoRefused`` when the database
    holds a site, a patient or anybody who signs in.
    """
    refuse_others()
    rows = demo_rows(today)
    with transaction.atomic():
        users = staff()
        sites = {row.slug: site_of(row) for row in rows.sites}
        for row in STAFF:
            for slug in row.sites:
                join(users[row.username], sites[slug], row.roles)
        record_sites(sites, users["steward"], at)
        adopt_general(sites, users, at, today)
        patients = people(rows, sites, users["recorder"], at, today)
        ask_some(rows, patients, users["recorder"], at, today)
        correct_one(patients[CORRECTED], "R", users["recorder"], at, today)
        answer_some(rows, patients, users["clinician"], at, today)
    return DemoLoaded(users, sites, patients)


def refuse_others() -> None:
    """Refuse a database with anybody in it: invented and real people are never mixed."""
    for what, found in (
        ("sites", Site.objects.count()),
        ("patients", Patient.objects.count()),
        ("people who sign in", User.objects.count()),
    ):
        if found:
            raise DemoRefused(
                "demo",
                f"a database with {found} {what}",
                "an empty database",
                "Invented and real people are never mixed.",
                "Set EBBLINE_HOME to another folder and start the demo there.",
            )


def staff() -> dict[str, User]:
    """Make the invented colleagues, without a usable password."""
    users = {}
    for row in STAFF:
        user = User(username=row.username, display_name=row.display_name)
        user.set_unusable_password()
        user.save()
        users[row.username] = user
    return users


def site_of(row: SiteRow) -> Site:
    """Make one invented site with its scanners; open every day, so that today has a clinic."""
    site = Site.objects.create(
        slug=row.slug,
        label=row.label,
        emergency_text=row.emergency_text,
        paper=row.paper,
        clinic_weekdays=EVERY_WEEKDAY,
        is_demo=True,
    )
    for label, oct_class in row.scanners:
        Scanner.objects.create(site=site, label=label, oct_class=oct_class)
    return site


def join(user: User, site: Site, roles: tuple[str, ...]) -> None:
    """Give a colleague roles at a site."""
    for role in roles:
        Membership.objects.create(user=user, site=site, role=role)


def record_sites(sites: dict[str, Site], by: User, at: dt.datetime) -> None:
    """Write the making of the sites, scanners and memberships into the ledger."""
    items = []
    for site in sites.values():
        made = [site, *site.scanners.all(), *site.memberships.all()]
        items.append(ledger.Item(site, ACTION, site.slug, tuple(made)))
    ledger.record_many(items, by=by, at=at)


def adopt_general(
    sites: dict[str, Site], users: dict[str, User], at: dt.datetime, today: dt.date
) -> None:
    """Adopt the shipped set at each site: proposed by the steward, confirmed by the clinician.

    The invented clinician ticks every value from memory; a real one checks them first.
    """
    general = next(row for row in limit_set_seed(at=at) if row.name == ADOPTED_SET)
    ticked = from_memory(parsed(general.text))
    for site in sites.values():
        proposal = adoption_propose(site=site, limit_set=general, by=users["steward"], at=at)
        adoption_confirm(
            adoption=proposal, ticked=ticked, by=users["clinician"], at=at, today=today
        )


def people(
    rows: DemoRows, sites: dict[str, Site], by: User, at: dt.datetime, today: dt.date
) -> dict[str, Patient]:
    """Store everybody of every site with all their visits."""
    stored: dict[str, Patient] = {}
    for slug, site in sites.items():
        scanners = {scanner.label: scanner for scanner in site.scanners.all()}
        here = [past_person(one, scanners, at) for one in rows.people if one.site == slug]
        done = visits_take_in(site=site, people=here, by=by, at=at, today=today, action=ACTION)
        stored.update(done.patients)
    return stored
