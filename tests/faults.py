"""Entry faults put into real or invented visits, and which doubts notice them.

``python -m tests.faults VISITS.csv [--one-scanner-per-eye] [--each 400] [--seed 1]`` reads a tidy
file, takes clean visits with enough of a past, spoils one at a time and prints how many each doubt
asks about, beside how often it asks about the file as it is. Nothing is written.
"""

import argparse
import datetime as dt
import random
from collections import defaultdict
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path

import pandas as pd

from trends.errors import FrameRefused
from trends.limits import shipped
from trends.review import review
from trends.verdict import RAISED
from trends.visits import Visits

DOUBTS = (
    "looks_like_other_eye",
    "transposed",
    "unlikely_jump",
    "unit_doubt",
    "same_in_both_eyes",
    "scanner_changed",
    "acuity_method_changed",
    "tonometer_changed",
    "poor_scan",
)
ABOUT_VALUES = {
    "looks_like_other_eye",
    "transposed",
    "unlikely_jump",
    "unit_doubt",
    "same_in_both_eyes",
}
MEASURED = ("cst_um", "acuity", "acuity_notation", "acuity_chart", "iop_mmhg", "iop_method")
PAST = 3
Row = dict[str, str]
AS_OF = dt.date(2099, 1, 1)


@dataclass
class Spoilt:
    """One visit day of one person, spoilt: all rows up to it, and the row to look at."""

    rows: list[Row]
    eye: str
    date: str
    differs: bool = True


@dataclass
class Result:
    """How many spoilt visits of one fault were asked about, by doubt and by any."""

    tried: int = 0
    refused: int = 0
    asked: dict[str, int] = field(default_factory=lambda: defaultdict(int))
    any: int = 0
    differing: int = 0
    any_differing: int = 0


Spoil = Callable[[dict[str, Row], str, random.Random], bool | None]
"""Spoils the rows of a day by eye, in place; None where it can't, else whether the eyes differ."""


def number(row: Row | None, name: str) -> float:
    return float(row[name]) if row and row.get(name) else 0.0


def differ(day: dict[str, Row]) -> bool:
    """Whether two eyes differ by more than a tenth of thickness, or by 10 letters without one."""
    right, left = (number(day.get(side), "cst_um") for side in "RL")
    if right and left:
        return max(right, left) > 1.1 * min(right, left)
    return abs(number(day.get("R"), "acuity") - number(day.get("L"), "acuity")) >= 10


def swap_eyes(day: dict[str, Row], eye: str, draw: random.Random) -> bool | None:
    if len(day) < 2:
        return None
    there = differ(day)
    for name in MEASURED:
        day["R"][name], day["L"][name] = day["L"].get(name, ""), day["R"].get(name, "")
    return there


def exchange_digits(day: dict[str, Row], eye: str, draw: random.Random) -> bool | None:
    text = day[eye].get("cst_um", "")
    places = [p for p in range(len(text) - 1) if text[p] != text[p + 1]]
    if len(text) != 3 or not places:
        return None
    place = draw.choice(places)
    new = text[:place] + text[place + 1] + text[place] + text[place + 2 :]
    if not 150 <= int(new) <= 1000:
        return None
    day[eye]["cst_um"] = new
    return abs(int(new) - int(text)) > 0.1 * int(text)


def millimetres(day: dict[str, Row], eye: str, draw: random.Random) -> bool | None:
    if not day[eye].get("cst_um"):
        return None
    day[eye]["cst_um"] = f"{int(day[eye]['cst_um']) / 1000:.3f}"
    return True


def letters_and_iop(day: dict[str, Row], eye: str, draw: random.Random) -> bool | None:
    row = day[eye]
    if not (row.get("acuity") and row.get("iop_mmhg")) or row["acuity_notation"] != "etdrs_letters":
        return None
    letters, iop = row["acuity"], row["iop_mmhg"]
    row["acuity"], row["iop_mmhg"] = f"{float(iop):.0f}", letters
    return abs(float(letters) - float(iop)) > 10


def thickness_and_iop(day: dict[str, Row], eye: str, draw: random.Random) -> bool | None:
    row = day[eye]
    if not (row.get("cst_um") and row.get("iop_mmhg")):
        return None
    row["cst_um"], row["iop_mmhg"] = f"{float(row['iop_mmhg']):.0f}", row["cst_um"]
    return True


def centre_point(day: dict[str, Row], eye: str, draw: random.Random) -> bool | None:
    """The centre point instead of the subfield's mean: a few per cent off either way."""
    if not day[eye].get("cst_um"):
        return None
    day[eye]["cst_um"] = f"{int(day[eye]['cst_um']) * draw.choice([0.93, 0.95, 1.05, 1.07]):.0f}"
    return False


def copied(day: dict[str, Row], eye: str, draw: random.Random) -> bool | None:
    other = day.get("L" if eye == "R" else "R")
    if other is None or not (other.get("cst_um") and day[eye].get("cst_um")):
        return None
    there = differ(day)
    day[eye]["cst_um"] = other["cst_um"]
    return there


FAULTS: dict[str, Spoil] = {
    "eyes swapped": swap_eyes,
    "digits exchanged": exchange_digits,
    "mm for µm": millimetres,
    "letters and IOP exchanged": letters_and_iop,
    "CST and IOP exchanged": thickness_and_iop,
    "centre point for mean": centre_point,
    "copied from fellow eye": copied,
}


def by_person(frame: pd.DataFrame) -> dict[str, list[Row]]:
    found: dict[str, list[Row]] = defaultdict(list)
    for row in frame.fillna("").astype(str).to_dict("records"):
        found[row["person"]].append(row)
    return {person: sorted(rows, key=lambda row: row["date"]) for person, rows in found.items()}


