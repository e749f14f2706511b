"""Source rows into tidy rows: words, units, numbers and dates as the mapping says.

A cell that the mapping can't read is refused with row, column, value, what is allowed and why.
Ranges are not looked at here: that is the engine's own check (``checked``).
"""

import datetime as dt
from collections.abc import Callable
from dataclasses import dataclass, field
from decimal import Decimal

from clinic.exchange.intake.mapping import DATE_FORMS, UNITS, Mapping
from clinic.exchange.intake.refused import IntakeRefused, RefusedCell
from clinic.exchange.intake.source import Source

NUMBERS = {"cst_um", "iop_mmhg", "iop_after_mmhg", "dose_mg", "birth_year"}
DATES = {"date", "due_date"}
UNNAMED = "unnamed"
MOST_DAYS = 36_525
DECIMAL_PLACES = Decimal("0.1")


@dataclass
class Mapped:
    """Tidy rows as text. ``columns[name][i]`` came from row ``row_numbers[i]`` of the file.

    ``places[i]`` is the place of that row among the source's rows; ``unnamed[i]`` says that a
    treatment was given whose agent the file doesn't name (the engine's agent stays blank).
    """

    columns: dict[str, list[str]]
    row_numbers: list[int]
    places: list[int]
    from_header: dict[str, str]
    unnamed: list[bool]
    refused: list[RefusedCell] = field(default_factory=list)
    not_taken: tuple[str, ...] = ()

    def without(self, numbers: set[int]) -> "Mapped":
        """Return the rows that are none of these rows of the file."""
        keep = [i for i, number in enumerate(self.row_numbers) if number not in numbers]
        return Mapped(
            {name: [cells[i] for i in keep] for name, cells in self.columns.items()},
            [self.row_numbers[i] for i in keep],
            [self.places[i] for i in keep],
            self.from_header,
            [self.unnamed[i] for i in keep],
            not_taken=self.not_taken,
        )


class CellProblem(Exception):
    """One cell can't be read; carries what is allowed and why."""

    def __init__(self, allowed: str, reason: str) -> None:
        self.allowed, self.reason = allowed, reason
        super().__init__(reason)


def as_number(text: str) -> str:
    """Return a number with a decimal point; a comma is read as the decimal mark."""
    if "," in text:
        if text.count(",") > 1 or "." in text:
            raise CellProblem(
                "a number without thousands marks", "Two marks can't both be decimal."
            )
        return text.replace(",", ".")
    return text


def converted(text: str, times: str, name: str) -> str:
    """Return a number in our unit; pressures are rounded to tenths after converting."""
    try:
        number = Decimal(text) * Decimal(times)
    except ArithmeticError as problem:
        raise CellProblem("a number", "It is no number.") from problem
    if not number.is_finite():
        raise CellProblem("a number", "It is no number.")
    if name.startswith("iop"):
        number = number.quantize(DECIMAL_PLACES)
    return f"{number.normalize():f}"


def as_date(text: str, form: str) -> str:
    """Return an ISO date; what a workbook stored as a date is ISO already."""
    for pattern in (DATE_FORMS[form], "%Y-%m-%d"):
        try:
            return dt.datetime.strptime(text, pattern).date().isoformat()
        except ValueError:
            continue
    raise CellProblem(f"a date as {form}", "It is no date of that form.")


def as_day(text: str, zero: dt.date) -> str:
    """Return the ISO date of a day number counted from day 0."""
    whole = text.removesuffix(".0")
    if not whole.isdigit() or int(whole) > MOST_DAYS:
        raise CellProblem(f"a whole day number, 0 to {MOST_DAYS}", "It is no day number.")
    return (zero + dt.timedelta(days=int(whole))).isoformat()


def reader(mapping: Mapping, name: str, zero: dt.date | None) -> Callable[[str], str]:
    """Return the function that turns one cell of this column into tidy text."""
    words = mapping.words.get(name)
    unit = mapping.units.get(name)
    times = UNITS[name][unit] if unit else "1"

    def read(text: str) -> str:
        if words is not None and (text in words or text):
            if text not in words:
                listed = ", ".join(repr(word) for word in words)
                raise CellProblem(f"one of {listed}", "The mapping gives this word no meaning.")
            text = words[text]
        if not text:
            return ""
        if text.startswith(("=", "@")):
            raise CellProblem("a value", "It is a formula.")
        if name in DATES:
            return as_date(text, mapping.date_form) if zero is None else as_day(text, zero)
        if name in NUMBERS or (name == "acuity" and words is None and "," in text):
            text = as_number(text)
        return converted(text, times, name) if times != "1" else text

    return read


def refuse_headers(source: Source, mapping: Mapping) -> None:
    """Refuse a mapping that names columns the file doesn't have."""
    absent = [header for header in mapping.columns.values() if header not in source.headers]
    if absent:
        raise IntakeRefused(
            "mapping: column",
            ", ".join(absent),
            ", ".join(source.headers),
            "The file has no such column.",
            "Correct the mapping.",
        )


def zero_date(mapping: Mapping, day_zero: dt.date | None) -> dt.date | None:
    """Return the date of day 0 when the file counts days; refuse a missing or idle one."""
    if mapping.day_zero and day_zero is None:
        raise IntakeRefused(
            "--day-zero",
            "not given",
            "a date as YYYY-MM-DD",
            "The file has day numbers, and Ebbline keeps dates.",
            "Choose the calendar date that day 0 shall be.",
        )
    if day_zero is not None and not mapping.day_zero:
        raise IntakeRefused(
            "--day-zero",
            day_zero.isoformat(),
            "only with [days] in the mapping",
            "The mapping says the file has dates.",
            "Leave it out, or declare [days] zero in the mapping.",
        )
    return day_zero


def mapped(source: Source, mapping: Mapping, day_zero: dt.date | None) -> Mapped:
    """Return the tidy rows of a source, and every cell the mapping couldn't read."""
    refuse_headers(source, mapping)
    zero = zero_date(mapping, day_zero)
    count = len(source.cells)
    out = Mapped({}, source.row_numbers, list(range(count)), dict(mapping.columns), [False] * count)
    taken = set(mapping.columns.values())
    out.not_taken = tuple(header for header in source.headers if header not in taken)
    for name, header in mapping.columns.items():
        out.columns[name] = column(out, name, source.column(header), reader(mapping, name, zero))
    for name, value in mapping.constants.items():
        out.columns[name] = [value] * count
    if UNNAMED in out.columns.get("agent", ()):
        out.unnamed = [agent == UNNAMED for agent in out.columns["agent"]]
        out.columns["agent"] = ["" if agent == UNNAMED else agent for agent in out.columns["agent"]]
    return out


def column(out: Mapped, name: str, cells: list[str], read: Callable[[str], str]) -> list[str]:
    """Return one tidy column; each different cell is read once."""
    known: dict[str, str | CellProblem] = {}
    values = []
    for number, text in zip(out.row_numbers, cells, strict=True):
        if text not in known:
            try:
                known[text] = read(text)
            except CellProblem as problem:
                known[text] = problem
        found = known[text]
        if isinstance(found, CellProblem):
            header = out.from_header[name]
            out.refused.append(RefusedCell(number, header, text, found.allowed, found.reason))
            found = ""
        values.append(found)
    return values
