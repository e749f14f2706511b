"""What stands in one stored record, in words: the same on the eye course and on paper."""

from clinic.chart.spoken import day_words
from clinic.models import Decided, Measured, MoreAcuity, NextStep, Treated
from trends.measures import acuity as acuities
from trends.measures.pressure import shown

UG_A_MG = 1000
STAYS = "\N{NO-BREAK SPACE}"
GRADES = {"yes": "yes", "no": "no", "unsure": "unsure", "not_graded": "not graded"}


def worded(code: str) -> str:
    """Return a stored code as words: ``no_perception`` is ``no perception``."""
    return code.replace("_", " ")


def listed(codes: str) -> str:
    """Return ``+``-joined symptom codes as words; ``:gone`` is told."""
    parts = [part.strip() for part in codes.split("+") if part.strip()]
    return ", ".join(
        worded(part.removesuffix(":gone")) + (" (gone)" if part.endswith(":gone") else "")
        for part in parts
    )


def dose_text(dose_ug: int | None) -> str:
    """Return a dose in mg, as few decimals as it has: 500 µg is ``0.5 mg``."""
    return "" if dose_ug is None else f"{dose_ug / UG_A_MG:g}{STAYS}mg"


def weeks_words(days: int) -> str:
    """Return days as whole weeks passed, or as days in the first week."""
    if days < 7:
        return f"{days} day{'' if days == 1 else 's'}"
    weeks = days // 7
    return f"{weeks} week{'' if weeks == 1 else 's'}"


def iop_text(tenths: int | None) -> str:
    """Return a pressure in mmHg."""
    return "" if tenths is None else f"{shown(tenths)}{STAYS}mmHg"


def cst_text(row: Measured) -> str:
    """Return the thickness, and that the scan is poor."""
    if row.cst_um is None:
        return "poor scan" if row.scan_quality == "poor" else ""
    return f"{row.cst_um}{STAYS}µm" + (", poor scan" if row.scan_quality == "poor" else "")


def method_text(row: Measured) -> str:
    """Return the scanner and its class, and what was assumed of them."""
    label = row.scanner.label if row.scanner else row.scanner_label
    klass = row.oct_class or ("one scanner, assumed" if row.one_scanner_assumed else "")
    return ", ".join(part for part in (label, klass) if part)


def fluid_text(row: Measured) -> str:
    """Return IRF and SRF as graded, a line each, or one line where both say the same."""
    if row.irf and row.irf == row.srf:
        return f"IRF, SRF{STAYS}{GRADES.get(row.irf, row.irf)}"
    graded = [("IRF", row.irf), ("SRF", row.srf)]
    return "\n".join(f"{name}{STAYS}{GRADES.get(grade, grade)}" for name, grade in graded if grade)


def letters_text(row: Measured) -> str:
    """Return letters, "about" where they are converted from another chart."""
    if not row.acuity:
        return ""
    read = acuities.parse(row.acuity_notation, row.acuity, row.acuity_chart)
    if read.letters is None:
        return ""
    return f"{'' if read.five_letters else 'about '}{read.letters} letters"


def implied_letters(row: Measured) -> str:
    """Return letters where they weren't what was typed."""
    return "" if row.acuity_notation == "etdrs_letters" else letters_text(row)


def acuity_text(row: Measured | MoreAcuity) -> str:
    """Return the acuity as typed with its notation; under it chart and correction."""
    if not row.acuity:
        return ""
    told = {"etdrs_letters": "letters", "logmar": "logMAR", "decimal": "decimal"}
    notation = told.get(row.acuity_notation, "")
    chart = worded(row.acuity_chart).replace("etdrs", "ETDRS")
    how = ", ".join(part for part in (chart, worded(row.acuity_correction)) if part)
    typed = STAYS.join(part for part in (row.acuity, notation) if part)
    return "\n".join(part for part in (typed, how) if part)


def pressures_text(row: Measured) -> str:
    """Return every pressure with its tonometer, a line each."""
    every = [(row.iop_tenths, row.iop_method)]
    every += [(more.iop_tenths, more.iop_method) for more in row.more_pressures.all()]
    return "\n".join(
        f"{iop_text(tenths)} {worded(method)}".strip()
        for tenths, method in every
        if tenths is not None
    )


def symptoms_text(row: Measured) -> str:
    """Return the symptoms told at the visit; none is told too, a blank is not none."""
    onset = f" since {day_words(row.symptoms_onset)}" if row.symptoms_onset else ""
    return f"{listed(row.symptoms)}{onset}" if row.symptoms else ""


def agents_of(row: Treated) -> list[str]:
    """Return what was given, each in words, for the chart's rows; nothing when nothing was."""
    if row.outcome != Treated.Outcome.GIVEN:
        return []
    first = f"{row.agent} implant" if row.agent and row.implant else row.agent
    return [
        words
        for words in (
            first,
            *(more.agent for more in row.more_treatments.all()),
            laser_text(row.laser),
        )
        if words
    ] or ["treatment, agent not recorded"]


def laser_text(laser: str) -> str:
    """Return the laser given, with its kind where it was recorded."""
    if laser in ("", "none"):
        return ""
    return "laser" if laser == "yes" else f"{worded(laser)} laser"


def treated_text(row: Treated) -> str:
    """Return what was given with doses and the check after, a line each."""
    if row.outcome == Treated.Outcome.NOTHING:
        return "nothing given"
    if row.outcome == Treated.Outcome.NOT_GIVEN:
        return "planned, not given" + (
            f": {row.not_given_because}" if row.not_given_because else ""
        )
    names = agents_of(row)
    doses = [dose_text(row.dose_ug)] + [
        dose_text(more.dose_ug) for more in row.more_treatments.all()
    ]
    doses += [""] * (len(names) - len(doses))
    lines = [f"{name} {dose}".strip() for name, dose in zip(names, doses, strict=False)]
    after = ", ".join(
        part for part in (iop_text(row.iop_after_tenths), worded(row.perception_after)) if part
    )
    if after:
        lines.append(f"after: {after}")
    if row.complications:
        lines.append(worded(row.complications))
    return "\n".join(lines)


def decided_text(row: Decided) -> str:
    """Return the decision in words."""
    weeks = f"{row.interval_weeks} weeks" if row.interval_weeks else ""
    return ", ".join(part for part in (row.get_choice_display(), row.agent, weeks) if part)


def due_text(row: NextStep) -> str:
    """Return when the next visit is due and what is planned then, a line each."""
    weeks = f"in {row.due_weeks} weeks" if row.due_weeks else ""
    day = day_words(row.due_day) if row.due_day else ""
    planned = "check only" if row.check_only else row.planned_agent
    dose = dose_text(row.planned_dose_ug) if planned == row.planned_agent else ""
    return "\n".join(part for part in (day, weeks, f"{planned} {dose}".strip()) if part)
