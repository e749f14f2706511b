"""Context of the whole person beside one eye: blood pressure and protein.

Used by no rule. An estimate is shown with its formula's caveat, or not at all where it would
mislead: perfusion only with a pressure of the same day, protein for so many days only.
"""

import datetime as dt
from collections.abc import Sequence

from clinic.adapters.facts import standing
from clinic.chart.spoken import day_words
from clinic.content import ContextRow
from clinic.models import PersonFact
from clinic.selectors.eye_log import EyeLog
from trends.measures import osmosis, pressure
from trends.measures.ranges import ranges

Kind = PersonFact.Kind


def body_rows(log: EyeLog, today: dt.date) -> tuple[ContextRow, ...]:
    """Return what blood pressure and protein say beside this eye."""
    facts = [one.entry for one in standing(PersonFact.objects.filter(patient=log.eye.patient))]
    known = [fact for fact in facts if fact.day <= today]
    return (*_pressures(log, known), *_protein(known, today))


def _newest(facts: Sequence[PersonFact], kind: str) -> PersonFact | None:
    mine = [fact for fact in facts if fact.kind == kind]
    return max(mine, key=lambda fact: (fact.day, fact.seq), default=None)


def _pressures(log: EyeLog, facts: Sequence[PersonFact]) -> list[ContextRow]:
    fact = _newest(facts, Kind.BLOOD_PRESSURE)
    if fact is None or fact.systolic_mmhg is None or fact.diastolic_mmhg is None:
        return []
    high, low = fact.systolic_mmhg, fact.diastolic_mmhg
    mean = pressure.mean_arterial(high, low)
    rows = [
        ContextRow(
            "Mean arterial pressure",
            f"{mean:.0f} mmHg",
            f"{low} + ({high} − {low}) / 3, {day_words(fact.day)}, brachial cuff",
        )
    ]
    same = [
        row.iop_tenths
        for visit, row in log.pairs("measured")
        if visit.day == fact.day and row.iop_tenths is not None
    ]
    if same:
        rows += _perfusion(high, low, same[-1] / 10, fact.day)
    return rows


def _perfusion(high: int, low: int, iop: float, on: dt.date) -> list[ContextRow]:
    mean = pressure.mean_arterial(high, low)
    return [
        ContextRow(
            "Mean ocular perfusion pressure",
            f"{pressure.perfusion(high, low, iop):.0f} mmHg",
            f"2/3 of {mean:.1f} − IOP {iop:g} the same day, {day_words(on)}; an estimate, seated; "
            "no agreed limit for macular edema (Van Keer 2016)",
        ),
        ContextRow(
            "Systolic, diastolic perfusion pressure",
            f"{pressure.part_perfusion(high, iop):g}, {pressure.part_perfusion(low, iop):g} mmHg",
            f"{high} − {iop:g}, {low} − {iop:g}, {day_words(on)}; an estimate, brachial cuff "
            "(from memory, check the original)",
        ),
    ]


def _protein(facts: Sequence[PersonFact], today: dt.date) -> list[ContextRow]:
    fact = _newest(facts, Kind.TOTAL_PROTEIN)
    if fact is None or fact.protein_tenths is None:
        return []
    days, shown = ranges("protein_shown_days").number("most"), f"{fact.protein_tenths / 10:g} g/dL"
    what = "Plasma colloid osmotic pressure"
    if (today - fact.day).days > days:
        old = f"total protein {shown} of {day_words(fact.day)} is older than {days} days"
        return [ContextRow(what, "not estimated", old)]
    note = (
        f"Landis-Pappenheimer, total protein {shown}, {day_words(fact.day)}; an estimate, can be "
        "wrong by 5 to 10 mmHg where albumin is low"
    )
    return [
        ContextRow(what, f"about {osmosis.colloid_osmotic(fact.protein_tenths):.1f} mmHg", note)
    ]
