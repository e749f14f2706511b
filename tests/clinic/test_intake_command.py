"""``manage.py intake``: from a file to the log, all or nothing, with accounts and keys outside."""

import csv
import io
from pathlib import Path

import pytest
from django.core.management import CommandError, call_command

from clinic.exchange.intake import take_in as take_in_module
from clinic.exchange.intake.keys import half_name, prepare_keys, read_keys
from clinic.models import (
    Entry,
    Eye,
    IntakeFile,
    Measured,
    Membership,
    Patient,
    Site,
    Treated,
    User,
    Visit,
)
from clinic.notice import NOTICE

pytestmark = pytest.mark.django_db
SAMPLES = Path(__file__).parents[2] / "fixtures" / "intake"
TRIAL, LETTERS = "day_numbers_with_cst", "day_numbers_letters_only"


@pytest.fixture(autouse=True)
def here() -> Site:
    site = Site.objects.create(slug="here", label="Here", emergency_text="Ring the desk")
    steward = User.objects.create_user("odile", password="not-used-here-1")
    Membership.objects.create(user=steward, site=site, role="steward")
    return site


def intake(tmp_path: Path, name: str, *more: str, file: Path | None = None) -> str:
    """Run the command on a sample; keys and accounts go into ``tmp_path``."""
    out = io.StringIO()
    call_command(
        "intake",
        str(file or SAMPLES / f"{name}.csv"),
        "--site=here",
        f"--mapping={SAMPLES / f'{name}.toml'}",
        "--day-zero=2024-01-08",
        f"--keys={tmp_path / 'keys.csv'}",
        f"--account={tmp_path / 'account'}",
        *more,
        stdout=out,
    )
    return out.getvalue()


def refused(tmp_path: Path, name: str, *more: str, file: Path | None = None) -> CommandError:
    with pytest.raises(CommandError) as caught:
        intake(tmp_path, name, *more, file=file)
    assert caught.value.returncode == 2
    return caught.value


def account(tmp_path: Path, name: str) -> list[dict[str, str]]:
    with (tmp_path / "account" / f"{name}.csv").open(newline="") as lines:
        return list(csv.DictReader(lines))


def nothing_stored() -> bool:
    return not (Patient.objects.exists() or Visit.objects.exists() or IntakeFile.objects.exists())


def test_a_file_is_stored_with_codes_that_only_the_key_file_links(tmp_path: Path) -> None:
    said = intake(tmp_path, TRIAL)
    keys = read_keys(tmp_path / "keys.csv")
    assert set(keys) == {"INV-01", "INV-02"}
    assert set(keys.values()) == set(Patient.objects.values_list("code", flat=True))
    # Ten rows of three eyes; the two eyes of INV-01 share day 0.
    assert (Eye.objects.count(), Visit.objects.count(), Measured.objects.count()) == (3, 9, 10)
    assert Treated.objects.count() == 9
    assert "Stored 10 eye-visits of 3 eyes, 2 people" in said
    assert NOTICE in said


def test_source_ids_are_nowhere_in_the_database(tmp_path: Path) -> None:
    intake(tmp_path, TRIAL)
    stored = str(list(Patient.objects.values())) + str(list(Entry.objects.values("payload")))
    assert "INV-01" not in stored + str(list(IntakeFile.objects.values()))


def test_a_dry_run_shows_the_fates_and_stores_nothing(tmp_path: Path) -> None:
    said = intake(tmp_path, TRIAL, "--dry-run")
    assert "nothing was stored" in said
    assert nothing_stored()
    assert not (tmp_path / "keys.csv").exists()
    fates = account(tmp_path, "rows")
    assert [row["row"] for row in fates] == [str(number) for number in range(2, 12)]
    assert {row["fate"] for row in fates} == {"stored"}
    assert "no acuity" in fates[3]["said"]


def test_what_was_assumed_is_kept_with_the_file(tmp_path: Path) -> None:
    said = intake(tmp_path, TRIAL)
    file = IntakeFile.objects.get()
    assert (file.rows, file.visits_stored, file.cells_refused) == (10, 9, 0)
    for sentence in file.assumed:
        assert sentence in said
    assert any("one scanner per eye" in sentence for sentence in file.assumed)


def test_the_same_file_twice_is_refused(tmp_path: Path) -> None:
    intake(tmp_path, TRIAL)
    assert "taken in on" in str(refused(tmp_path, TRIAL))
    assert IntakeFile.objects.count() == 1


def test_with_the_key_file_the_next_file_finds_the_same_people(tmp_path: Path) -> None:
    intake(tmp_path, TRIAL)
    later = tmp_path / "later.csv"
    lines = (SAMPLES / f"{TRIAL}.csv").read_text().splitlines()
    new = [
        lines[5].replace(",128,", ",170,"),
        lines[5].replace("INV-01", "INV-03").replace(",128,", ",0,"),
    ]
    later.write_text("\n".join([lines[0], *new]) + "\n")
    intake(tmp_path, TRIAL, file=later)
    assert Patient.objects.count() == 3
    keys = read_keys(tmp_path / "keys.csv")
    assert set(keys) == {"INV-01", "INV-02", "INV-03"}
    first = Patient.objects.get(code=keys["INV-01"])
    assert first.eyes.count() == 2
    assert first.visits.filter(day="2024-06-26").exists()


