"""The database itself refuses to change or remove what the log holds."""

import datetime as dt

import pytest
from django.apps import apps
from django.core.management import call_command
from django.core.management.base import SystemCheckError
from django.db import IntegrityError, connection, transaction

from clinic import models, triggers

pytestmark = pytest.mark.django_db
AT = dt.datetime(2026, 3, 4, 9, 30, tzinfo=dt.UTC)


@pytest.fixture
def seal() -> models.Seal:
    return models.Seal.objects.create(
        day=dt.date(2026, 3, 3), heads=0, key_id="k", digest="d", at=AT
    )


def test_an_update_behind_the_apps_back_is_an_integrity_error(seal: models.Seal) -> None:
    with pytest.raises(IntegrityError), transaction.atomic():
        models.Seal.objects.filter(pk=seal.pk).update(digest="forged")
    assert models.Seal.objects.get().digest == "d"


def test_raw_sql_cannot_remove_a_row_either(seal: models.Seal) -> None:
    with pytest.raises(IntegrityError), transaction.atomic(), connection.cursor() as cursor:
        cursor.execute("DELETE FROM clinic_seal")
    assert models.Seal.objects.count() == 1


def test_every_append_only_table_has_both_triggers() -> None:
    assert triggers.missing(connection) == []
    have = triggers.present(connection)
    for model in models.APPEND_ONLY:
        table = model._meta.db_table
        assert {f"{table}_no_update", f"{table}_no_delete"} <= have


def test_every_append_only_model_is_guarded() -> None:
    grows = {
        model
        for model in apps.get_app_config("clinic").get_models()
        if issubclass(model, models.AppendOnly)
    }
    assert grows <= set(models.APPEND_ONLY)


def test_the_check_fails_when_a_trigger_is_gone() -> None:
    triggers.remove(connection)
    with pytest.raises(SystemCheckError, match="append-only trigger"):
        call_command("check", databases=["default"])
    triggers.install(connection)
    call_command("check", databases=["default"])
