"""What the rules say of rows, ready to be shown or stored. Reads only.

Used live while somebody types, and by the reviews that are stored.
"""

import datetime as dt
import hashlib
from collections import defaultdict
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

from clinic import adapters
from clinic.canonical import canonical_text
from clinic.models import Patient
from clinic.selectors.adopted import Adopted, adopted_for, of_cause
from trends import words
from trends.limits import LimitSet
from trends.regimens import registry as regimens
from trends.review import Reviewed, review
from trends.rules import registry as rules
from trends.verdict import RANK_WORDS, RANKS
from trends.wording import VerdictRow, fellow_rows, verdict_rows

NOTHING_DIGEST = "nothing"
KEPT = ("raised", "still", "could_not_tell")
NEVER_STORED = frozenset(
    name for name, module in rules.by_id().items() if module.INFO.shape == "standing"
)
Wanted = Callable[[adapters.Place], bool]


@dataclass(frozen=True)
class Found:
    """What the rules say of one row, ready to be stored."""

    place: adapters.Place
    inputs_digest: str
    limits: LimitSet | None
    outcomes: dict[str, str]
    raised: list[dict[str, Any]]
    reading: dict[str, Any]
    top_rank: str

    @property
    def limit_set_digest(self) -> str:
        """Digest of the set's text; empty for the floor alone."""
        return self.limits.digest if self.limits is not None else ""


def item_digest(row: VerdictRow) -> str:
    """Return what an answer is bound to: the evidence of one verdict, not its wording."""
    working = row.working or {}
    evidence = [
        row.rule,
        row.outcome,
        row.rank,
        working.get("part"),
        working.get("values"),
        working.get("reference_date"),
        working.get("reference_value"),
    ]
    return hashlib.sha256(canonical_text(evidence).encode()).hexdigest()


def as_stored(row: VerdictRow, assumed: Sequence[str] = ()) -> dict[str, Any]:
    """Return a verdict row as it stands in a review, with what intake took for granted."""
    # A shallow copy on purpose: asdict copies every source text of every working, each time.
    stored = {name: value for name, value in vars(row).items() if name not in ("row", "person")}
    stored["missing"] = list(row.missing)
    stored["digest"] = item_digest(row)
    stored["working"] = adapters.with_assumed(row.working, assumed)
    return stored


def limits_by_cause(patient_site: Any) -> Callable[[str], LimitSet | None]:
    """Return what gives the limit set in force for a cause at a site."""
    adopted = adopted_for(patient_site)

    def of(cause: str) -> LimitSet | None:
        found: Adopted | None = of_cause(adopted, cause)
        return found.limits if found else None

    return of


def judge(
    patients: Sequence[Patient],
    today: dt.date,
    wanted: Wanted,
    loaded: adapters.Loaded | None = None,
) -> list[Found]:
    """Run the rules on the wanted rows of some patients of one site; writes nothing."""
    if not patients:
        return []
    loaded = loaded or adapters.load(patients)
    visits = loaded.visits
    if not len(visits):
        return []
    limits_of = limits_by_cause(patients[0].site)
    chosen = [row for row, place in enumerate(loaded.places) if wanted(place)]
    groups: dict[str, tuple[LimitSet | None, list[int]]] = {}
    for row in chosen:
        code = int(visits.cause[row])
        limits = limits_of(words.CAUSES[code] if code >= 0 else "")
        key = limits.digest if limits is not None else ""
        groups.setdefault(key, (limits, []))[1].append(row)
    found: list[Found] = []
    for limits, rows in groups.values():
        found += _judge_with(loaded, limits, rows, today)
    return found


def _judge_with(
    loaded: adapters.Loaded, limits: LimitSet | None, rows: list[int], today: dt.date
) -> list[Found]:
    reviewed = review(loaded.visits, limits, today, only=stored_rules())
    by_row: dict[int, list[VerdictRow]] = defaultdict(list)
    for one in verdict_rows(reviewed, rows, standing=False):
        by_row[one.row].append(one)
    own = [_found(loaded, reviewed, limits, row, by_row[row]) for row in rows]
    return own + _fellows(reviewed, loaded, limits, set(rows))


def stored_rules() -> set[str]:
    """Return every rule and regimen whose outcome is stored; standing ones never are."""
    return {*rules.by_id(), *regimens.by_id()} - NEVER_STORED


def _fellows(
    reviewed: Reviewed, loaded: adapters.Loaded, limits: LimitSet | None, rows: set[int]
) -> list[Found]:
    """Return what an alarm raises of a fellow eye that has no row of its own at that visit."""
    judged = reviewed.judged.get("alarm_symptoms")
    pairs = judged.extra.get("fellow_of", []) if judged is not None else []
    found = []
    for (alarm, eye), one in zip(pairs, fellow_rows(reviewed), strict=True):
        if alarm not in rows:
            continue
        place = replace(
            loaded.places[alarm], eye_id=loaded.places[int(loaded.visits.offsets[eye])].eye_id
        )
        found.append(
            Found(
                place=place,
                inputs_digest=loaded.digests[alarm],
                limits=limits,
                outcomes={one.rule: one.outcome},
                raised=[as_stored(one, place.assumed)],
                reading={},
                top_rank=one.rank,
            )
        )
    return found


def nothing(place: adapters.Place) -> Found:
    """Return that nothing is said of an eye at a visit any more."""
    return Found(place, NOTHING_DIGEST, None, {}, [], {}, "")


def _found(
    loaded: adapters.Loaded,
    reviewed: Any,
    limits: LimitSet | None,
    row: int,
    verdicts: Sequence[VerdictRow],
) -> Found:
    own = [one for one in verdicts if not one.reading or one.rule not in regimens.by_id()]
    readings = [one for one in verdicts if one.rule in regimens.by_id() and one.reading]
    top = max((RANKS.get(one.rank, 0) for one in own), default=0)
    return Found(
        place=loaded.places[row],
        inputs_digest=loaded.digests[row],
        limits=limits,
        outcomes={one.rule: one.outcome for one in own if one.outcome},
        raised=[as_stored(one, loaded.places[row].assumed) for one in own if one.outcome in KEPT],
        reading=_reading(reviewed, row, readings),
        top_rank=RANK_WORDS[top],
    )


def _reading(reviewed: Any, row: int, readings: Sequence[VerdictRow]) -> dict[str, Any]:
    if not readings:
        return {}
    one = readings[0]
    spoken = reviewed.regimens[one.rule]
    at = spoken.index(row)
    weeks = int(spoken.interval_weeks[at])
    return {
        "regimen": one.rule,
        "reading": "; ".join(each.reading for each in readings),
        "place": spoken.place(row),
        "interval_weeks": weeks if weeks >= 0 else None,
        "sentence": ". ".join(each.sentence for each in readings),
        "missing": list(one.missing),
        "working": one.working,
        "beside": [each.working for each in readings[1:]],
    }
