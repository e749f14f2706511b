"""A person's trend report and eye course as finished content, from the log and the verdicts."""

import datetime as dt
from zoneinfo import ZoneInfo

import clinic
from clinic.chart import EyeGiven, Panels, panels_for
from clinic.content import EyeReport, PatientReport
from clinic.models import Patient, Seal
from clinic.notice import NOTICE
from clinic.selectors.chart_given import EyeRows, eye_given
from clinic.selectors.context_body import body_rows
from clinic.selectors.context_rows import context_rows
from clinic.selectors.context_since import since_rows
from clinic.selectors.eye_log import EyeLog, eye_logs
from clinic.selectors.eye_verdicts import EyeVerdicts, verdicts_for
from clinic.selectors.eye_words import (
    answer_rows,
    contact_lines,
    course_lines,
    decision_rows,
    event_lines,
    history_text,
    person_text,
    visit_row,
)

SEAL_GROUPS = 3
Drawn = tuple[EyeGiven, tuple[str, ...]]


def report_content(patient: Patient, *, printed_by: str, at: dt.datetime) -> PatientReport:
    """Return the report of one person as of a moment, in the site's own time."""
    printed_at = at.astimezone(ZoneInfo(patient.site.time_zone))
    logs = eye_logs(patient)
    verdicts = verdicts_for(patient, logs, printed_at.date())
    drawn = {log.eye.pk: given_of(patient, log, verdicts[log.eye.pk]) for log in logs}
    days = [day for given, _ in drawn.values() for day in given.days()]
    span = (min(days), max(days)) if days else None
    eyes = tuple(
        eye_report(log, verdicts[log.eye.pk], drawn[log.eye.pk], span, printed_at.date())
        for log in logs
    )
    return PatientReport(
        code=patient.code,
        site_label=patient.site.label,
        printed_at=printed_at.replace(tzinfo=None, second=0, microsecond=0),
        printed_by=printed_by,
        version=clinic.__version__,
        notice=NOTICE,
        eyes=eyes,
        person=person_text(patient),
        dates_from=span[0] if span else None,
        dates_to=span[1] if span else None,
        limit_sets=tuple(dict.fromkeys(one.adopted for one in verdicts.values() if one.adopted)),
        ledger_seal=ledger_seal(),
        sources=_sources(eyes),
        emergency_text=patient.site.emergency_text,
    )


def both_eyes_chart(report: PatientReport) -> Panels:
    """Return the chart of both eyes on one time axis."""
    return panels_for(*(eye.given for eye in report.eyes), today=report.printed_at.date())


def given_of(patient: Patient, log: EyeLog, verdicts: EyeVerdicts) -> Drawn:
    """Return what is drawn of one eye, with the notes of its chart."""
    rows = EyeRows(
        side=log.eye.side,
        sex=patient.sex,
        cause=log.state.cause if log.state else "",
        measured=log.pairs("measured"),
        treated=log.pairs("treated"),
        events=log.events,
        gap_between_scanners=patient.site.gap_between_scanners,
    )
    return eye_given(rows, verdicts.limits)


def eye_report(
    log: EyeLog,
    verdicts: EyeVerdicts,
    drawn: Drawn,
    span: tuple[dt.date, dt.date] | None,
    today: dt.date,
) -> EyeReport:
    """Return everything that is shown of one eye."""
    state, now, (given, notes) = log.state, log.now, drawn
    return EyeReport(
        side=log.eye.side,
        side_words=log.eye.get_side_display().capitalize(),
        chart=panels_for(given, span=span, today=today),
        given=given,
        cause=state.get_cause_display() if state else "cause not recorded",
        status=state.get_status_display() if state else "assumed in treatment",
        regimen=verdicts.regimen,
        place=now.place if now else "",
        reading=verdicts.reading,
        reading_from=verdicts.reading_from,
        history=history_text(log.history),
        chart_notes=notes,
        raised=verdicts.raised,
        still=verdicts.still,
        could_not_tell=verdicts.could_not_tell,
        limits_not_reached=verdicts.limits_not_reached,
        visits=tuple(visit_row(one, verdicts.readings.get(one.visit.pk, "")) for one in log.visits),
        decisions=decision_rows(log),
        answers=(*verdicts.open_answers, *answer_rows(log.answers, verdicts.titles)),
        courses=course_lines(log.courses),
        events=event_lines(log.events),
        contacts=contact_lines(log),
        context=(*context_rows(log, today), *since_rows(log), *body_rows(log, today)),
    )


def ledger_seal() -> str:
    """Return the short digest of the newest daily seal, in groups to be read aloud."""
    seal = Seal.objects.order_by("-day").values_list("digest", flat=True).first()
    if not seal:
        return ""
    return " ".join(seal[start : start + 4] for start in range(0, 4 * SEAL_GROUPS, 4))


def _sources(eyes: tuple[EyeReport, ...]) -> tuple[str, ...]:
    """Return every source named in a shown working, once, in order of first use."""
    return tuple(
        dict.fromkeys(
            source
            for eye in eyes
            for verdict in (*eye.raised, *eye.still)
            for source in verdict.sources
        )
    )