def test_a_visit_that_is_in_the_log_already_is_refused(tmp_path: Path) -> None:
    intake(tmp_path, TRIAL)
    again = tmp_path / "again.csv"
    lines = (SAMPLES / f"{TRIAL}.csv").read_text().splitlines()
    again.write_text("\n".join([lines[0], lines[1]]) + "\n")
    refused(tmp_path, TRIAL, file=again)
    assert "in the log" in account(tmp_path, "refused")[0]["reason"]


def test_refused_cells_are_listed_and_nothing_is_stored(tmp_path: Path) -> None:
    error = refused(tmp_path, LETTERS, file=SAMPLES / "bad_cells.csv")
    assert "5 cells refused; nothing was stored" in str(error)
    cells = account(tmp_path, "refused")
    assert [(cell["row"], cell["column"]) for cell in cells] == [
        ("3", "laterality"),
        ("4", "day"),
        ("5", "bcva_letters"),
        ("6", "bcva_letters"),
        ("6", "injection"),
    ]
    assert all(cell["allowed"] and cell["reason"] for cell in cells)
    # The account opens in a spreadsheet, so the formula that was refused stays text.
    assert cells[3]["value"] == "'=61+3"
    assert nothing_stored()


def test_the_account_is_readable_by_its_owner_only(tmp_path: Path) -> None:
    intake(tmp_path, TRIAL, "--dry-run")
    for path in (tmp_path / "account").iterdir():
        assert path.stat().st_mode & 0o777 == 0o600


def test_an_error_while_storing_leaves_no_row_and_no_key_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = take_in_module.prepare_keys

    def full(path: Path, keys: dict[str, str]) -> None:
        real(path, keys)
        raise OSError("the disk is full")

    monkeypatch.setattr(take_in_module, "prepare_keys", full)
    with pytest.raises(OSError, match="full"):
        intake(tmp_path, TRIAL)
    assert nothing_stored()
    assert list(tmp_path.glob("keys*")) == []


def test_a_key_file_cut_off_after_storing_is_put_in_place(tmp_path: Path) -> None:
    intake(tmp_path, TRIAL)
    path = tmp_path / "keys.csv"
    path.rename(half_name(path))
    assert "taken in on" in str(refused(tmp_path, TRIAL))
    assert set(read_keys(path)) == {"INV-01", "INV-02"}


def test_a_key_file_cut_off_before_storing_is_removed(tmp_path: Path) -> None:
    path = tmp_path / "keys.csv"
    prepare_keys(path, {"INV-01": "never stored"})
    assert "before storing" in intake(tmp_path, TRIAL)
    assert "never stored" not in path.read_text()
    assert list(tmp_path.glob("keys*")) == [path]


def test_a_key_file_of_another_site_is_refused(tmp_path: Path) -> None:
    intake(tmp_path, TRIAL)
    other = Site.objects.create(slug="there", label="There", emergency_text="Ring the desk")
    Membership.objects.create(user=User.objects.get(), site=other, role="steward")
    with pytest.raises(CommandError, match="not enrolled here"):
        call_command(
            "intake",
            str(SAMPLES / f"{TRIAL}.csv"),
            "--site=there",
            f"--mapping={SAMPLES / f'{TRIAL}.toml'}",
            "--day-zero=2024-01-08",
            f"--keys={tmp_path / 'keys.csv'}",
            stdout=io.StringIO(),
        )


def test_a_key_file_with_a_mistyped_code_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "keys.csv"
    path.write_text("source_id,code\nINV-01,ABCDEFGH99\n")
    path.chmod(0o600)
    assert "check characters" in str(refused(tmp_path, TRIAL))


@pytest.mark.parametrize(
    ("more", "said"),
    [
        (["--site=nowhere"], "No such site"),
        (["--by=nobody"], "one steward"),
        (["--mapping=nothing.toml"], "nothing.toml"),
    ],
)
def test_a_wrong_argument_gets_a_clear_sentence(tmp_path: Path, more: list[str], said: str) -> None:
    assert said in str(refused(tmp_path, TRIAL, *more))


def test_a_file_that_is_not_there_gets_a_clear_sentence(tmp_path: Path) -> None:
    assert "none by that name" in str(refused(tmp_path, TRIAL, file=tmp_path / "none.csv"))


def test_several_stewards_must_be_told_apart(tmp_path: Path) -> None:
    second = User.objects.create_user("edda", password="not-used-here-1")
    Membership.objects.create(user=second, site=Site.objects.get(), role="steward")
    assert "edda, odile" in str(refused(tmp_path, TRIAL))
    intake(tmp_path, TRIAL, "--by=edda")
    assert IntakeFile.objects.get().by == second


def test_a_workbook_is_taken_in_like_a_csv_file(tmp_path: Path) -> None:
    from openpyxl import Workbook

    book = Workbook()
    page = book.active
    assert page is not None
    with (SAMPLES / f"{TRIAL}.csv").open(newline="") as lines:
        for place, row in enumerate(csv.reader(lines)):
            page.append(
                [int(cell) if place and cell.isdigit() else cell for cell in row]  # typed cells
            )
    path = tmp_path / "visits.xlsx"
    book.save(path)
    assert "Stored 10 eye-visits" in intake(tmp_path, TRIAL, file=path)
