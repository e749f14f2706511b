"""Who there is in the invented clinic: the people with a story first, then the rest, drawn."""

from dataclasses import dataclass, field

import numpy as np

HARBOUR, MOORLAND = "harbour", "moorland"
ANTI_VEGF = ("aflibercept", "ranibizumab", "bevacizumab", "faricimab")


@dataclass(frozen=True)
class EyeSpec:
    """One eye before anything happened to it. ``make_up`` overrides what would be drawn."""

    side: str
    cause: str
    regimen: str
    agent: str
    arrival: str = "new"
    make_up: dict[str, float] = field(default_factory=dict)


@dataclass(frozen=True)
class PersonSpec:
    """One person before anything happened: how many visits, and how it stands today.

    ``ending`` is what the last visit or the booking looks like; ``days`` counts from today to the
    booked day (booked), or back to the due day (missed, rebooked) or the last visit (the rest).
    """

    key: str
    site: str
    sex: str
    age: int
    eyes: tuple[EyeSpec, ...]
    visits: int
    ending: str = "booked"
    days: int = 0
    chart: str = "etdrs_letters"
    stories: tuple[str, ...] = ()


def one(
    side: str, cause: str, regimen: str, agent: str, arrival: str = "new", **make_up: float
) -> tuple[EyeSpec, ...]:
    """Return the eyes of a person who is followed for one eye."""
    return (EyeSpec(side, cause, regimen, agent, arrival, make_up),)


def both(
    cause: str, regimen: str, agent: str, arrival: str = "new", **make_up: float
) -> tuple[EyeSpec, ...]:
    """Return the eyes of a person who is followed for both eyes, right eye first."""
    return (
        EyeSpec("R", cause, regimen, agent, arrival, make_up),
        EyeSpec("L", cause, regimen, agent, arrival, make_up),
    )


TAE, PRN, FIX = "treat_and_extend", "as_needed_stability", "fixed_interval"

SWAPPED_EYES = (
    EyeSpec("R", "diabetic", TAE, "aflibercept", make_up={"leak_um": 70.0, "best_letters": 82.0}),
    EyeSpec(
        "L",
        "diabetic",
        TAE,
        "aflibercept",
        make_up={"leak_um": 330.0, "strength": 0.6, "best_letters": 66.0},
    ),
)

WITH_STORY: tuple[PersonSpec, ...] = (
    PersonSpec("swapped", HARBOUR, "f", 63, SWAPPED_EYES, 11, stories=("swapped_eye",)),
    PersonSpec(
        "steroid",
        HARBOUR,
        "m",
        47,
        one("L", "uveitic", "", "dexamethasone", steroid_rise_mmhg=11.0, iop_mmhg=16.0),
        8,
        stories=("steroid_pressure",),
    ),
    PersonSpec(
        "scanner",
        HARBOUR,
        "m",
        58,
        one("R", "diabetic", TAE, "faricimab"),
        8,
        stories=("scanner_change",),
    ),
    PersonSpec(
        "offchart",
        HARBOUR,
        "f",
        79,
        one("L", "central_vein", TAE, "aflibercept", best_letters=48.0, leak_um=380.0),
        10,
        stories=("off_chart",),
    ),
    PersonSpec(
        "called",
        HARBOUR,
        "f",
        55,
        one("R", "diabetic", PRN, "ranibizumab"),
        5,
        ending="called",
        days=4,
        stories=("alarm_call",),
    ),
    PersonSpec(
        "virtual",
        MOORLAND,
        "m",
        66,
        one("L", "branch_vein", TAE, "ranibizumab"),
        7,
        ending="virtual",
        days=3,
        stories=("undecided_virtual",),
    ),
    PersonSpec(
        "early-1", HARBOUR, "f", 61, both("diabetic", TAE, "aflibercept"), 14, ending="seen_today"
    ),
    PersonSpec(
        "early-2",
        HARBOUR,
        "m",
        52,
        one("R", "diabetic", PRN, "bevacizumab"),
        12,
        ending="seen_today",
    ),
    PersonSpec("longest", HARBOUR, "m", 68, one("R", "diabetic", PRN, "ranibizumab"), 40),
    PersonSpec(
        "split",
        MOORLAND,
        "f",
        60,
        one("R", "diabetic", TAE, "faricimab"),
        8,
        days=5,
        stories=("split_visit",),
    ),
    PersonSpec(
        "floaters",
        HARBOUR,
        "m",
        56,
        both("diabetic", TAE, "aflibercept"),
        10,
        days=1,
        stories=("extra_visit",),
    ),
    PersonSpec(
        "laser",
        HARBOUR,
        "f",
        67,
        one("L", "branch_vein", TAE, "ranibizumab"),
        16,
        days=9,
        stories=("laser_once",),
    ),
    PersonSpec("newest", HARBOUR, "f", 44, one("L", "diabetic", FIX, "aflibercept"), 3),
    PersonSpec(
        "surgery",
        HARBOUR,
        "f",
        74,
        one("R", "after_surgery", TAE, "bevacizumab"),
        6,
        days=1,
        stories=("cataract_before",),
    ),
    PersonSpec(
        "lens",
        MOORLAND,
        "m",
        70,
        both("diabetic", TAE, "ranibizumab"),
        15,
        stories=("cataract_between",),
    ),
    PersonSpec(
        "missed-1",
        HARBOUR,
        "m",
        49,
        one("L", "diabetic", TAE, "aflibercept"),
        9,
        ending="missed",
        days=23,
    ),
    PersonSpec(
        "missed-2",
        HARBOUR,
        "f",
        59,
        both("diabetic", FIX, "aflibercept"),
        7,
        ending="missed",
        days=38,
    ),
    PersonSpec(
        "missed-3",
        MOORLAND,
        "m",
        63,
        one("R", "central_vein", TAE, "faricimab"),
        8,
        ending="missed",
        days=17,
    ),
    PersonSpec(
        "broke-off",
        MOORLAND,
        "f",
        53,
        one("R", "diabetic", PRN, "bevacizumab"),
        11,
        ending="missed",
        days=132,
    ),
    PersonSpec(
        "away", HARBOUR, "m", 45, one("L", "diabetic", TAE, "ranibizumab"), 5, "missed", 240
    ),
    PersonSpec(
        "rebooked-1",
        HARBOUR,
        "f",
        71,
        one("R", "branch_vein", TAE, "aflibercept"),
        12,
        ending="rebooked",
        days=19,
    ),
    PersonSpec(
        "rebooked-2",
        MOORLAND,
        "f",
        64,
        one("L", "diabetic", FIX, "aflibercept"),
        9,
        ending="rebooked",
        days=10,
    ),
    PersonSpec(
        "no-plan", HARBOUR, "m", 57, one("R", "diabetic", TAE, "faricimab"), 6, "no_plan", 9
    ),
    PersonSpec("dry", HARBOUR, "f", 69, one("L", "branch_vein", TAE, "ranibizumab"), 22, "dry", 70),
    PersonSpec(
        "no-benefit",
        MOORLAND,
        "m",
        77,
        one("R", "central_vein", TAE, "bevacizumab", leak_um=380.0, strength=0.3),
        10,
        "no_benefit",
        45,
    ),
    PersonSpec(
        "own-choice",
        HARBOUR,
        "f",
        82,
        one("R", "diabetic", FIX, "aflibercept"),
        8,
        "patients_choice",
        100,
    ),
    PersonSpec("moved", HARBOUR, "m", 50, both("diabetic", TAE, "aflibercept"), 9, "moved", 60),
    PersonSpec(
        "died", MOORLAND, "f", 88, one("L", "branch_vein", TAE, "aflibercept"), 13, "died", 80
    ),
    PersonSpec(
        "elsewhere", MOORLAND, "m", 62, one("L", "diabetic", TAE, "faricimab"), 7, "elsewhere", 90
    ),
)

