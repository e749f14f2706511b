"""The rows under the panels: one for each agent and each kind of event, named in words."""

from clinic.chart.geometry import Lane
from clinic.chart.given import SIDE_WORDS, EyeGiven, EyeMark


def lanes_of(eyes: tuple[EyeGiven, ...]) -> tuple[Lane, ...]:
    """Return the lanes of all eyes: treatments by first use, then events by first date."""
    return tuple(
        lane
        for eye in eyes
        for kind, marks in (("treatment", eye.treatments), ("event", eye.events))
        for lane in _lanes(eye.side, kind, marks, name_side=len(eyes) > 1)
    )


def _lanes(side: str, kind: str, marks: tuple[EyeMark, ...], name_side: bool) -> list[Lane]:
    """Return one lane for each different wording."""
    days: dict[str, list[EyeMark]] = {}
    for mark in sorted(marks, key=lambda one: one.day):
        days.setdefault(mark.words, []).append(mark)
    before = f"{SIDE_WORDS[side]}: " if name_side else ""
    return [
        Lane(before + words, side, kind, tuple(mark.day for mark in same), words)
        for words, same in days.items()
    ]
