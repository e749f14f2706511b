"""Adoption: for which causes, once, and beside people who go on saving."""

from collections.abc import Sequence

import pytest

from clinic.models import Adoption, AdoptionConfirmed, LimitSetText, Patient, Review
from clinic.services import reviews
from clinic.services.limit_sets import (
    AdoptionRefused,
    adoption_confirm,
    adoption_propose,
    from_memory,
    limit_set_seed,
)
from tests.clinic.a_clinic import AT, TODAY, Clinic, weeks_ago
from trends.limits import shipped

pytestmark = pytest.mark.django_db


@pytest.fixture
def clinic() -> Clinic:
    return Clinic(with_limits=False)


def general() -> LimitSetText:
    return next(row for row in limit_set_seed(at=AT) if row.name == "general")


def propose(clinic: Clinic, cause: str = "") -> Adoption:
    return adoption_propose(
        site=clinic.site, limit_set=general(), cause=cause, by=clinic.user, at=AT
    )


def confirm(clinic: Clinic, adoption: Adoption) -> AdoptionConfirmed:
    ticked = from_memory(shipped("general"))
    return adoption_confirm(adoption=adoption, ticked=ticked, **clinic.who())


def test_a_set_is_proposed_only_for_causes_it_names(clinic: Clinic) -> None:
    with pytest.raises(AdoptionRefused, match="say nothing of another"):
        propose(clinic, "old_age")
    assert propose(clinic, "diabetic").cause == "diabetic"


def test_a_proposal_is_confirmed_once(clinic: Clinic) -> None:
    adoption = propose(clinic)
    confirm(clinic, adoption)
    with pytest.raises(AdoptionRefused, match="confirmed before"):
        confirm(clinic, adoption)
    assert AdoptionConfirmed.objects.count() == 1


def test_seeding_twice_stores_each_set_once(clinic: Clinic) -> None:
    assert limit_set_seed(at=AT) == limit_set_seed(at=AT)
    assert LimitSetText.objects.filter(name="general").count() == 1


def test_what_somebody_saved_meanwhile_keeps_its_review(
    clinic: Clinic, monkeypatch: pytest.MonkeyPatch
) -> None:
    patient = clinic.enrol("R")
    clinic.save("measured", patient, weeks_ago(1), R=clinic.scan(400))
    before = Review.objects.get()

    def saved_meanwhile(patients: Sequence[Patient]) -> None:
        Review.objects.create(
            visit=before.visit,
            eye=before.eye,
            seq=2,
            engine_version=before.engine_version,
            inputs_digest="newer values",
            why="meanwhile",
            by=clinic.user,
            at=AT,
        )

    adoption = propose(clinic)
    monkeypatch.setattr(reviews, "locked_all", saved_meanwhile)
    confirm(clinic, adoption)
    assert list(Review.objects.order_by("seq").values_list("seq", "why")) == [
        (1, "after an entry"),
        (2, "meanwhile"),
    ]
    assert AdoptionConfirmed.objects.get().at.date() == TODAY
