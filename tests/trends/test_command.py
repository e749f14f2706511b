"""``python -m trends``: good files are judged, bad cells are named, nothing is half written."""

import csv
import json
import random
from pathlib import Path

import pytest

from trends import limits, tidy
from trends.__main__ import main
from trends.citations import citations
from trends.rules import registry

GOOD = [
    {"person": "b", "eye": "L", "date": "2026-02-01", "cst_um": "440", "oct_class": "SD-RPE"},
    {"person": "b", "eye": "R", "date": "2026-02-01", "cst_um": "440", "oct_class": "SD-RPE"},
    {"person": "b", "eye": "R", "date": "2026-01-01", "cst_um": "400", "oct_class": "SD-RPE"},
    {"person": "a", "eye": "R", "date": "2026-01-01", "cst_um": "400", "oct_class": "SD-RPE"},
]


def write(folder: Path, rows: list[dict[str, str]], header: list[str] | None = None) -> Path:
    names = header or list(dict.fromkeys(name for row in rows for name in row))
    path = folder / "visits.csv"
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, names)
        writer.writeheader()
        writer.writerows(rows)
    return path


def run(folder: Path, rows: list[dict[str, str]], *more: str, as_of: str = "2026-03-01") -> int:
    path = write(folder, rows)
    out = folder / "verdicts.csv"
    return main(
        ["review", str(path), "--limit-set", "general", "--as-of", as_of, "--out", str(out), *more]
    )


