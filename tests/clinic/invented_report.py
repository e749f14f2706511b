"""An invented person for the prints: a right eye with a long course, a left eye off the chart."""

import datetime as dt

from clinic import content as c
from clinic.chart import EyeGiven, EyeMark, LimitPiece, Reading, panels_for
from clinic.notice import NOTICE

START = dt.date(2024, 2, 5)
PRINTED = dt.datetime(2026, 3, 4, 16, 5)


def days(count: int, weeks: int = 5) -> list[dt.date]:
    return [START + dt.timedelta(weeks=weeks * n) for n in range(count)]


def right_eye(count: int = 18) -> EyeGiven:
    cst, letters, iop = [], [], []
    for n, day in enumerate(days(count)):
        um = 498 - 22 * min(n, 8) + (38 if n in (11, 12, count - 1) else 0) + (n * 7) % 11
        scanner = "SD-BM" if n < 10 else "SS"
        cst.append(
            Reading(day, um, f"{um} µm", scanner, f"Scanner {scanner}", 20, provisional=n == 6)
        )
        score = 58 + min(n, 9) - (6 if n == count - 1 else 0)
        letters.append(Reading(day, score, f"{score} letters", "etdrs glasses", "glasses", 8))
        iop.append(
            Reading(day, 14 + n % 4, f"{14 + n % 4} mmHg", "applanation", "applanation", 2.6)
        )
    given = [
        EyeMark(day, "ranibizumab" if n < 8 else "aflibercept")
        for n, day in enumerate(days(count))
        if n % 3 != 2
    ]
    events = (EyeMark(dt.date(2025, 4, 14), "cataract surgery", ("cst", "letters")),)
    limits = (
        LimitPiece(305, "center-involved, SD-BM, women", None, days(count)[9]),
        LimitPiece(260, "center-involved, SS, women", days(count)[9], None),
    )
    return EyeGiven("R", tuple(cst), tuple(letters), tuple(iop), tuple(given), events, limits)


def left_eye(count: int = 9) -> EyeGiven:
    letters = []
    for n, day in enumerate(days(count, 10)):
        if n in (5, 6):
            letters.append(
                Reading(day, None, "counting fingers at 1 m", None, "glasses", off_chart="CF")
            )
        else:
            letters.append(Reading(day, 12 - n, f"{12 - n} letters", "etdrs glasses", "glasses"))
    cst = tuple(
        Reading(day, 371 + 9 * n, f"{371 + 9 * n} µm", "SD-BM", "Scanner 1", 20)
        for n, day in enumerate(days(count, 10))
    )
    return EyeGiven("L", cst, tuple(letters))


WORKED = c.VerdictText(
    rule="thickening",
    title="Thickening since the last comparable scan",
    outcome="raised",
    rank="Weigh today",
    sentence=(
        "Right eye: CST rose 38 µm (322 to 360, +11.8 %) since 8 Sep 2025, "
        "5 weeks after the last injection"
    ),
    from_day=dt.date(2025, 10, 13),
    values=(
        c.ValueUsed("CST", "360 µm", dt.date(2025, 10, 13), "Scanner 2, SS", "360"),
        c.ValueUsed(
            "CST",
            "322 µm",
            dt.date(2025, 9, 8),
            "Scanner 2, SS",
            "322",
            "one scanner per eye, assumed",
        ),
    ),
    arithmetic=("(360 − 322) ÷ 322 = 38 ÷ 322 = 11.8 % ≥ 10 %", "38 µm > 20 µm"),
    version="thickening 1",
    limit="10 % and 20 µm, limit set general 1.0.0",
    adopted="adopted 1 Feb 2026 by Demo Clinician",
    sources=("Invented A and B, 2019, table 2: stable eyes, n = 601; repeatability study",),
    noise="Published repeatability ±20 µm; the change of 38 µm exceeds it.",
    unknowns=("Fluid was not graded.",),
    options=("no change, look again", "repeat the scan", "weigh a shorter interval"),
    not_for=("eyes within 4 weeks of surgery", "scans of another class"),
)
ALARM = c.VerdictText(
    rule="alarm_symptoms",
    title="Alarm symptoms",
    outcome="raised",
    rank="Raise first",
    sentence="Right eye: pain and redness told on 13 Oct 2025, 4 days after the last injection",
    from_day=dt.date(2025, 10, 13),
    version="alarm_symptoms 1",
    limit="floor rule, always on",
    emergency_text="Ring the eye emergency room, 24 hours, extension 5.",
    answer="seen, acting · Demo Clinician · 13 Oct 2025 09:40",
)


