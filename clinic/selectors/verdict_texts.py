"""Verdict rows of the engine as finished words: for the eye course and for paper."""

import datetime as dt
from collections.abc import Iterable, Mapping
from typing import Any

from clinic.content import MissingText, ValueUsed, VerdictText, Words

Row = Mapping[str, Any]
OUTCOMES = {"raised": "Raised", "still": "Still"}
RANKS = {
    "raise_first": "Raise first",
    "weigh_today": "Weigh today",
    "keep_in_mind": "Keep in mind",
}
RANK_ORDER = ("raise_first", "weigh_today", "keep_in_mind", "")
COLUMNS = {
    "cst_um": "CST",
    "oct_class": "scanner class",
    "scan_quality": "a usable scan",
    "irf": "IRF grade",
    "srf": "SRF grade",
    "acuity": "acuity",
    "acuity_chart": "acuity chart",
    "acuity_correction": "acuity correction",
    "iop_mmhg": "IOP",
    "iop_method": "tonometer",
    "iop_after_mmhg": "IOP after treatment",
    "agent": "what was given",
    "laser": "laser",
    "sex": "sex",
    "cause": "cause",
    "due_date": "due date",
    "symptoms": "symptoms",
    "scanner": "scanner",
    "kind": "kind of visit",
    "status": "status",
    "date": "an earlier value",
    "regimen": "regimen",
    "treatment_planned": "whether a treatment is planned",
    "context": "what bears on a treatment",
}


def as_day(value: Any) -> dt.date | None:
    """Return a date from a date or ISO text; nothing from nothing."""
    if isinstance(value, dt.date):
        return value
    return dt.date.fromisoformat(value) if value else None


def source_text(source: Row) -> str:
    """Return one source with its population, its strength, and the mark "from memory"."""
    told = [str(source.get("text", "")).rstrip(".")]
    if source.get("population"):
        told.append(f"population: {source['population']}")
    if source.get("strength"):
        told.append(f"strength: {source['strength']}")
    if source.get("memory"):
        told.append("from memory, check the original")
    return "; ".join(told) + "."


def value_used(value: Row) -> ValueUsed:
    """Return one value of the working."""
    assumed = value.get("assumed") or ""
    return ValueUsed(
        what=str(value.get("what", "")),
        amount=" ".join(str(part) for part in (value.get("value"), value.get("unit")) if part),
        day=as_day(value.get("date")),
        method=str(value.get("method") or ""),
        as_entered=str(value.get("as_entered") or ""),
        assumed="assumed" if assumed is True else str(assumed),
    )


def verdict_text(
    row: Row,
    *,
    title: str,
    kind: str = "",
    adopted: str = "",
    emergency_text: str = "",
    answer: str = "",
    answerable: bool = False,
) -> VerdictText:
    """Return a raised or still row with its working in words.

    An emergency shows the site's own text instead of things to weigh, and can't be put off.
    """
    working: Row = row.get("working") or {}
    rule: Row = working.get("rule") or {}
    emergency = bool(working.get("emergency"))
    return VerdictText(
        rule=str(row["rule"]),
        title=title,
        outcome=OUTCOMES.get(str(row["outcome"]), str(row["outcome"])),
        rank=RANKS.get(str(row.get("rank") or ""), ""),
        sentence=str(row["sentence"]),
        from_day=as_day(row.get("date")),
        values=tuple(value_used(value) for value in working.get("values") or ()),
        arithmetic=_words(working.get("arithmetic")),
        version=f"{row['rule']} {row.get('rule_version', '')}".strip(),
        limit=_limit(rule, has_words=bool(adopted)),
        adopted=adopted,
        sources=tuple(source_text(source) for source in working.get("source") or ()),
        noise=str(working.get("noise") or ""),
        unknowns=_words([*(working.get("unknowns") or ()), *(working.get("assumed") or ())]),
        options=() if emergency else _words(working.get("options")),
        emergency_text=emergency_text if emergency else "",
        not_for=_words(working.get("not_for")),
        answer=answer,
        kind=kind,
        answerable=answerable,
        may_look_again=not emergency,
    )


def _limit(rule: Row, has_words: bool) -> str:
    """Return the limit; with name and version of its set where the adoption doesn't name it."""
    limit = str(rule.get("limit") or "")
    named = " ".join(
        str(part) for part in (rule.get("limit_set"), rule.get("limit_set_version")) if part
    )
    if has_words or not named:
        return limit
    return ", ".join(part for part in (limit, named) if part)


def _words(lines: Iterable[Any] | None) -> Words:
    return tuple(dict.fromkeys(str(line) for line in lines or () if line))


def missing_text(row: Row, *, title: str) -> MissingText:
    """Return a row that couldn't tell, with what was missing in words."""
    missing = row.get("missing") or ()
    names = missing.split("+") if isinstance(missing, str) else missing
    return MissingText(
        rule=str(row["rule"]),
        title=title,
        sentence=str(row.get("sentence") or ""),
        missing=tuple(COLUMNS.get(name, name) for name in names if name),
    )


def by_rank(texts: Iterable[VerdictText]) -> tuple[VerdictText, ...]:
    """Return verdicts with the highest rank first; the order of the rules stays within a rank."""
    order = [RANKS.get(rank, "") for rank in RANK_ORDER]
    return tuple(sorted(texts, key=lambda text: order.index(text.rank)))
