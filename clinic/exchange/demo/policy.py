"""What the invented clinicians do with an eye, regimen by regimen.

These are habits of made-up people, close to the published regimens so that the demo's courses look
right; Ebbline's own regimens live in ``trends.regimens`` and read these courses like any other.
"""

from dataclasses import dataclass, field

LOADING = {"treat_and_extend": 4, "as_needed_stability": 6, "fixed_interval": 5, "": 1}
LEAST_WEEKS, MOST_WEEKS, STEP_WEEKS = 4, 12, 2
FIXED_WEEKS = 8
STEROID_CHECK_WEEKS, STEROID_GAP_DAYS = 8, 112
YEAR_DAYS = 371


@dataclass(frozen=True)
class Seen:
    """What the clinician saw of one eye on one day (CST in µm)."""

    day: int
    cst_um: int
    letters: int
    wet: bool


@dataclass(frozen=True)
class Choice:
    """Treat or not, and when to look again."""

    treat: bool
    weeks: int
    kind: str


@dataclass
class CareSoFar:
    """What the clinician remembers of one eye's course."""

    regimen: str
    given: int = 0
    weeks: int = LEAST_WEEKS
    seen_when_treated: list[Seen] = field(default_factory=list)
    held_since: Seen | None = None
    holds: int = 0
    last_steroid_day: int | None = None


def thicker(now: Seen, before: Seen) -> bool:
    """Say whether the scan is a tenth or more thicker than before."""
    return 10 * now.cst_um >= 11 * before.cst_um


def moved_clearly(now: Seen, before: Seen) -> bool:
    """Say whether scan or letters differ by a tenth or a line, either way."""
    changed_um = abs(now.cst_um - before.cst_um)
    return 10 * changed_um >= before.cst_um or abs(now.letters - before.letters) >= 5


def extend_or_not(care: CareSoFar, now: Seen) -> Choice:
    """Treat at each visit; two weeks longer while dry, two shorter when worse."""
    before = care.seen_when_treated[-1]
    if thicker(now, before) or (now.wet and not before.wet):
        return Choice(True, max(LEAST_WEEKS, care.weeks - STEP_WEEKS), "interval")
    if not now.wet:
        return Choice(True, min(MOST_WEEKS, care.weeks + STEP_WEEKS), "interval")
    return Choice(True, care.weeks, "treat")


def treat_or_hold(care: CareSoFar, now: Seen) -> Choice:
    """Hold while stable, treat again when worse, look more rarely after three held visits."""
    if care.held_since is not None:
        worse = thicker(now, care.held_since) or now.letters <= care.held_since.letters - 7
        if worse:
            return Choice(True, LEAST_WEEKS, "treat")
        rare = now.day > YEAR_DAYS and care.holds >= 2
        weeks = (16 if care.holds >= 4 else 8) if rare else LEAST_WEEKS
        return Choice(False, weeks, "withhold")
    if any(moved_clearly(now, before) for before in care.seen_when_treated[-2:]):
        return Choice(True, LEAST_WEEKS, "treat")
    return Choice(False, LEAST_WEEKS, "withhold")


def steroid_or_look(care: CareSoFar, now: Seen) -> Choice:
    """Give the implant again when wet and long enough ago; else look."""
    since = None if care.last_steroid_day is None else now.day - care.last_steroid_day
    ready = since is None or since >= STEROID_GAP_DAYS
    return Choice(now.wet and ready, STEROID_CHECK_WEEKS, "treat" if now.wet and ready else "")


def choose(care: CareSoFar, now: Seen) -> Choice:
    """Return what the invented clinician does today."""
    if not care.regimen:
        return steroid_or_look(care, now)
    if care.given < LOADING[care.regimen]:
        return Choice(True, LEAST_WEEKS, "treat")
    if care.regimen == "fixed_interval":
        return Choice(True, FIXED_WEEKS, "treat")
    if care.regimen == "treat_and_extend":
        return extend_or_not(care, now)
    return treat_or_hold(care, now)


def remember(care: CareSoFar, now: Seen, choice: Choice, weeks: int) -> None:
    """Take today's choice into the memory of the course; ``weeks`` is the interval kept."""
    care.weeks = weeks
    if choice.treat:
        care.given += 1
        care.seen_when_treated.append(now)
        care.held_since, care.holds = None, 0
        care.last_steroid_day = now.day
    elif care.held_since is None:
        care.held_since, care.holds = now, 1
    else:
        care.holds += 1
