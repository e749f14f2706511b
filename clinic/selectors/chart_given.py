"""Stored rows of one eye as what the chart is handed: readings, marks and limits.

What is comparable is told as the engine tells it: thickness by scanner class, acuity by scale and
correction, pressure by tonometer. A line is never drawn between two that aren't.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from clinic.chart import EyeGiven, EyeMark, Reading
from clinic.chart.given import OFF_CHART
from clinic.models import EyeEvent, Measured, Treated, Visit
from clinic.selectors.chart_limits import Errors, limit_pieces
from clinic.selectors.visit_words import acuity_text, agents_of, iop_text, letters_text, method_text
from trends.limits import LimitSet
from trends.measures import acuity as acuities

BREAKS = {EyeEvent.Kind.LENS, EyeEvent.Kind.VITRECTOMY, EyeEvent.Kind.OIL}
BROKEN_PANELS = ("cst", "letters")
TENTHS = 10


@dataclass(frozen=True, slots=True)
class EyeRows:
    """The current rows of one eye: (visit, row) pairs and its events."""

    side: str
    sex: str
    cause: str
    measured: Sequence[tuple[Visit, Measured]]
    treated: Sequence[tuple[Visit, Treated]]
    events: Sequence[EyeEvent]
    gap_between_scanners: bool = False


def eye_given(rows: EyeRows, limits: LimitSet | None) -> tuple[EyeGiven, tuple[str, ...]]:
    """Return what is drawn of one eye, and the notes that go with it."""
    errors = Errors(limits)
    given = EyeGiven(
        side=rows.side,
        cst=tuple(_scans(rows, errors)),
        letters=tuple(_acuities(rows, errors)),
        iop=tuple(_pressures(rows, errors)),
        treatments=tuple(_treatments(rows.treated)),
        events=tuple(
            EyeMark(
                event.day, event.get_kind_display(), BROKEN_PANELS if event.kind in BREAKS else ()
            )
            for event in rows.events
        ),
        limits=limit_pieces(
            [(visit.day, row.oct_class) for visit, row in rows.measured if row.cst_um is not None],
            rows.sex,
            rows.cause,
            limits,
        ),
    )
    return given, errors.notes()


def _scans(rows: EyeRows, errors: Errors) -> Iterable[Reading]:
    for visit, row in rows.measured:
        if row.cst_um is None:
            continue
        yield Reading(
            visit.day,
            row.cst_um,
            f"{row.cst_um} µm",
            scan_key(row, rows.gap_between_scanners),
            method_text(row),
            errors.cst_um(row.oct_class, row.one_scanner_assumed, row.cst_um),
            provisional=row.scan_quality == "poor",
        )


def scan_key(row: Measured, by_scanner: bool) -> str | None:
    """Return what a scan may be joined by: its class, its scanner too if the site says so."""
    klass = row.oct_class or ("assumed" if row.one_scanner_assumed else "")
    if not klass:
        return None
    return f"{klass}/{row.scanner_label or row.scanner_id or ''}" if by_scanner else klass


def _acuities(rows: EyeRows, errors: Errors) -> Iterable[Reading]:
    for visit, row in rows.measured:
        if not row.acuity:
            continue
        read = acuities.parse(row.acuity_notation, row.acuity, row.acuity_chart)
        on_chart = read.logmar_e4 is not None
        yield Reading(
            visit.day,
            read.letters,
            letters_text(row) or row.acuity,
            f"{read.scale}/{row.acuity_correction}",
            acuity_text(row).replace("\n", ", "),
            errors.published("letters", read.scale) if read.five_letters else None,
            off_chart="" if on_chart else off_chart_grade(row.acuity),
        )


def off_chart_grade(text: str) -> str:
    """Return CF, HM, LP or NLP from an acuity off the chart as typed."""
    return next(grade for grade in reversed(OFF_CHART) if text.upper().startswith(grade))


def _pressures(rows: EyeRows, errors: Errors) -> Iterable[Reading]:
    for visit, row in rows.measured:
        if row.iop_tenths is None:
            continue
        yield Reading(
            visit.day,
            row.iop_tenths / TENTHS,
            iop_text(row.iop_tenths),
            row.iop_method or "not recorded",
            row.iop_method.replace("_", "-"),
            errors.published("iop", row.iop_method),
        )


def _treatments(treated: Iterable[tuple[Visit, Treated]]) -> Iterable[EyeMark]:
    for visit, row in treated:
        for words in agents_of(row):
            yield EyeMark(visit.day, words)
