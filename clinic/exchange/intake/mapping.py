"""The mapping: a small TOML file that says what each column of a foreign file means.

Nothing is guessed: laterality words, value words, units, date form and what day 0 is must be
written down. ``HELP`` is shown by ``manage.py intake --help`` and stands in the README.
"""

import tomllib
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from clinic.exchange.intake.refused import IntakeRefused

HELP = """\
The mapping is a TOML file:

  about = "Export of the old log, 2021 on"   one line for the account
  sheet = "Visits"                           only for a workbook with several sheets

  [columns]            our name = "the file's column"; one column may feed several names
  person = "patient_id"
  eye = "laterality"
  date = "day"
  cst_um = "thickness"

  [words.eye]          our word = the file's words; with a table every other word is refused
  R = ["OD"]
  L = ["OS"]

  [words.agent]        "" on the left makes a value blank; blank cells stay blank unless listed
  aflibercept = ["1"]          "unnamed" on the left: something was given, the file doesn't say what
  none = ["0"]

  [constants]          one value for every row
  acuity_notation = "etdrs_letters"
  cause = "diabetic"

  [units]              cst_um = "um" or "mm", dose_mg = "mg" or "ug", iop_mmhg = "mmHg" or "kPa"
  cst_um = "mm"

  [dates]              YYYY-MM-DD (also without a word), DD.MM.YYYY, DD/MM/YYYY, MM/DD/YYYY
  form = "DD.MM.YYYY"

  [days]               instead of dates: the date column holds day numbers from day 0; give the
  zero = "eye"         calendar date of day 0 with --day-zero. "eye": each eye counts from its own
                       first visit (rules over both eyes then don't run); "person": both together

  [assume]
  one_scanner_per_eye = true    the file names no scanner, and each eye stayed on one
  also = ["..."]                other things taken for granted; said wherever the rows are used

  [refused]            what a refused cell does: "nothing" is stored (without a word), or the
  then = "leave_out"   rows with refused cells are left out and the rest is stored

  [columns] of ours: person, eye, date (needed); kind, cst_um, oct_class, scanner, scan_quality,
  irf, srf, acuity, acuity_notation, acuity_chart, acuity_correction, iop_mmhg, iop_method,
  iop_after_mmhg, agent, dose_mg, laser, sex, birth_year, cause, status, regimen, due_date,
  symptoms, contact. Other columns of the file are named in the account and not stored.
"""

NEEDED = ("person", "eye", "date")
TIDY = (
    *NEEDED,
    "kind",
    "cst_um",
    "oct_class",
    "scanner",
    "scan_quality",
    "irf",
    "srf",
    "acuity",
    "acuity_notation",
    "acuity_chart",
    "acuity_correction",
    "iop_mmhg",
    "iop_method",
    "iop_after_mmhg",
    "agent",
    "dose_mg",
    "laser",
    "sex",
    "birth_year",
    "cause",
    "status",
    "regimen",
    "due_date",
    "symptoms",
    "contact",
)
DATE_FORMS = {
    "YYYY-MM-DD": "%Y-%m-%d",
    "DD.MM.YYYY": "%d.%m.%Y",
    "DD/MM/YYYY": "%d/%m/%Y",
    "MM/DD/YYYY": "%m/%d/%Y",
}
# Times what the file's number is multiplied with; 1 kPa is 7.50062 mmHg (SI, 101325 Pa / 760).
UNITS = {
    "cst_um": {"um": "1", "mm": "1000"},
    "dose_mg": {"mg": "1", "ug": "0.001"},
    "iop_mmhg": {"mmHg": "1", "kPa": "7.50062"},
    "iop_after_mmhg": {"mmHg": "1", "kPa": "7.50062"},
}
LONGEST_SENTENCE = 200
ZEROES = ("eye", "person")
TABLES = {"columns", "words", "constants", "units", "dates", "days", "assume", "refused"}


@dataclass(frozen=True)
class Mapping:
    """A checked mapping. ``words[name]`` goes from the file's word to ours."""

    about: str
    sheet: str
    columns: dict[str, str]
    words: dict[str, dict[str, str]]
    constants: dict[str, str]
    units: dict[str, str] = field(default_factory=dict)
    date_form: str = "YYYY-MM-DD"
    day_zero: str = ""
    one_scanner_per_eye: bool = False
    also_assumed: tuple[str, ...] = ()
    leave_out: bool = False


def refuse(what: str, value: object, allowed: str, why: str = "") -> IntakeRefused:
    """Return the refusal of one thing in the mapping."""
    return IntakeRefused(f"mapping: {what}", value, allowed, why, "Correct the mapping.")


