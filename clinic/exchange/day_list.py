"""A day's clinic list outside the browser: JSON, CSV and plain text, each with the notice."""

from collections.abc import Iterator
from typing import Any, TextIO

from clinic.exchange.safe_csv import write_safe_csv
from clinic.models import EyeNow, Site
from clinic.notice import NOTICE
from clinic.selectors.clinic_list import Block, ClinicList, EyeLine
from clinic.selectors.list_items import Item

Cells = dict[str, Any]
CSV_HEADER = (
    "day",
    "code",
    "booked_time",
    "eye",
    "cause",
    "status",
    "regimen",
    "place",
    "reading",
    "reading_from",
    "weeks_since_treatment",
    "planned",
    "cst_um",
    "cst_change_um",
    "acuity",
    "letters",
    "letters_change",
    "iop_mmhg",
    "iop_change_mmhg",
    "top_rank",
    "raised",
    "limits_not_reached",
    "could_not_tell",
    "notice",
)


def iso(moment: Any) -> str | None:
    """Return a date or time as ISO text; None where there is none."""
    return None if moment is None else str(moment.isoformat())


def mmhg(tenths: int | None) -> float | None:
    """Return tenths of mmHg as mmHg."""
    return None if tenths is None else tenths / 10


def last_values(now: EyeNow) -> Cells:
    """Return the last CST, acuity and pressure with their change since the comparable one."""
    return {
        "cst_um": now.cst_um,
        "cst_change_um": now.cst_change_um,
        "cst_since": iso(now.cst_since),
        "acuity": now.acuity_shown or None,
        "letters": now.letters,
        "letters_change": now.letters_change,
        "letters_since": iso(now.letters_since),
        "iop_mmhg": mmhg(now.iop_tenths),
        "iop_change_mmhg": mmhg(now.iop_change_tenths),
        "iop_since": iso(now.iop_since),
    }


def raised_cells(item: Item, site: Site) -> Cells:
    """Return one raised thing; an alarm carries the site's own emergency text."""
    cells: Cells = {
        "rule": item.rule,
        "rank": item.rank,
        "sentence": item.sentence,
        "from_visit": iso(item.from_day),
        "answer": item.answer.get("answer") if not item.is_open else None,
    }
    if item.alarm:
        cells["emergency_text"] = site.emergency_text
    return cells


def eye_cells(line: EyeLine, site: Site) -> Cells:
    """Return one eye of the list."""
    now = line.now
    return {
        "eye": line.side,
        "eye_words": line.side_words.lower(),
        "cause": now.cause or None,
        "status": now.status or None,
        "regimen": now.regimen or None,
        "place": now.place or None,
        "reading": now.reading or None,
        "reading_from": iso(now.reading_from),
        "weeks_since_treatment": line.weeks_since_treatment,
        "planned": line.planned or None,
        **last_values(now),
        "fellow_letters": line.fellow_letters,
        "only_seeing_eye": line.only_seeing_eye,
        "history_entered": now.history_entered,
        "raised": [raised_cells(item, site) for item in line.raised],
        "limits_not_reached": line.limits_not_reached,
        "could_not_tell": line.could_not_tell,
    }


def as_patients(day_list: ClinicList, site: Site) -> list[Cells]:
    """Return the list as JSON-able patients, in the order of the page; each carries the notice."""
    return [
        {
            "code": block.patient.code,
            "day": iso(day_list.day),
            "booked_time": iso(block.booked_time),
            "sex": block.patient.sex or None,
            "birth_year": block.patient.birth_year,
            "top_rank": block.top_rank or None,
            "eyes": [eye_cells(line, site) for line in block.eyes],
            "notice": NOTICE,
        }
        for block in day_list.blocks
    ]


