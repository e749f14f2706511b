"""The printed trend report of one or more persons, both eyes, for the chart."""

from collections.abc import Sequence

from clinic.content import EyeReport, PatientReport
from clinic.reports.chart_drawing import gutter_for
from clinic.reports.document import About, Part, written_pdf
from clinic.reports.eye_section import Around, eye_section
from clinic.reports.paper import QUIET, Paper, paper_named
from clinic.reports.sheet import Sheet
from clinic.reports.words import day_words, joined, moment_words, rules


def render(reports: Sequence[PatientReport], paper: str = "A4") -> bytes:
    """Return one PDF with all reports and a bookmark each.

    Raises ``ValueError`` for no report or an unknown paper.
    """
    if not reports:
        raise ValueError("there is no report to print; hand in at least one person")
    sheet_of_paper = paper_named(paper)
    parts = [_part(report, sheet_of_paper) for report in reports]
    codes = ", ".join(report.code for report in reports[:3]) + (" …" if len(reports) > 3 else "")
    first = reports[0]
    about = About(
        f"Trend report {codes}",
        joined((first.site_label, first.printed_by), ", "),
        f"Trend report, printed {moment_words(first.printed_at)}, Ebbline {first.version}",
    )
    return written_pdf(parts, about)


def _part(report: PatientReport, paper: Paper) -> Part:
    """Return the laid-out pages of one person."""
    sheet = Sheet(paper)
    _opening(sheet, report)
    gutter = gutter_for(eye.chart for eye in report.eyes)
    for eye in report.eyes:
        eye_section(sheet, eye, Around(report.sources, gutter, first=eye is report.eyes[0]))
    _closing(sheet, report)
    return Part(
        sheet,
        bookmark=report.code,
        head_left=joined((report.code, report.site_label)),
        head_right=joined(
            ("Trend report", f"printed {moment_words(report.printed_at)} by {report.printed_by}")
        ),
        foot=_foot(report),
        notice=report.notice,
    )


def _foot(report: PatientReport) -> str:
    seal = f"ledger seal {report.ledger_seal}" if report.ledger_seal else "ledger not sealed yet"
    return joined((f"Ebbline {report.version}", seal))


def _opening(sheet: Sheet, report: PatientReport) -> None:
    """Write whose report it is, what it covers, and both eyes in a line each."""
    sheet.heading(1, f"Trend report {report.code}")
    sheet.text(joined((report.site_label, report.person)), size=9)
    covered = "No dates yet"
    if report.dates_from and report.dates_to:
        covered = f"Covers {day_words(report.dates_from)} to {day_words(report.dates_to)}"
    limits = "; ".join(report.limit_sets) or "no limit set adopted: only the floor rules run"
    sheet.text(covered + ".", size=8, tone=QUIET)
    sheet.text(f"{limits[0].upper()}{limits[1:]}.", size=8, tone=QUIET)
    for eye in report.eyes:
        sheet.gap(3)
        sheet.text(_at_a_glance(eye), size=9, bold=bool(eye.raised))


def _at_a_glance(eye: EyeReport) -> str:
    """Return how much is raised for one eye, by rank, never as a judgement."""
    ranks: dict[str, int] = {}
    for one in eye.raised:
        ranks[one.rank] = ranks.get(one.rank, 0) + 1
    raised = ", ".join(f"{rank} {count}" for rank, count in ranks.items()) or "nothing raised"
    return (
        f"{eye.side_words}: {raised}; {rules(len(eye.limits_not_reached))}; "
        f"{len(eye.could_not_tell)} couldn't tell."
    )


def _closing(sheet: Sheet, report: PatientReport) -> None:
    """Write the sources of everything used."""
    if report.sources:
        sheet.heading(2, "Sources")
        for number, source in enumerate(report.sources, start=1):
            sheet.pair(f"Source {number}", [source], size=7)
