"""Taking a planned file in: keys prepared, everything stored in one transaction, keys settled."""

import datetime as dt
from collections.abc import Mapping
from pathlib import Path

from django.db import IntegrityError

from clinic.codes import CodeMistyped, normalise
from clinic.exchange.intake.keys import half_name, prepare_keys, read_keys, settle_keys
from clinic.exchange.intake.plan import IntakePlan
from clinic.exchange.intake.refused import IntakeRefused
from clinic.models import IntakeFile, Patient, Site, User
from clinic.services.bulk import Stored, visits_take_in
from clinic.services.past import PastFile

ACTION = "intake"


def refuse_twice(site: Site, sha256: str) -> None:
    """Refuse a file that this site has taken in before, byte for byte."""
    before = IntakeFile.objects.filter(site=site, sha256=sha256).first()
    if before is not None:
        raise IntakeRefused(
            "file",
            f"SHA-256 {sha256[:12]}…",
            "a file that was not taken in before",
            f"The same file was taken in on {before.at:%Y-%m-%d}.",
            "Nothing is to be done; to add visits, export only the new ones.",
        )


def recover_keys(site: Site, path: Path) -> str:
    """Finish or undo a key file that an earlier intake left behind when it was cut off.

    It is written before the commit: if its patients are in the log, the commit happened and the
    file is the only place that links them to people. Returns what was done, '' if nothing was.
    """
    half = half_name(path)
    if not half.exists():
        return ""
    try:
        codes = set(read_keys(half).values())
    except IntakeRefused:
        codes = set()
    here = Patient.objects.filter(site=site).values_list("code", flat=True)
    if codes and codes <= set(here):
        settle_keys(path)
        return "An earlier intake was cut off after storing; its key file was put in place."
    half.unlink()
    return "An earlier intake was cut off before storing; its unfinished key file was removed."


def known_patients(site: Site, keys: Mapping[str, str]) -> dict[str, Patient]:
    """Return the patients of a key file; refuse a code that isn't one of this site's."""
    wanted = {}
    for source_id, typed in keys.items():
        try:
            wanted[source_id] = normalise(typed)
        except CodeMistyped as problem:
            raise IntakeRefused(
                "key file", typed, "codes with fitting check characters", str(problem), ""
            ) from problem
    codes = sorted(set(wanted.values()))
    found: dict[str, Patient] = {}
    for start in range(0, len(codes), 500):
        some = codes[start : start + 500]
        rows = Patient.objects.filter(site=site, code__in=some).prefetch_related("eyes")
        found.update({patient.code: patient for patient in rows})
    absent = sorted(set(codes) - set(found))
    if absent:
        raise IntakeRefused(
            "key file",
            f"{len(absent)} codes, the first {absent[0]}",
            "codes of patients of this site",
            "They are not enrolled here.",
            "Choose the key file of this site and this database.",
        )
    return {source_id: found[code] for source_id, code in wanted.items()}


def take_in(
    plan: IntakePlan,
    *,
    site: Site,
    keys: Mapping[str, str],
    key_path: Path,
    label: str,
    by: User,
    at: dt.datetime,
    today: dt.date,
) -> Stored:
    """Store the planned file and its keys, or nothing of both."""

    def keep_keys(patients: dict[str, Patient]) -> None:
        codes = {source_id: patient.code for source_id, patient in patients.items()}
        prepare_keys(key_path, {**keys, **codes})

    file = PastFile(
        plan.source.sha256,
        label[:80],
        len(plan.source.cells),
        len(plan.refused),
        tuple(plan.assumed),
    )
    try:
        stored = visits_take_in(
            site=site,
            people=plan.people,
            by=by,
            at=at,
            action=ACTION,
            file=file,
            before_commit=keep_keys,
            today=today,
        )
    except BaseException as problem:
        half_name(key_path).unlink(missing_ok=True)
        if isinstance(problem, IntegrityError):
            raise IntakeRefused(
                "database",
                str(problem)[:120],
                "visits and files that are not stored yet",
                "Somebody stored the same in the meantime; nothing of this file was stored.",
                "Look at the plan again with --dry-run.",
            ) from problem
        raise
    settle_keys(key_path)
    return stored
