"""What stands open of an eye: raised at its last visit, and alarms until somebody answers."""

import datetime as dt
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from clinic.adapters import UNMEASURED
from clinic.models import Answer, Review

Fields = dict[str, Any]
TOLD = "alarm_symptoms"
RANKS = ("raise_first", "weigh_today", "keep_in_mind")


def newest_place(reviews: Sequence[Review]) -> int:
    """Return the place of the last visit that could measure; what it raised stays after a call."""
    able = [place for place, row in enumerate(reviews) if row.visit.kind not in UNMEASURED]
    return able[-1] if able else len(reviews) - 1


def is_alarm(row: Mapping[str, Any]) -> bool:
    """Say whether a raised row stays until somebody answers: it shows the emergency text."""
    return row["outcome"] == "raised" and bool((row.get("working") or {}).get("emergency"))


def answer_state(row: Mapping[str, Any], review: Review, answers: Iterable[Answer]) -> Fields:
    """Return the newest answer to a row, and whether it still stands for the same evidence."""
    mine = [a for a in answers if a.visit_id == review.visit_id and a.rule == row["rule"]]
    if not mine:
        return {}
    last = mine[-1]
    return {
        "answer": last.answer,
        "answered_by": str(last.by),
        "answered_at": last.at.isoformat(),
        "look_again_on": last.look_again_on.isoformat() if last.look_again_on else "",
        "stands": last.inputs_digest == row.get("digest"),
    }


def open_fields(reviews: Sequence[Review], answers: Sequence[Answer]) -> Fields:
    """Return what is open by an eye's newest reviews, oldest visit first, with the last reading."""
    if not reviews:
        return {"open_items": [], "open_top_rank": ""}
    place = newest_place(reviews)
    last, shown = reviews[place], reviews[place:]
    items = []
    for review in reversed(reviews):
        for row in review.raised:
            said = answer_state(row, review, answers)
            sticky = is_alarm(row) and not said.get("stands")
            if row["outcome"] == "raised" and (review in shown or sticky):
                items.append(_item(row, review, said))
    open_ranks = [item["rank"] for item in items if not item.get("stands")]
    top = next((rank for rank in RANKS if rank in open_ranks), "")
    told = [dt.date.fromisoformat(item["visit_day"]) for item in items if _is_told(item)]
    waiting = [dt.date.fromisoformat(item["visit_day"]) for item in items if _waits(item)]
    outcomes = list(last.outcomes.values())
    reading: Fields = next((one.reading for one in reversed(reviews) if one.reading), {})
    from_day = next((one.visit.day for one in reversed(reviews) if one.reading), None)
    return {
        "open_items": [
            *items,
            {
                "counts": {
                    "limit_not_reached": outcomes.count("limit_not_reached"),
                    "could_not_tell": outcomes.count("could_not_tell"),
                }
            },
        ],
        "open_top_rank": top,
        "alarm_since": min(told, default=None),
        "unanswered_since": min(waiting, default=None),
        "reading": str(reading.get("reading", ""))[:160],
        "reading_from": from_day,
        "place": str(reading.get("place", ""))[:60],
    }


def _is_told(item: Fields) -> bool:
    """Say whether an item is an alarm that somebody told and nobody answered."""
    return item["rule"] == TOLD and item["alarm"] and not item.get("stands")


def _waits(item: Fields) -> bool:
    """Say whether an item raised first has no answer that stands; history taken in isn't asked."""
    first = item["rank"] == RANKS[0] and not item["from_intake"]
    return first and not item.get("stands")


def _item(row: Mapping[str, Any], review: Review, said: Fields) -> Fields:
    return {
        "rule": row["rule"],
        "rank": row["rank"],
        "sentence": row["sentence"],
        "visit_day": review.visit.day.isoformat(),
        "visit_kind": review.visit.kind,
        "eye": row["eye"],
        "alarm": is_alarm(row),
        "from_intake": review.visit.from_intake_id is not None,
        **said,
    }