def write_csv(out: TextIO, day_list: ClinicList, site: Site) -> None:
    """Write one row an eye; what is raised is joined in one cell."""
    rows = []
    for patient in as_patients(day_list, site):
        for eye in patient["eyes"]:
            said = " | ".join(one["sentence"] for one in eye["raised"])
            ranks = [one["rank"] for one in eye["raised"]]
            cells = {**eye, **{name: patient[name] for name in ("day", "code", "booked_time")}}
            cells |= {"raised": said, "top_rank": ranks[0] if ranks else "", "notice": NOTICE}
            rows.append([cells[name] for name in CSV_HEADER])
    write_safe_csv(out, CSV_HEADER, rows)


def text_lines(day_list: ClinicList, site: Site) -> Iterator[str]:
    """Yield the list as lines of plain text."""
    yield f"{site.label}, clinic list of {day_list.day.isoformat()}"
    yield NOTICE
    if not day_list.is_clinic_day:
        yield "No clinic on this day."
    if not day_list.adopted:
        yield "No limit set adopted: only the floor rules run."
    planned = ", ".join(f"{count} x {what}" for what, count in day_list.treatments)
    yield (
        f"Patients: {len(day_list.blocks)}. Planned: {planned or 'nothing'}. Both eyes to treat: "
        f"{day_list.both_eyes}. Without a planned treatment or check: {day_list.without_plan}."
    )
    for block in day_list.blocks:
        yield ""
        yield from block_lines(block, site)


def block_lines(block: Block, site: Site) -> Iterator[str]:
    """Yield one patient."""
    time = block.booked_time.strftime("%H:%M") if block.booked_time else "no time"
    person = ", ".join(
        part
        for part in (
            block.patient.get_sex_display(),
            f"born {block.patient.birth_year}" if block.patient.birth_year else "",
        )
        if part
    )
    yield f"{block.patient.code}  {time}  {person}  {block.rank_words}".rstrip()
    for line in block.eyes:
        yield from eye_lines(line, site)


def eye_lines(line: EyeLine, site: Site) -> Iterator[str]:
    """Yield one eye: where it stands, last values, what is raised, what could not be judged."""
    now = line.now
    stands = [now.cause, now.status]
    stands += [line.regimen_title, now.place, f"planned {line.planned}" if line.planned else ""]
    if line.weeks_since_treatment is not None:
        stands.append(f"{line.weeks_since_treatment} weeks since treatment")
    if not now.history_entered:
        stands.append("history not entered")
    if line.only_seeing_eye:
        stands.append("only seeing eye")
    yield f"  {line.side_words}: " + ", ".join(part.replace("_", " ") for part in stands if part)
    yield "    last: " + "; ".join(value_words(now)) if value_words(now) else "    last: nothing"
    if now.reading:
        yield f"    reading of {iso(now.reading_from)}: {now.reading}"
    for item in line.raised:
        when = f"from visit of {iso(item.from_day)}" if item.from_day else "today"
        answered = "" if item.is_open else f" (answered: {item.answer.get('answer')})"
        yield f"    {item.rank_words}, {when}: {item.sentence}{answered}"
        if item.alarm:
            yield f"      {site.emergency_text}"
    yield (
        f"    limits not reached by {line.limits_not_reached} rules; "
        f"{line.could_not_tell} couldn't tell"
    )


def value_words(now: EyeNow) -> list[str]:
    """Return the last values in words, each with its change."""
    values = last_values(now)
    words = []
    if now.cst_um is not None:
        words.append(f"CST {now.cst_um} µm{change(now.cst_change_um, values['cst_since'])}")
    if now.acuity_shown:
        shown = now.acuity_shown.replace("_", " ")
        words.append(shown + change(now.letters_change, values["letters_since"]))
    if now.iop_tenths is not None:
        step = values["iop_change_mmhg"]
        words.append(f"IOP {now.iop_tenths / 10:g} mmHg{change(step, values['iop_since'])}")
    return words


def change(step: float | None, since: str | None) -> str:
    """Return a change in brackets, or nothing where there is nothing to compare with."""
    return "" if step is None else f" ({step:+g} since {since})"
