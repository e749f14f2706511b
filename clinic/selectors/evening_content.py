"""The clinic list of a day as the content of the evening-before print."""

import datetime as dt
from zoneinfo import ZoneInfo

import clinic
from clinic.chart.spoken import day_words
from clinic.content import EveningBlock, EveningEye, EveningList
from clinic.models import EyeNow
from clinic.notice import NOTICE
from clinic.selectors.access import Here
from clinic.selectors.clinic_list import Block, ClinicList, EyeLine, clinic_list
from clinic.selectors.eye_words import person_text
from clinic.selectors.list_items import Item
from clinic.selectors.report_content import ledger_seal
from clinic.selectors.visit_words import STAYS, iop_text, worded


def evening_content(here: Here, day: dt.date, at: dt.datetime) -> EveningList:
    """Return the list of a day as it stands at a moment."""
    printed_at = at.astimezone(ZoneInfo(here.site.time_zone))
    found = clinic_list(here, day, printed_at.date())
    return EveningList(
        site_label=here.site.label,
        day=day,
        printed_at=printed_at.replace(tzinfo=None, second=0, microsecond=0),
        printed_by=str(here.user),
        version=clinic.__version__,
        notice=NOTICE,
        head=tuple(head_lines(found)),
        blocks=tuple(block_of(block, day) for block in found.blocks),
        ledger_seal=ledger_seal(),
        emergency_text=here.site.emergency_text,
    )


def head_lines(found: ClinicList) -> list[str]:
    """Return the day's planned treatments, people for both eyes, missing plans."""
    planned = "; ".join(f"{words}: {count}" for words, count in found.treatments)
    lines = [
        f"{len(found.blocks)} people. Planned: {planned or 'nothing'}.",
        f"Both eyes treated: {found.both_eyes}. Booked without a plan: {found.without_plan}.",
    ]
    if not found.adopted:
        lines.append("No limit set adopted: only the floor rules run.")
    return lines


def block_of(block: Block, day: dt.date) -> EveningBlock:
    """Return one person."""
    booked = f"{block.booked_time:%H:%M}" if block.booked_time else "no time"
    return EveningBlock(
        code=block.patient.code,
        person=person_text(block.patient),
        booked=booked,
        rank=block.rank_words,
        eyes=tuple(eye_of(eye, day) for eye in block.eyes),
    )


def eye_of(eye: EyeLine, day: dt.date) -> EveningEye:
    """Return one eye: facts, last values with change, reading, raised, the rest counted."""
    now = eye.now
    return EveningEye(
        side_words=eye.side_words,
        facts=" · ".join(part for part in facts(eye) if part),
        values=" · ".join(values(now, eye.fellow_letters)),
        reading=f"Regimen reads: {now.reading}, from visit of {day_words(now.reading_from)}"
        if now.reading and now.reading_from
        else "",
        raised=tuple(
            item_text(item, day) for item in (*eye.due, *eye.still_open, *eye.today) if item.is_open
        ),
        folded=(f"{len(eye.folded)} kept in mind; " if eye.folded else "")
        + f"limits not reached by {eye.limits_not_reached} "
        f"rule{'' if eye.limits_not_reached == 1 else 's'}; {eye.could_not_tell} couldn't tell",
    )


def facts(eye: EyeLine) -> list[str]:
    """Return cause, status, regimen with place, weeks since treatment, what is planned."""
    now, weeks = eye.now, eye.weeks_since_treatment
    regimen = ", ".join(part for part in (eye.regimen_title, now.place) if part)
    return [
        worded(now.cause) or "cause not recorded",
        worded(now.status) or "status not recorded",
        regimen or "no regimen chosen",
        "" if now.history_entered else "history not entered",
        "" if weeks is None else f"{weeks} weeks since {now.last_agent or 'treatment'}",
        f"planned {eye.planned}" if eye.planned else "",
        "only seeing eye" if eye.only_seeing_eye else "",
    ]


def values(now: EyeNow, fellow_letters: int | None) -> list[str]:
    """Return last CST, acuity and IOP, each with its change; "not recorded" is told."""
    cst = "not recorded" if now.cst_um is None else f"{now.cst_um}{STAYS}µm"
    seen = now.acuity_shown.replace("_", " ") or "not recorded"
    letters = seen if now.letters is None else f"{now.letters}{STAYS}letters"
    iop = iop_text(now.iop_tenths) or "not recorded"
    fellow = "" if fellow_letters is None else f", fellow eye {fellow_letters}"
    return [
        f"CST {cst}{_change(now.cst_change_um, now.cst_since)}",
        f"acuity {letters}{_change(now.letters_change, now.letters_since)}{fellow}",
        f"IOP {iop}",
    ]


def _change(change: int | None, since: dt.date | None) -> str:
    if change is None or since is None:
        return ""
    return f" ({change:+d} since {day_words(since)})".replace("-", "\N{MINUS SIGN}", 1)


def item_text(item: Item, day: dt.date) -> str:
    """Return one raised line with the visit it is from."""
    where = ""
    if item.from_day:
        today = item.from_day == day
        where = " (from today)" if today else f" (from visit of {day_words(item.from_day)})"
    also = f" (also: {', '.join(item.also)})" if item.also else ""
    return f"{item.rank_words}: {item.sentence}{also}{where}"
