"""What stands in an eye's states, history, courses, events and contacts, in words."""

from collections.abc import Iterable, Mapping

from clinic.chart.spoken import day_words
from clinic.content import AnswerRow, Dated, DecisionRow, VisitRow
from clinic.models import Answer, Course, EyeEvent, History, Measured, MoreAcuity, Patient
from clinic.selectors.change_words import changes
from clinic.selectors.eye_log import EyeLog, VisitLog, current
from clinic.selectors.visit_words import (
    acuity_text,
    cst_text,
    decided_text,
    due_text,
    fluid_text,
    implied_letters,
    iop_text,
    listed,
    method_text,
    pressures_text,
    symptoms_text,
    treated_text,
    worded,
)


def person_text(patient: Patient) -> str:
    """Return year of birth and sex, to catch the wrong card."""
    born = f"born {patient.birth_year}" if patient.birth_year else "year of birth not recorded"
    if patient.age_90_or_over:
        born = "90 or over"
    return f"{born} · sex {patient.get_sex_display()}"


def history_text(history: History | None) -> str:
    """Return the history at enrolment, or that none was entered."""
    if history is None:
        return "history not entered"
    if history.new_eye:
        return "treatment starts here"
    told = [
        f"diagnosed {day_words(history.diagnosed_on)}" if history.diagnosed_on else "",
        _counted(history),
        f"last treated {day_words(history.last_treatment_on)}" if history.last_treatment_on else "",
        f"interval {history.interval_weeks} weeks" if history.interval_weeks else "",
        _yes_no("loading done", history.loading_done),
        _yes_no("steroid before", history.steroid_ever),
        _yes_no("pressure rise after steroid", history.pressure_rise_after_steroid),
        f"letters then {history.baseline_letters}" if history.baseline_letters is not None else "",
        f"CST then {history.baseline_cst_um} µm" if history.baseline_cst_um is not None else "",
        f"IOP then {iop_text(history.baseline_iop_tenths)}"
        if history.baseline_iop_tenths is not None
        else "",
        worded(history.lens),
        _yes_no("vitrectomy", history.vitrectomy),
        _yes_no("laser", history.laser),
    ]
    return "history entered: " + ("; ".join(part for part in told if part) or "no detail")


def _counted(history: History) -> str:
    if history.treatments_so_far is None:
        return history.agent
    return f"{history.treatments_so_far} treatments before, {history.agent or 'agent not recorded'}"


def _yes_no(what: str, answer: bool | None) -> str:
    """Return a fact or its absence; nothing where it wasn't recorded."""
    return "" if answer is None else what if answer else f"no {what}"


def visit_row(log: VisitLog, reading: str) -> VisitRow:
    """Return one visit as it stands, with every later change told."""
    measured, treated = current(log.measured), current(log.treated)
    decided, ahead = current(log.decided), current(log.ahead)
    contact = current(log.contact)
    told = listed(contact.symptoms) if contact else ""
    records = (measured, treated, decided, ahead, contact)
    notes = [row.note.text for row in records if row and row.note]
    return VisitRow(
        day=log.visit.day,
        kind=log.visit.get_kind_display(),
        cst=cst_text(measured) if measured else "",
        scanner=method_text(measured) if measured else "",
        fluid=fluid_text(measured) if measured else "",
        acuity=_acuities(measured) if measured else "",
        letters=implied_letters(measured) if measured else "",
        iop=pressures_text(measured) if measured else "",
        treated=treated_text(treated) if treated else "",
        reading=reading,
        decided=f"{decided_text(decided)}\n{decided.by}" if decided else "",
        due=due_text(ahead) if ahead else "",
        symptoms=(symptoms_text(measured) if measured else "") or told,
        note="; ".join(note for note in notes if note),
        changes=tuple(_changes(log)),
        kind_code=log.visit.kind,
    )


def _acuities(measured: Measured) -> str:
    every: list[Measured | MoreAcuity] = [measured, *measured.more_acuities.all()]
    return "\n".join(text for text in map(acuity_text, every) if text)


def _changes(log: VisitLog) -> Iterable[str]:
    yield from changes("Measured", log.measured)
    yield from changes("Decided", log.decided)
    yield from changes("Treated", log.treated)
    yield from changes("Next", log.ahead)
    yield from changes("Contact", log.contact)


def decision_rows(log: EyeLog) -> tuple[DecisionRow, ...]:
    """Return decisions, newest first."""
    return tuple(
        DecisionRow(visit.day, decided_text(row), row.departs_because, str(row.by))
        for visit, row in reversed(log.pairs("decided"))
    )


def answer_text(answer: Answer) -> str:
    """Return an answer in words, with the day to look again."""
    until = f" {day_words(answer.look_again_on)}" if answer.look_again_on else ""
    return f"{answer.get_answer_display()} on{until}" if until else answer.get_answer_display()


def answer_rows(answers: Iterable[Answer], titles: Mapping[str, str]) -> tuple[AnswerRow, ...]:
    """Return given answers, newest first; each row stands, a later one doesn't hide it."""
    return tuple(
        AnswerRow(
            answer.visit.day,
            titles.get(answer.rule, answer.rule),
            "",
            answer_text(answer),
            answer.reason,
            str(answer.by),
        )
        for answer in reversed(list(answers))
    )


def course_lines(courses: Iterable[Course]) -> tuple[Dated, ...]:
    """Return the treatment courses, newest first."""
    return tuple(
        Dated(
            course.from_day,
            ", ".join(part for part in (worded(course.regimen), course.agent) if part)
            or "course ended",
            course.reason,
        )
        for course in reversed(list(courses))
    )


def event_lines(events: Iterable[EyeEvent]) -> tuple[Dated, ...]:
    """Return the dated events of the eye, newest first."""
    return tuple(
        Dated(event.day, event.get_kind_display(), event.reason) for event in reversed(list(events))
    )


def contact_lines(log: EyeLog) -> tuple[Dated, ...]:
    """Return contacts between visits, newest first."""
    return tuple(
        Dated(
            visit.day,
            f"{row.get_direction_display()}: "
            + (listed(row.symptoms) or worded(row.outcome) or "no symptom told"),
            "; ".join(
                part
                for part in (
                    f"since {day_words(row.symptoms_onset)}" if row.symptoms_onset else "",
                    f"told {row.told_whom}" if row.told_whom else "",
                    f"taken by {row.by}",
                )
                if part
            ),
        )
        for visit, row in reversed(log.pairs("contact"))
    )
