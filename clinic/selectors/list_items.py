"""What is raised of an eye, as lists show it: by rank, the same fact in one line."""

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from trends.regimens import registry as regimens
from trends.rules import registry as rules

RANKS = ("raise_first", "weigh_today", "keep_in_mind", "")
RANK_WORDS = {
    "raise_first": "Raise first",
    "weigh_today": "Weigh today",
    "keep_in_mind": "Keep in mind",
    "": "",
}
# Rules that state the same fact in other ways are merged under the highest of them.
SAME_FACT = (
    (
        "thickening",
        "rise_since_withholding",
        "drift",
        "crossed_limit",
        "fluid_back",
        "slow_rise",
        "thickening_possible",
        "crossed_limit_possible",
        "both_thickening",
    ),
    ("letters_lost", "off_chart_step"),
    ("pressure", "pressure_after", "pressure_low", "pressure_check_due"),
    ("looks_like_other_eye", "unlikely_jump", "transposed", "unit_doubt", "same_in_both_eyes"),
    ("did_not_come", "late", "break_off", "away", "no_plan"),
)
SIDE_WORDS = {"R": "Right eye", "L": "Left eye"}
SIDE_SLUGS = {"R": "right", "L": "left"}


@dataclass(frozen=True)
class Item:
    """Something raised of one eye, with the visit it comes from (None for the day's own facts)."""

    rule: str
    title: str
    rank: str
    rank_words: str
    sentence: str
    from_day: dt.date | None = None
    visit_kind: str = ""
    alarm: bool = False
    answer: Mapping[str, Any] = field(default_factory=dict)
    also: tuple[str, ...] = ()

    @property
    def is_open(self) -> bool:
        """Say whether it waits: unanswered, answered on other evidence, or its day has come."""
        return not self.answer.get("stands") or bool(self.answer.get("is_due"))


def titles() -> dict[str, str]:
    """Return the title of every rule and regimen."""
    found = {**rules.by_id(), **regimens.by_id()}
    return {name: str(module.INFO.title) for name, module in found.items()}


def item_of(item: Mapping[str, Any], named: Mapping[str, str], asked: dt.date) -> Item:
    """Return a stored item as it stands on the day asked; a standing one has no visit day."""
    day = item.get("visit_day")
    names = ("answer", "answered_by", "look_again_on", "stands")
    answer = {name: item[name] for name in names if name in item}
    # "Look again" closes an item only until the day it named.
    if again := answer.get("look_again_on"):
        answer["is_due"] = dt.date.fromisoformat(again) <= asked
    return Item(
        rule=item["rule"],
        title=named.get(item["rule"], item["rule"]),
        rank=item["rank"],
        rank_words=RANK_WORDS[item["rank"]],
        sentence=item["sentence"],
        from_day=dt.date.fromisoformat(day) if day else None,
        visit_kind=item.get("visit_kind", ""),
        alarm=bool(item.get("alarm")),
        answer=answer,
    )


def merged(items: Sequence[Item]) -> tuple[Item, ...]:
    """Return items by rank, with those that state the same fact under the highest of them."""
    ordered = sorted(items, key=lambda item: RANKS.index(item.rank))
    kept: list[Item] = []
    groups: dict[tuple[int, dt.date | None, bool], int] = {}
    for item in ordered:
        group = next((n for n, names in enumerate(SAME_FACT) if item.rule in names), -1)
        # One that still waits isn't hidden under one that was answered.
        key = (group, item.from_day, item.is_open)
        if group < 0 or key not in groups:
            groups[key] = len(kept)
            kept.append(item)
            continue
        first = kept[groups[key]]
        also = (*first.also, item.title.lower())
        kept[groups[key]] = replace(first, also=also)
    return tuple(kept)
