"""Context of the whole person beside one eye: blood pressure, protein, and since best and baseline.

Used by no rule. An estimate is shown with its formula's caveat, or not at all where it would
mislead: perfusion only with a pressure of the same day, protein for so many days only.
"""

import datetime as dt
from collections.abc import Sequence

from clinic.adapters.facts import standing
from clinic.chart.spoken import day_words
from clinic.content import ContextRow
from clinic.models import Measured, PersonFact
from clinic.selectors.eye_log import EyeLog
from trends.measures import osmosis, pressure
from trends.measures.ranges import ranges

Kind = PersonFact.Kind


def body_rows(log: EyeLog, today: dt.date) -> tuple[ContextRow, ...]:
    """Return what blood pressure, protein, and the best and first values say beside this eye."""
    facts = [one.entry for one in standing(PersonFact.objects.filter(patient=log.eye.patient))]
    known = [fact for fact in facts if fact.day <= today]
    return (*_pressures(log, known), *_protein(known, today), *_since(log))


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
        iop = same[-1] / 10
        rows.append(
            ContextRow(
                "Mean ocular perfusion pressure",
                f"{pressure.perfusion(high, low, iop):.0f} mmHg",
                f"2/3 of {mean:.1f} − IOP {iop:g} the same day; an estimate, seated; no agreed "
                "limit for macular edema (Van Keer 2016)",
            )
        )
    return rows


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


def _since(log: EyeLog) -> list[ContextRow]:
    """Return letters and thickness now against the best and the first by the same method."""
    rows = []
    measured = log.pairs("measured")
    letters = [(visit.day, row) for visit, row in measured if row.letters is not None]
    if len(letters) > 1:
        day, now = letters[-1]
        same = [(on, row) for on, row in letters if _acuity_method(row) == _acuity_method(now)]
        best_on, best = max(same[:-1], key=lambda one: one[1].letters or 0, default=(day, now))
        first_on, first = same[0]
        if len(same) > 1:
            rows += [
                _change("Letters since the best", best.letters, now.letters, best_on, "letters"),
                _change("Letters since the first", first.letters, now.letters, first_on, "letters"),
            ]
    scans = [(visit.day, row) for visit, row in measured if row.cst_um is not None]
    same_class = [one for one in scans if scans and one[1].oct_class == scans[-1][1].oct_class]
    if len(same_class) > 1:
        (on, first), (_day, now) = same_class[0], same_class[-1]
        rows.append(_change("CST since the first", first.cst_um, now.cst_um, on, "µm"))
    return rows


def _acuity_method(row: Measured) -> tuple[str, str, str]:
    return row.acuity_notation, row.acuity_chart, row.acuity_correction


def _change(what: str, was: int | None, now: int | None, on: dt.date, unit: str) -> ContextRow:
    change = (now or 0) - (was or 0)
    shown = f"{change:+d}".replace("-", "−") if change else "0"
    return ContextRow(what, f"{shown} {unit}", f"{was} on {day_words(on)}, {now} now; a fact only")
