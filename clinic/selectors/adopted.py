"""Which limit set a site has adopted for a cause, by its newest confirmed adoption."""

from dataclasses import dataclass
from functools import lru_cache

from clinic.models import AdoptionConfirmed, Site
from trends.limits import LimitSet


@dataclass(frozen=True, slots=True)
class Adopted:
    """A set in force: the set itself, and which, for what, by whom and since when in words."""

    limits: LimitSet
    words: str


@lru_cache(maxsize=32)
def parsed(text: str) -> LimitSet:
    """Return a stored limit set; the text never changes, so it is read once."""
    return LimitSet.from_stored(text)


def adopted_for(site: Site) -> dict[str, Adopted]:
    """Return the set in force by cause; ``""`` stands for every cause without a set of its own."""
    confirmed = (
        AdoptionConfirmed.objects.filter(adoption__site=site)
        .select_related("adoption__limit_set", "by")
        .order_by("adoption__seq")
    )
    found: dict[str, Adopted] = {}
    for one in confirmed:
        text = one.adoption.limit_set
        cause = one.adoption.cause
        for_cause = f" for {cause.replace('_', ' ')}" if cause else ""
        day = f"{one.at.day} {one.at:%b %Y}"
        found[cause] = Adopted(
            parsed(text.text), f"limit set {text}{for_cause}, adopted {day}, confirmed by {one.by}"
        )
    return found


def of_cause(found: dict[str, Adopted], cause: str) -> Adopted | None:
    """Return the set in force for one cause, or nothing."""
    return found.get(cause) or found.get("")