def spoilt(
    people: dict[str, list[Row]], spoil: Spoil, each: int, draw: random.Random
) -> list[Spoilt]:
    """Return up to ``each`` spoilt visits; each has at least three earlier visits of the eye."""
    places = [
        (person, row["eye"], row["date"])
        for person, rows in people.items()
        for row in rows
        if sum(one["eye"] == row["eye"] and one["date"] < row["date"] for one in rows) >= PAST
    ]
    draw.shuffle(places)
    found: list[Spoilt] = []
    for person, eye, date in places:
        if len(found) == each:
            break
        rows = [dict(row) for row in people[person] if row["date"] <= date]
        day = {row["eye"]: row for row in rows if row["date"] == date}
        there = spoil(day, eye, draw)
        if there is not None:
            found.append(Spoilt(rows, eye, date, there))
    return found


def refused_on_entry(one: Spoilt) -> bool:
    """Whether the spoilt day itself can't be taken in."""
    try:
        Visits.from_frame(pd.DataFrame([row for row in one.rows if row["date"] == one.date]))
    except FrameRefused:
        return True
    return False


def asked(samples: Sequence[Spoilt], *, assumed: bool) -> list[set[str]]:
    """Return for each spoilt visit the doubts that ask; all samples in one review."""
    if not samples:
        return []
    rows = [
        {**row, "person": f"{place:06d}"} for place, one in enumerate(samples) for row in one.rows
    ]
    visits = Visits.from_frame(pd.DataFrame(rows), one_scanner_assumed=assumed)
    reviewed = review(visits, shipped("general"), AS_OF, only=DOUBTS)
    where = {
        (visits.persons[int(visits.person[at])], int(visits.side[at]), int(visits.day[at])): at
        for at in range(len(visits))
    }
    found = []
    for place, one in enumerate(samples):
        day = (dt.date.fromisoformat(one.date) - dt.date(1970, 1, 1)).days
        at = where[f"{place:06d}", "RL".index(one.eye), day]
        found.append({d for d in DOUBTS if reviewed.judged[d].outcome[at] == RAISED})
    return found


def detection(frame: pd.DataFrame, *, assumed: bool, each: int, seed: int) -> dict[str, Result]:
    """Return how each fault fares."""
    people, results = by_person(frame), {}
    for fault, spoil in FAULTS.items():
        samples = spoilt(people, spoil, each, random.Random(f"{seed} {fault}"))  # noqa: S311
        taken = [one for one in samples if not refused_on_entry(one)]
        result = Result(tried=len(samples), refused=len(samples) - len(taken))
        for one, doubts in zip(taken, asked(taken, assumed=assumed), strict=True):
            result.any += bool(doubts & ABOUT_VALUES)
            result.differing += one.differs
            result.any_differing += one.differs and bool(doubts & ABOUT_VALUES)
            for doubt in doubts:
                result.asked[doubt] += 1
        results[fault] = result
    return results


def clean_questions(frame: pd.DataFrame, *, assumed: bool) -> tuple[int, dict[str, int]]:
    """Return visits and how many of them each doubt asks about as they are ("any" of values)."""
    visits = Visits.from_frame(frame, one_scanner_assumed=assumed)
    reviewed = review(visits, shipped("general"), AS_OF, only=DOUBTS)
    raised = {d: reviewed.judged[d].outcome == RAISED for d in DOUBTS}
    counts = {d: int(one.sum()) for d, one in raised.items()}
    counts["any"] = int(sum(raised[d] for d in ABOUT_VALUES).astype(bool).sum())
    return len(visits), counts


def table(frame: pd.DataFrame, *, assumed: bool, each: int, seed: int) -> str:
    """Return the numbers as text."""
    size, counts = clean_questions(frame, assumed=assumed)
    lines = [f"{size} visits as they are; questions in a hundred:"]
    lines += [
        f"  {doubt:<24}{100 * count / size:>6.2f}" for doubt, count in counts.items() if count
    ]
    for fault, one in detection(frame, assumed=assumed, each=each, seed=seed).items():
        if not one.tried:
            lines.append(f"{fault}: nothing of the kind in this file")
            continue
        taken = one.tried - one.refused
        lines.append(f"{fault}: {one.tried} tried, {one.refused} refused on entry")
        if taken:
            lines.append(f"  asked about              {share(one.any, taken)}")
            lines.append(f"  where it makes > 10 %    {share(one.any_differing, one.differing)}")
        lines += [f"    {doubt:<22} {share(n, taken)}" for doubt, n in sorted(one.asked.items())]
    return "\n".join(lines)


def share(count: int, of: int) -> str:
    """Return a share of a count in words."""
    return f"{count} of {of}, {100 * count / of:.0f} %" if of else "none"


def main() -> None:
    """Print the table of one file."""
    parser = argparse.ArgumentParser(prog="python -m tests.faults", description=__doc__)
    parser.add_argument("visits", type=Path, metavar="VISITS.csv")
    parser.add_argument("--one-scanner-per-eye", action="store_true")
    parser.add_argument("--each", type=int, default=400, help="spoilt visits a fault")
    parser.add_argument("--seed", type=int, default=1)
    options = parser.parse_args()
    frame = pd.read_csv(options.visits, dtype=str, keep_default_na=False)
    assumed = options.one_scanner_per_eye
    print(table(frame, assumed=assumed, each=options.each, seed=options.seed))


if __name__ == "__main__":
    main()
