"""How often rules raise: shares of visits by rank and rule, and per 30-eye day."""

from dataclasses import dataclass

import numpy as np

from trends.review import Reviewed
from trends.rules import registry
from trends.settling import settled
from trends.verdict import KEEP_IN_MIND, RAISE_FIRST, RAISED, RANK_WORDS, WEIGH_TODAY

DAY_OF_EYES = 30
RANKS_DOWN = (RAISE_FIRST, WEIGH_TODAY, KEEP_IN_MIND)


@dataclass(frozen=True)
class Share:
    """A count of visits out of all visits."""

    count: int
    of: int

    @property
    def percent(self) -> float:
        """The share in per cent; 0 of 0 is 0."""
        return 100 * self.count / self.of if self.of else 0.0

    @property
    def a_day(self) -> float:
        """The share as eyes of a 30-eye day."""
        return DAY_OF_EYES * self.count / self.of if self.of else 0.0


def visit_rules(reviewed: Reviewed) -> list[str]:
    """Return the rules about visits; standing rules are worked from their own lists."""
    return [
        name
        for name, module in registry.by_id().items()
        if module.INFO.shape == "visit" and name in reviewed.judged
    ]


def by_rank(reviewed: Reviewed) -> dict[str, Share]:
    """Return visits raised at Raise first, and at Weigh today or above (contacts apart)."""
    v = reviewed.visits
    visits = ~v.is_contact
    ranks = [reviewed.judged[rule].rank for rule in visit_rules(reviewed)]
    top = np.max(ranks, axis=0) if ranks else np.zeros(len(v))
    whole = int(visits.sum())
    return {
        "Raise first": Share(int((visits & (top >= RAISE_FIRST)).sum()), whole),
        "Weigh today and above": Share(int((visits & (top >= WEIGH_TODAY)).sum()), whole),
    }


def by_rule(reviewed: Reviewed) -> dict[str, Share]:
    """Return how many visits each rule raises at any rank."""
    whole = len(reviewed.visits)
    return {
        rule: Share(int((reviewed.judged[rule].outcome == RAISED).sum()), whole)
        for rule in visit_rules(reviewed)
    }


def by_rule_and_rank(reviewed: Reviewed) -> dict[str, dict[str, int]]:
    """Return for each rule how many visits it raises at each rank, highest first."""
    found: dict[str, dict[str, int]] = {}
    for rule in visit_rules(reviewed):
        judged = reviewed.judged[rule]
        raised = judged.rank[judged.outcome == RAISED]
        counts = {RANK_WORDS[rank]: int((raised == rank).sum()) for rank in RANKS_DOWN}
        found[rule] = {word: count for word, count in counts.items() if count}
    return found


def text(reviewed: Reviewed) -> str:
    """Return the summary as lines of text."""
    lines = [f"{len(reviewed.visits)} visits of {reviewed.visits.offsets.size - 1} eyes"]
    ranks = by_rule_and_rank(reviewed)
    for name, share in (*by_rank(reviewed).items(), *by_rule(reviewed).items()):
        parts = ", ".join(f"{word} {count}" for word, count in ranks.get(name, {}).items())
        lines.append(
            f"{name:<24} {share.count:>8} {share.percent:>6.1f} %  {share.a_day:>5.1f} a 30-eye day"
            f"{'  ' + parts if parts else ''}"
        )
    return "\n".join([*lines, *(one.line() for one in settled(reviewed))])
