"""What was assumed at intake is said in each working, on the page and in the stored review."""

import datetime as dt
import io
from pathlib import Path

import pytest
from django.core.management import call_command

from clinic.models import Membership, Patient, Review, Site, User
from clinic.selectors.adopted import parsed
from clinic.selectors.report_content import report_content
from clinic.services.limit_sets import (
    adoption_confirm,
    adoption_propose,
    from_memory,
    limit_set_seed,
)

pytestmark = pytest.mark.django_db
SAMPLES = Path(__file__).parents[2] / "fixtures" / "intake"
AT = dt.datetime(2026, 3, 7, 9, 0, tzinfo=dt.UTC)
SAID = "each eye counts from its own first visit: the two eyes' dates don't match"


@pytest.fixture
def patient(tmp_path: Path) -> Patient:
    site = Site.objects.create(slug="here", label="Here", emergency_text="Ring the desk")
    by = User.objects.create_user("odile", password="not-used-here-1")
    for role in ("steward", "clinician"):
        Membership.objects.create(user=by, site=site, role=role)
    general = next(row for row in limit_set_seed(at=AT) if row.name == "general")
    proposal = adoption_propose(site=site, limit_set=general, by=by, at=AT)
    ticked = from_memory(parsed(general.text))
    adoption_confirm(adoption=proposal, ticked=ticked, by=by, at=AT, today=AT.date())
    call_command(
        "intake",
        str(SAMPLES / "day_numbers_with_cst.csv"),
        "--site=here",
        f"--mapping={SAMPLES / 'day_numbers_with_cst.toml'}",
        "--day-zero=2024-01-08",
        f"--keys={tmp_path / 'keys.csv'}",
        f"--account={tmp_path / 'account'}",
        stdout=io.StringIO(),
    )
    return Patient.objects.filter(eyes__side="R").select_related("site").get()


def test_the_stored_working_says_it(patient: Patient) -> None:
    review = Review.objects.get(eye__patient=patient, eye__side="R")
    # Row 6 of the sample: 306 to 372 µm is +21.6 %, so thickening is raised at the last visit.
    row = next(row for row in review.raised if row["rule"] == "thickening")
    assert row["outcome"] == "raised"
    assert SAID in row["working"]["assumed"]
    assert "one scanner per eye, assumed at intake" in row["working"]["assumed"]
    assert row["working"]["assumed"].count("one scanner per eye") == 0


def test_the_report_says_it(patient: Patient) -> None:
    content = report_content(patient, printed_by="test", at=AT)
    right = next(eye for eye in content.eyes if eye.side == "R")
    text = next(one for one in right.raised if "CST rose" in one.sentence)
    assert SAID in str(text)
