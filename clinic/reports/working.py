"""The nine parts of a verdict's working, written under its sentence."""

from clinic.content import MissingText, ValueUsed, VerdictText
from clinic.reports.paper import INK
from clinic.reports.sheet import Sheet
from clinic.reports.words import day_words, joined


def verdict(sheet: Sheet, one: VerdictText, sources: tuple[str, ...]) -> None:
    """Write one verdict: rank and fact first, then every part that has something to say."""
    sheet.gap(5)
    sheet.need(40)
    sheet.text(f"{one.rank or one.outcome}: {one.sentence}", size=8.6, bold=True, tone=INK)
    on = f"visit of {day_words(one.from_day)}" if one.from_day else ""
    sheet.pair("Rule", [joined((one.title, on, one.version, one.limit, one.adopted))])
    sheet.pair("Values used", [value_words(value) for value in one.values])
    sheet.pair("Arithmetic", one.arithmetic)
    sheet.pair("Measurement error", [one.noise])
    sheet.pair("Not certain", one.unknowns)
    if one.emergency_text:
        sheet.pair("At once", [one.emergency_text])
    sheet.pair("May be weighed", ["; ".join(one.options)])
    sheet.pair("Not for", ["; ".join(one.not_for)])
    sheet.pair("Source", [numbered(one.sources, sources)])
    sheet.pair("Answer", [one.answer or ("open" if one.answerable else "")])


def numbered(used: tuple[str, ...], listed: tuple[str, ...]) -> str:
    """Return the numbers of the sources in the list at the end; an unlisted one in full."""
    numbers = [f"{listed.index(source) + 1}" for source in used if source in listed]
    told = f"{', '.join(numbers)} in the list at the end" if numbers else ""
    return joined((told, *(source for source in used if source not in listed)), "; ")


def value_words(value: ValueUsed) -> str:
    """Return one used value with date, method, as entered, and what was assumed."""
    entered = f"entered as {value.as_entered}" if value.as_entered else ""
    return joined(
        (f"{value.what} {value.amount}", day_words(value.day), value.method, entered, value.assumed)
    )


def missing(sheet: Sheet, one: MissingText) -> None:
    """Write a rule that couldn't tell and what it was short of."""
    short = f"missing: {', '.join(one.missing)}" if one.missing else ""
    sheet.pair(one.title, [joined((one.sentence, short))])