def read_mapping(path: Path) -> Mapping:
    """Read and check a mapping file; raise ``IntakeRefused`` when something in it can't be used."""
    if not path.is_file():
        raise refuse("file", path.name, "a TOML file", "There is none by that name.")
    try:
        return mapping_from(path.read_text(encoding="utf-8"))
    except UnicodeDecodeError as problem:
        raise refuse("file", path.name, "UTF-8 text") from problem


def mapping_from(text: str) -> Mapping:
    """Return the mapping written in TOML text; raise ``IntakeRefused`` with the reason."""
    try:
        raw = tomllib.loads(text)
    except tomllib.TOMLDecodeError as problem:
        raise refuse("file", str(problem), "valid TOML") from problem
    for name in raw:
        if name not in TABLES | {"about", "sheet"}:
            raise refuse("table", name, ", ".join(sorted(TABLES)))
    columns = texts(raw, "columns")
    constants = texts(raw, "constants")
    for name in (*columns, *constants, *raw.get("words", {}), *raw.get("units", {})):
        if name not in TIDY:
            raise refuse("our name", name, ", ".join(TIDY))
    both = sorted(set(columns) & set(constants))
    if both:
        raise refuse("our name", both[0], "either a column or a constant")
    for name in NEEDED:
        if name not in columns:
            raise refuse("[columns]", f"no {name}", ", ".join(NEEDED), "A visit needs all three.")
    return Mapping(
        about=str(raw.get("about", "")),
        sheet=str(raw.get("sheet", "")),
        columns=columns,
        words={name: turned(name, table) for name, table in raw.get("words", {}).items()},
        constants=constants,
        units=units_of(raw),
        date_form=one_of(raw, "dates", "form", DATE_FORMS, "YYYY-MM-DD"),
        day_zero=one_of(raw, "days", "zero", ZEROES, ""),
        one_scanner_per_eye=assumed_scanner(raw),
        also_assumed=also_assumed(raw),
        leave_out=one_of(raw, "refused", "then", ("nothing", "leave_out"), "nothing")
        == "leave_out",
    )


def texts(raw: dict[str, Any], table: str) -> dict[str, str]:
    """Return a table whose values must all be texts."""
    given = raw.get(table, {})
    for name, value in given.items():
        if not isinstance(value, str):
            raise refuse(f"[{table}] {name}", value, "a text in quotation marks")
    return {name: value.strip() for name, value in given.items()}


def turned(name: str, table: dict[str, Any]) -> dict[str, str]:
    """Return the file's words with ours behind them; a word may stand for one thing only."""
    words: dict[str, str] = {}
    for ours, theirs in table.items():
        if not isinstance(theirs, list) or not all(isinstance(word, str) for word in theirs):
            raise refuse(f"[words.{name}] {ours}", theirs, 'a list of texts, as ["OD", "RE"]')
        for word in theirs:
            if words.get(word, ours) != ours:
                raise refuse(f"[words.{name}]", word, "one meaning for a word")
            words[word] = ours
    return words


def units_of(raw: dict[str, Any]) -> dict[str, str]:
    """Return the declared units, each of those that can be converted."""
    given = texts(raw, "units")
    for name, unit in given.items():
        allowed = UNITS.get(name, {})
        if unit not in allowed:
            raise refuse(f"[units] {name}", unit, " or ".join(allowed) or "no unit to choose")
    return given


def one_of(raw: dict[str, Any], table: str, name: str, allowed: Any, otherwise: str) -> str:
    """Return a word that must be one of a few."""
    inner = raw.get(table, {})
    unknown = sorted(set(inner) - {name})
    if unknown:
        raise refuse(f"[{table}]", unknown[0], name)
    value = inner.get(name, otherwise)
    if value != otherwise and value not in allowed:
        raise refuse(f"[{table}] {name}", value, ", ".join(allowed))
    return str(value)


def assumed_scanner(raw: dict[str, Any]) -> bool:
    """Return whether one scanner per eye is declared; it must be true or false."""
    inner = raw.get("assume", {})
    unknown = sorted(set(inner) - {"one_scanner_per_eye", "also"})
    if unknown:
        raise refuse("[assume]", unknown[0], "one_scanner_per_eye, also")
    value = inner.get("one_scanner_per_eye", False)
    if not isinstance(value, bool):
        raise refuse("[assume] one_scanner_per_eye", value, "true or false")
    return value


def also_assumed(raw: dict[str, Any]) -> tuple[str, ...]:
    """Return the sentences on what else is taken for granted."""
    given = raw.get("assume", {}).get("also", [])
    if not isinstance(given, list) or not all(isinstance(one, str) for one in given):
        raise refuse("[assume] also", given, 'a list of sentences, as ["..."]')
    if any(len(one) > LONGEST_SENTENCE for one in given):
        raise refuse("[assume] also", "a longer text", f"up to {LONGEST_SENTENCE} characters each")
    return tuple(one.strip() for one in given)