# How many of the rest are booked today and tomorrow, and how many there are, by site.
REST = {HARBOUR: (3, 6, 26), MOORLAND: (5, 5, 17)}
CAUSES = ("diabetic", "branch_vein", "central_vein", "uveitic", "after_surgery")
CAUSE_SHARE = (0.60, 0.15, 0.09, 0.07, 0.09)


def drawn_eyes(rng: np.random.Generator) -> tuple[EyeSpec, ...]:
    """Draw the eyes of an ordinary person: cause, regimen, agent and how they arrived."""
    cause = str(rng.choice(CAUSES, p=CAUSE_SHARE))
    agent = str(rng.choice(ANTI_VEGF, p=(0.4, 0.25, 0.15, 0.2)))
    regimen = str(rng.choice((TAE, PRN, FIX), p=(0.5, 0.35, 0.15)))
    if regimen == PRN and cause != "diabetic":
        regimen = TAE
    if cause == "uveitic" and rng.random() < 0.6:
        regimen, agent = "", "dexamethasone"
    arrival = str(rng.choice(("new", "history", "history_missing"), p=(0.72, 0.2, 0.08)))
    if rng.random() < (0.4 if cause == "diabetic" else 0.12):
        return both(cause, regimen, agent, arrival)
    return one(str(rng.choice(("R", "L"))), cause, regimen, agent, arrival)


def drawn_person(rng: np.random.Generator, key: str, site: str, days: int | None) -> PersonSpec:
    """Draw an ordinary person booked ``days`` from today (None: within their own interval)."""
    chart = "etdrs_letters"
    if site == MOORLAND and rng.random() < 0.3:
        chart = str(rng.choice(("snellen_ft", "decimal")))
    return PersonSpec(
        key=key,
        site=site,
        sex=str(rng.choice(("f", "m"))),
        age=int(np.clip(rng.normal(64, 9), 36, 89)),
        eyes=drawn_eyes(rng),
        visits=int(np.clip(round(float(rng.lognormal(2.5, 0.55))), 3, 38)),
        ending="booked" if days is not None else "later",
        days=days or 0,
        chart=chart,
    )


def cast(rng: np.random.Generator) -> list[PersonSpec]:
    """Return everybody: those with a story, then the rest."""
    people = list(WITH_STORY)
    for site, (today, tomorrow, total) in REST.items():
        for number in range(total):
            days = 0 if number < today else 1 if number < today + tomorrow else None
            people.append(drawn_person(rng, f"{site}-{number + 1}", site, days))
    return people