def visit_rows(count: int) -> tuple[c.VisitRow, ...]:
    return tuple(
        c.VisitRow(
            day,
            "planned" if n % 4 else "check only",
            f"{420 - n} µm",
            "Scanner 2, SS" + (", poor" if n == 6 else ""),
            "IRF yes\nSRF no",
            "20/40-2 refracted",
            "67 letters",
            "14.0 mmHg\napplanation",
            "ranibizumab 0.5 mg" if n % 3 else "nothing given",
            "criteria to retreat met",
            "treat" if n % 3 else "withhold",
            "4 weeks\n" + (day + dt.timedelta(weeks=4)).isoformat(),
            changes=("CST corrected from 450 µm: typing error",) if n == 2 else (),
        )
        for n, day in enumerate(days(count))
    )


def report(code: str = "K7QX3M9TAB", visits: int = 18, note: str = "") -> c.PatientReport:
    right, left = right_eye(visits), left_eye()
    span = (min(right.days()), max(right.days() + left.days()))
    missing = (
        c.MissingText(
            "fluid_back",
            "Fluid back",
            "Right eye: couldn't tell whether fluid is back",
            ("irf", "srf"),
        ),
    )
    eyes = (
        c.EyeReport(
            "R",
            "Right eye",
            panels_for(right, span=span),
            right,
            "diabetic",
            "in treatment",
            "treat-and-extend",
            "extended to 10 weeks",
            "shorten to 8 weeks",
            dt.date(2025, 10, 13),
            "history entered: 6 ranibizumab before enrolment, loading done",
            (
                "Bars: published repeatability ±20 µm (SD-BM, SS). Hollow: poor scan. "
                "Lines break where readings are not comparable.",
            ),
            (ALARM, WORKED),
            (),
            missing,
            ("Limit crossed", "Letters lost", "Pressure"),
            visit_rows(visits),
            (
                c.DecisionRow(
                    dt.date(2025, 10, 13), "treat", note or "edge of an old scar", "Demo Clinician"
                ),
            ),
            (
                c.AnswerRow(
                    dt.date(2025, 10, 13),
                    "Alarm symptoms",
                    "Raise first",
                    "seen, acting",
                    "",
                    "Demo Clinician",
                ),
                c.AnswerRow(dt.date(2025, 10, 13), "Thickening", "Weigh today"),
            ),
            (c.Dated(START, "treat-and-extend, ranibizumab", "first choice here"),),
            (c.Dated(dt.date(2025, 4, 14), "cataract surgery"),),
            (c.Dated(dt.date(2025, 10, 9), "patient told us: sore, red", "told Demo Recorder"),),
            (
                c.ContextRow("Treatments in 12 months", "7", "ranibizumab 2, aflibercept 5"),
                c.ContextRow("Longest dry interval so far", "10 weeks", "history, not advice"),
            ),
        ),
        c.EyeReport(
            "L",
            "Left eye",
            panels_for(left, span=span),
            left,
            "branch vein occlusion",
            "watched",
            history="history not entered",
            could_not_tell=missing,
            limits_not_reached=("Pressure",),
            visits=visit_rows(9),
        ),
    )
    return c.PatientReport(
        code,
        "Harbour eye clinic",
        PRINTED,
        "Demo Recorder",
        "0.2.0",
        NOTICE,
        eyes,
        "born 1957 · female",
        START,
        dt.date(2025, 10, 13),
        ("limit set general 1.0.0 (diabetic), adopted 1 Feb 2026 by Demo Clinician",),
        "5f2a 91c0 7be4",
        ("Invented A and B. Repeatability. 2019;1:1-9.", "Invented C. Limits. 2020;2:2-8."),
    )
