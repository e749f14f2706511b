"""Context of the whole person: estimates with their caveats, and nothing where they would mislead.

Expected numbers: 120/80 and 15 mmHg give a mean of 93.33 and a perfusion pressure of 47.22
(calculated from the definition, Van Keer 2016); total protein 7.0 g/dL gives 25.63 mmHg
(Landis-Pappenheimer as printed by Mullins 1983).
"""

import pytest

from clinic.models import PersonFact
from clinic.selectors.context_body import body_rows
from clinic.selectors.eye_log import eye_logs
from tests.clinic.at_the_desk import NOW, TODAY, Desk, days_ago

pytestmark = pytest.mark.django_db
Kind = PersonFact.Kind


class Told:
    """One person's right eye and what is said beside it."""

    def __init__(self) -> None:
        self.desk = Desk()
        self.patient = self.desk.enrol("R")
        self.seq = 0

    def fact(self, ago: int, kind: str, **values: int) -> None:
        self.seq += 1
        PersonFact.objects.create(
            patient=self.patient,
            seq=self.seq,
            kind=kind,
            day=days_ago(ago),
            at=NOW,
            by=self.desk.recorder,
            **values,
        )

    def measured(self, ago: int, **values: object) -> None:
        self.desk.save(self.patient, "measured", days_ago(ago), R=values)

    def rows(self) -> dict[str, tuple[str, str]]:
        (log,) = eye_logs(self.patient)
        return {row.what: (row.amount, row.note) for row in body_rows(log, TODAY)}


def test_perfusion_is_shown_with_a_pressure_of_the_same_day() -> None:
    told = Told()
    told.measured(10, iop_tenths=150, iop_method="applanation")
    told.fact(10, Kind.BLOOD_PRESSURE, systolic_mmhg=120, diastolic_mmhg=80)
    rows = told.rows()
    assert rows["Mean arterial pressure"][0] == "93 mmHg"
    amount, note = rows["Mean ocular perfusion pressure"]
    assert amount == "47 mmHg" and "estimate" in note and "seated" in note
    amount, note = rows["Systolic, diastolic perfusion pressure"]
    assert amount == "105, 65 mmHg" and "from memory, check the original" in note


def test_perfusion_is_not_shown_with_a_pressure_of_another_day() -> None:
    told = Told()
    told.measured(10, iop_tenths=150, iop_method="applanation")
    told.fact(9, Kind.BLOOD_PRESSURE, systolic_mmhg=120, diastolic_mmhg=80)
    assert list(told.rows()) == ["Mean arterial pressure"]


def test_colloid_osmotic_pressure_says_how_wrong_it_can_be() -> None:
    told = Told()
    told.fact(90, Kind.TOTAL_PROTEIN, protein_tenths=70)
    amount, note = told.rows()["Plasma colloid osmotic pressure"]
    assert amount == "about 25.6 mmHg" and "wrong by 5 to 10 mmHg" in note


def test_an_old_protein_gives_no_estimate() -> None:
    told = Told()
    told.fact(91, Kind.TOTAL_PROTEIN, protein_tenths=70)
    amount, note = told.rows()["Plasma colloid osmotic pressure"]
    assert amount == "not estimated" and "older than 90 days" in note


def test_nothing_is_shown_where_nothing_is_known() -> None:
    assert Told().rows() == {}