def verdicts(folder: Path) -> list[dict[str, str]]:
    with (folder / "verdicts.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def test_verdicts_stand_in_order_with_the_stated_columns(tmp_path: Path) -> None:
    assert run(tmp_path, GOOD) == 0
    rows = verdicts(tmp_path)
    assert tuple(rows[0]) == tidy.COLUMNS
    places = [(row["person"], row["eye"]) for row in rows]
    assert list(dict.fromkeys(places)) == [("a", "R"), ("b", "R"), ("b", "L")]
    mine = [row for row in rows if (row["person"], row["eye"]) == ("b", "R")]
    days = [row["date"] for row in mine]
    assert days == sorted(days) and mine[-1]["rule"] == "unanswered"
    first_day = [row["rule"] for row in mine if row["date"] == days[0]]
    assert first_day == [module.INFO.id for module in registry.VISIT_RULES]


def test_a_raised_row_carries_its_sentence_and_working(tmp_path: Path) -> None:
    run(tmp_path, GOOD)
    row = next(
        one
        for one in verdicts(tmp_path)
        if one["outcome"] == "raised" and one["rule"] == "thickening"
    )
    assert row["rank"] == "weigh_today"
    assert row["sentence"].startswith(
        "Right eye: CST rose 40 µm (400 to 440, +10.0 %) since 1 January 2026"
    )
    working = json.loads(row["working"])
    for part in ("fact", "values", "arithmetic", "rule", "source", "noise", "options", "not_for"):
        assert working[part], part
    assert working["reference_date"] == "2026-01-01" and working["reference_value"] == 400
    assert len(working["options"]) >= 2 and any("no change" in one for one in working["options"])


def test_working_is_kept_back_unless_asked_for(tmp_path: Path) -> None:
    run(tmp_path, GOOD)
    plain = {row["outcome"] for row in verdicts(tmp_path) if row["working"]}
    assert "limit_not_reached" not in plain and {"raised", "could_not_tell"} <= plain
    run(tmp_path, GOOD, "--all-working")
    assert all(row["working"] for row in verdicts(tmp_path))


def test_shuffled_rows_give_the_same_bytes(tmp_path: Path) -> None:
    run(tmp_path, GOOD)
    first = (tmp_path / "verdicts.csv").read_bytes()
    rows = GOOD.copy()
    random.Random(7).shuffle(rows)
    run(tmp_path, rows)
    assert (tmp_path / "verdicts.csv").read_bytes() == first


def test_absent_columns_are_the_same_as_blank_cells(tmp_path: Path) -> None:
    run(tmp_path, GOOD)
    first = (tmp_path / "verdicts.csv").read_bytes()
    run(tmp_path, [{**row, "irf": "", "acuity": "", "iop_mmhg": "", "agent": ""} for row in GOOD])
    assert (tmp_path / "verdicts.csv").read_bytes() == first


BAD = {
    "eye": "OD",
    "date": "03/02/2026",
    "kind": "visit",
    "cst_um": "0.412",
    "oct_class": "SD",
    "scan_quality": "ok",
    "irf": "maybe",
    "srf": "2",
    "acuity_notation": "letters",
    "acuity_chart": "wall",
    "acuity_correction": "lens",
    "iop_mmhg": "81",
    "iop_method": "finger",
    "iop_after_mmhg": "-1",
    "agent": "water",
    "dose_mg": "200",
    "laser": "blue",
    "sex": "x",
    "birth_year": "58",
    "cause": "age",
    "status": "fine",
    "regimen": "often",
    "due_date": "2026-01-31",
    "symptoms": "itch",
    "contact": "phone",
}


@pytest.mark.parametrize("column", BAD)
def test_an_impossible_value_is_named_and_nothing_is_written(
    column: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    row = {
        "person": "a",
        "eye": "R",
        "date": "2026-02-01",
        "acuity": "70",
        "acuity_notation": "etdrs_letters",
    }
    assert run(tmp_path, [row, {**row, "date": "2026-02-02", column: BAD[column]}]) == 2
    told = capsys.readouterr().err
    assert f"row 2, column {column}" in told or (column == "acuity_notation" and "row 2" in told)
    assert repr(BAD[column]) in told and "allowed:" in told
    assert not (tmp_path / "verdicts.csv").exists()


@pytest.mark.parametrize(
    "rows,words",
    [
        ([{"person": "a", "eye": "R", "date": "2026-02-01"}] * 2, "row 1 holds the same visit"),
        ([{"person": "a", "eye": "R", "date": "2026-03-02"}], "on or before 2026-03-01"),
        ([{"person": "", "eye": "R", "date": "2026-02-01"}], "a value in each row"),
        ([{"person": "a", "eye": "R", "date": "2026-02-01", "acuity": "0.5"}], "several meanings"),
        (
            [
                {"person": "a", "eye": "R", "date": "2026-02-01", "sex": "f"},
                {"person": "a", "eye": "L", "date": "2026-02-01", "sex": "m"},
            ],
            "one sex for a person",
        ),
        (
            [
                {"person": "a", "eye": "R", "date": "2026-02-01", "cause": "diabetic"},
                {"person": "a", "eye": "R", "date": "2026-02-02", "cause": "uveitic"},
            ],
            "one cause for an eye",
        ),
        ([{"person": "a", "eye": "R", "date": "2026-02-01", "colour": "red"}], "not known"),
        ([{"person": "a", "eye": "R"}], "column date"),
    ],
)
def test_rows_that_contradict_are_refused(
    rows: list[dict[str, str]], words: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(tmp_path, rows) == 2
    assert words in capsys.readouterr().err


def test_an_empty_file_is_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "visits.csv"
    for content in (b"", b"person,eye,date\n", b"\xff\xfe\x00bad"):
        path.write_bytes(content)
        arguments = [
            "--limit-set",
            "general",
            "--as-of",
            "2026-03-01",
            "--out",
            str(tmp_path / "o"),
        ]
        assert main(["review", str(path), *arguments]) == 2
        assert capsys.readouterr().err


def test_an_unknown_set_and_a_bad_date_are_refused(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = write(tmp_path, GOOD)
    out = ["--out", str(tmp_path / "o.csv")]
    assert main(["review", str(path), "--limit-set", "x", "--as-of", "2026-03-01", *out]) == 2
    assert "general" in capsys.readouterr().err
    with pytest.raises(SystemExit) as stopped:
        main(["review", str(path), "--limit-set", "general", "--as-of", "1/3/2026", *out])
    assert stopped.value.code == 2 and "2026-03-04" in capsys.readouterr().err


def test_text_cannot_run_as_a_formula(tmp_path: Path) -> None:
    run(tmp_path, [{"person": "=1+1", "eye": "R", "date": "2026-02-01"}])
    assert all(row["person"] == "'=1+1" for row in verdicts(tmp_path))


def test_limit_sets_are_listed_with_sources(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["limit-sets"]) == 0
    told = capsys.readouterr().out
    assert "general, version" in told and "thickening.permille_SD-BM = 100" in told
    assert "from memory, check the original" in told and "Beck RW" in told


def test_the_summary_prints_shares_and_a_30_eye_day(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    run(tmp_path, GOOD, "--summary")
    told = capsys.readouterr().out
    assert "Weigh today and above" in told and "30-eye day" in told


def test_every_number_has_a_source_and_a_unit() -> None:
    for limit_set in (*map(limits.shipped, limits.shipped_names()), limits.floor()):
        for table, name, entry in limit_set.entries():
            assert entry.cite in citations() and entry.unit, f"{table}.{name}"


def test_scans_without_a_class_are_compared_only_when_that_was_declared(tmp_path: Path) -> None:
    rows = [
        {"person": "a", "eye": "R", "date": f"2026-0{month}-01", "cst_um": cst}
        for month, cst in ((1, "400"), (2, "440"))
    ]
    run(tmp_path, rows)
    last = [row for row in verdicts(tmp_path) if row["rule"] == "thickening"][-1]
    assert (last["outcome"], last["missing"]) == ("could_not_tell", "oct_class")
    run(tmp_path, rows, "--one-scanner-per-eye")
    last = [row for row in verdicts(tmp_path) if row["rule"] == "thickening"][-1]
    assert last["outcome"] == "raised"
    assert "one scanner per eye, assumed at intake" in json.loads(last["working"])["assumed"]
