"""Files in and out of ``python -m trends``: shapes that would shift or lose cells are refused."""

from pathlib import Path

import pytest

from trends.__main__ import SHOWN_CELLS, main

HEADER = "person,eye,date,cst_um,oct_class\n"


def run(folder: Path, text: str, *, as_of: str = "2026-03-01", out: str = "o.csv") -> int:
    path = folder / "visits.csv"
    path.write_text(text, encoding="utf-8")
    given = ["review", str(path), "--limit-set", "general", "--as-of", as_of]
    return main([*given, "--out", str(folder / out)])


@pytest.mark.parametrize(
    "lines",
    [
        "a,R,2026-01-01,400,SD-BM,9\n",
        "a,R,2026-01-01,400,SD-BM\na,R,2026-02-01,400,SD-BM,9\n",
    ],
    ids=["first line", "later line"],
)
def test_a_line_longer_than_the_header_is_refused(
    lines: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(tmp_path, HEADER + lines) == 2
    assert "visits.csv" in capsys.readouterr().err
    assert not (tmp_path / "o.csv").exists()


def test_verdicts_never_replace_the_visits(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    text = HEADER + "a,R,2026-01-01,400,SD-BM\n"
    assert run(tmp_path, text, out="visits.csv") == 2
    assert (tmp_path / "visits.csv").read_text(encoding="utf-8") == text
    assert "can't replace" in capsys.readouterr().err


@pytest.mark.parametrize("as_of", ["20260301", "2026-W09-7", "2026-3-1", "1.3.2026"])
def test_the_day_asked_is_written_one_way(as_of: str, tmp_path: Path) -> None:
    with pytest.raises(SystemExit) as stopped:
        run(tmp_path, HEADER, as_of=as_of)
    assert stopped.value.code == 2


def test_a_long_list_of_refused_cells_ends_with_how_many_more(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    lines = "".join(f"p{number},R,2026-01-01,9999,SD-BM\n" for number in range(SHOWN_CELLS + 3))
    assert run(tmp_path, HEADER + lines) == 2
    told = capsys.readouterr().err.splitlines()
    assert len(told) == SHOWN_CELLS + 1 and told[-1] == "and 3 more refused cells"


def test_a_missing_file_and_a_folder_that_is_not_there_are_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    given = ["--limit-set", "general", "--as-of", "2026-03-01", "--out"]
    assert main(["review", str(tmp_path / "none.csv"), *given, str(tmp_path / "o.csv")]) == 2
    assert "none.csv" in capsys.readouterr().err
    assert run(tmp_path, HEADER + "a,R,2026-01-01,400,SD-BM\n", out="none/o.csv") == 2
    assert "can't be written" in capsys.readouterr().err


def test_a_file_without_rows_or_with_a_doubled_column_is_refused(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(tmp_path, HEADER) == 2
    assert "no visit" in capsys.readouterr().err
    assert run(tmp_path, "person,eye,date,date\na,R,2026-01-01,2026-01-01\n") == 2
    assert "date.1" in capsys.readouterr().err


def test_limit_sets_can_be_listed_by_name_alone(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["limit-sets", "--brief"]) == 0
    assert capsys.readouterr().out.splitlines()[0].startswith("general, version")
