"""Two people at two stations at the same moment, each with a connection of their own."""

import threading
import uuid
from collections.abc import Callable
from typing import Any

import pytest
from django.db import connection

from clinic.models import Decided, Measured, PostedPart, Review, Visit
from clinic.services.parts import Conflict
from clinic.services.projection import differing
from tests.clinic.a_clinic import TODAY, Clinic, weeks_ago

pytestmark = pytest.mark.django_db(transaction=True)


def at_once(*jobs: Callable[[], Any]) -> list[Any]:
    """Run jobs in threads that start together; return each result or what was raised."""
    start, results = threading.Barrier(len(jobs)), [None] * len(jobs)

    def run(number: int) -> None:
        try:
            start.wait(timeout=20)
            results[number] = jobs[number]()
        except Exception as error:
            results[number] = error
        finally:
            connection.close()

    threads = [threading.Thread(target=run, args=(number,)) for number in range(len(jobs))]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(timeout=60)
    return results


@pytest.fixture
def clinic() -> Clinic:
    return Clinic()


def test_of_two_who_save_the_same_part_one_is_stored_and_one_is_told(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    results = at_once(
        lambda: clinic.save("measured", patient, TODAY, R=clinic.scan(400)),
        lambda: clinic.save("measured", patient, TODAY, R=clinic.scan(410)),
    )
    assert [isinstance(one, Conflict) for one in results].count(True) == 1
    assert Measured.objects.count() == 1
    assert Visit.objects.count() == 1


def test_of_two_who_save_other_parts_of_a_new_visit_both_are_stored(clinic: Clinic) -> None:
    patient = clinic.enrol("R", "L")
    clinic.save("measured", patient, weeks_ago(4), R=clinic.scan(400))
    results = at_once(
        lambda: clinic.save("measured", patient, TODAY, R=clinic.scan(450), L=clinic.scan(300)),
        lambda: clinic.save("decided", patient, TODAY, R={"choice": "treat"}),
    )
    assert not [one for one in results if isinstance(one, Exception)]
    assert (Measured.objects.count(), Decided.objects.count()) == (3, 1)
    assert Visit.objects.filter(day=TODAY).count() == 1
    numbers = Review.objects.filter(visit__day=TODAY, eye__side="R").values_list("seq", flat=True)
    assert sorted(numbers) == list(range(1, len(numbers) + 1))
    assert differing([patient]) == []


def test_one_post_sent_twice_at_once_is_stored_once(clinic: Clinic) -> None:
    patient, request = clinic.enrol("R"), uuid.uuid4()

    def post() -> Any:
        return clinic.save("measured", patient, TODAY, R=clinic.scan(400), request_id=request)

    results = at_once(post, post)
    assert sorted(one.repeated for one in results) == [False, True]
    assert (Measured.objects.count(), PostedPart.objects.count()) == (1, 1)
