"""Letters and thickness now against the best and the first they may be compared with: facts only.

What may be compared is what the rules compare: one chart of five-letter lines and one correction,
one class of scanner, no breaking event between; a poor scan is neither best nor first.
"""

import datetime as dt
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from clinic.adapters import BREAKING
from clinic.chart.spoken import day_words
from clinic.content import ContextRow
from clinic.selectors.chart_given import scan_key
from clinic.selectors.eye_log import EyeLog
from trends.measures import acuity as acuities

Key = tuple[object, ...] | None


@dataclass(frozen=True, slots=True)
class Value:
    """One letter score or thickness (µm); what it compares with has an equal ``key``, not None.

    ``amount`` None was measured and can't be counted, for the reason in ``why``.
    """

    day: dt.date
    amount: int | None
    key: Key
    why: str = ""


def since_rows(log: EyeLog) -> tuple[ContextRow, ...]:
    """Return letters since the best and the first, thickness since the lowest and the first."""
    letters, scans = list(_letters(log)), list(_scans(log))
    return (
        *_against("Letters since the best", letters, max, "letters"),
        *_against("Letters since the first", letters, None, "letters"),
        *_against("CST since the lowest", scans, min, "µm"),
        *_against("CST since the first", scans, None, "µm"),
    )


def _breaks(log: EyeLog, day: dt.date) -> int:
    return sum(1 for event in log.events if event.kind in BREAKING and event.day <= day)


def _letters(log: EyeLog) -> Iterable[Value]:
    for visit, row in log.pairs("measured"):
        if not row.acuity:
            continue
        read = acuities.parse(row.acuity_notation, row.acuity, row.acuity_chart)
        counts = read.five_letters and read.letters is not None
        yield Value(
            visit.day,
            read.letters if counts else None,
            (read.scale, row.acuity_correction, _breaks(log, visit.day)),
            "" if counts else "the last acuity isn't in letters",
        )


def _scans(log: EyeLog) -> Iterable[Value]:
    for visit, row in log.pairs("measured"):
        if row.cst_um is None:
            continue
        klass, poor = scan_key(row, by_scanner=False), row.scan_quality == "poor"
        yield Value(
            visit.day,
            None if poor else row.cst_um,
            (klass, _breaks(log, visit.day)) if klass else None,
            "the last scan is poor" if poor else "" if klass else "its class isn't recorded",
        )


def _against(
    what: str, values: Sequence[Value], choose: object, unit: str
) -> tuple[ContextRow, ...]:
    """Return the change against the chosen earlier value; why there is none, where some exist."""
    earlier = [one for one in values if one.day < values[-1].day] if values else []
    if not earlier:
        return ()
    now = values[-1]
    same = [one for one in earlier if one.amount is not None and one.key == now.key]
    if now.amount is None or now.key is None or not same:
        why = now.why or "nothing earlier was measured in a comparable way"
        return (ContextRow(what, "not compared", f"{why} ({day_words(now.day)})"),)
    # Of equal values the latest is named.
    amounts = [one.amount for one in same if one.amount is not None]
    wanted = choose(amounts) if callable(choose) else None
    was = same[0] if wanted is None else [one for one in same if one.amount == wanted][-1]
    return (_change(what, was, now, unit),)


def _change(what: str, was: Value, now: Value, unit: str) -> ContextRow:
    change = (now.amount or 0) - (was.amount or 0)
    shown = f"{change:+d}".replace("-", "−") if change else "0"
    days = f"{was.amount} on {day_words(was.day)}, {now.amount} on {day_words(now.day)}"
    one = unit.removesuffix("s") if abs(change) == 1 else unit
    return ContextRow(what, f"{shown} {one}", f"{days}; a fact only")
