"""The invented clinic as a tidy file, for ``python -m trends review`` and the alert-diet test."""

from clinic.exchange.demo.rows import DemoRows, EyeVisit, Given, PersonRow, Readings, VisitRow

Cells = dict[str, str]


def tidy_cells(rows: DemoRows) -> list[Cells]:
    """Return one mapping of tidy column to text for each eye-visit and contact."""
    classes = {label: oct_class for site in rows.sites for label, oct_class in site.scanners}
    cells: list[Cells] = []
    for person in rows.people:
        for visit in person.visits:
            cells += [eye_cells(person, visit, eye, classes) for eye in visit.eyes]
        cells += [
            {
                "person": person.key,
                "eye": contact.side,
                "date": contact.day.isoformat(),
                "kind": "contact",
                "symptoms": contact.symptoms,
            }
            for contact in person.contacts
        ]
    return cells


def eye_cells(person: PersonRow, visit: VisitRow, eye: EyeVisit, classes: dict[str, str]) -> Cells:
    """Return the cells of one eye at one visit."""
    row = person.eye(eye.side)
    changed = row.status_from is not None and visit.day >= row.status_from
    cells = {
        "person": person.key,
        "eye": eye.side,
        "date": visit.day.isoformat(),
        "kind": visit.kind,
        "sex": person.sex,
        "birth_year": str(person.birth_year or ""),
        "cause": row.cause,
        "status": row.status if changed else "in_treatment",
        "regimen": row.regimen,
        "due_date": eye.ahead.due_day.isoformat() if eye.ahead else "",
    }
    if eye.measured is not None:
        cells |= measured_cells(eye.measured, classes)
    if eye.treated is not None:
        cells |= treated_cells(eye.treated)
    return cells


def measured_cells(read: Readings, classes: dict[str, str]) -> Cells:
    """Return the cells of what was measured."""
    return {
        "cst_um": "" if read.cst_um is None else str(read.cst_um),
        "oct_class": classes[read.scanner],
        "scanner": read.scanner,
        "scan_quality": read.scan_quality,
        "irf": read.irf,
        "srf": read.srf,
        "acuity": read.acuity,
        "acuity_notation": read.notation,
        "acuity_chart": read.chart,
        "acuity_correction": read.correction,
        "iop_mmhg": mmhg(read.iop_tenths),
        "iop_method": read.iop_method,
        "symptoms": read.symptoms,
    }


def treated_cells(given: Given) -> Cells:
    """Return the cells of what was given; nothing given is ``none``, never blank."""
    return {
        "agent": given.agent if given.outcome == "given" else "none",
        "dose_mg": f"{given.dose_ug / 1000:g}" if given.dose_ug else "",
        "laser": given.laser,
        "iop_after_mmhg": mmhg(given.iop_after_tenths),
    }


def mmhg(tenths: int | None) -> str:
    """Return a pressure in mmHg as text."""
    return "" if tenths is None else f"{tenths / 10:g}"
