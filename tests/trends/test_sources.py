"""Every number can be traced: source, citation and worked example of each rule, limit, formula."""

import io
import subprocess
import sys
import tomllib
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import pytest

import trends
from trends import limits, worked
from trends.__main__ import main
from trends.citations import citations
from trends.formulas import WORKERS, formulas
from trends.measures.check_characters import fits
from trends.parts import FROM_MEMORY
from trends.regimens import registry as regimens
from trends.rules import registry
from trends.sources import GROUPS, by_name

FOLDER = Path(trends.__file__).parent
RULES, REGIMENS = registry.by_id(), regimens.by_id()
HOW = "write trends/examples/{0}.toml; the shape stands in DEVELOPERS.md, How to add a rule"
NOT_NUMBERS = {"examples", "citations.toml"}
PARAMETERS = sorted(
    path
    for path in FOLDER.rglob("*.toml")
    if not NOT_NUMBERS & {path.name, *path.relative_to(FOLDER).parts}
)


def is_number(value: Any) -> bool:
    numbers = (
        value if isinstance(value, list) else value.values() if isinstance(value, dict) else [value]
    )
    return any(isinstance(one, int | float) and not isinstance(one, bool) for one in numbers)


def uncited(data: Mapping[str, Any], at: str = "") -> Iterator[str]:
    """Yield where a number stands in a table that cites no known source."""
    if "cite" in data:
        if data["cite"] not in citations():
            yield f"{at}: {data['cite']}"
        return
    for name, value in data.items():
        here = f"{at}.{name}".lstrip(".")
        if isinstance(value, dict):
            yield from uncited(value, here)
        elif is_number(value):
            yield here


def test_a_number_without_a_citation_is_found() -> None:
    text = "least = 5\n[iop]\nmost = { value = 3 }\n[ok]\nmost = { value = 3, cite = 'beck-2003' }"
    assert list(uncited(tomllib.loads(text))) == ["least", "iop.most.value"]
    assert list(uncited({"x": {"value": 1, "cite": "nobody"}})) == ["x: nobody"]


@pytest.mark.parametrize("path", PARAMETERS, ids=[path.name for path in PARAMETERS])
def test_every_number_of_a_parameter_file_has_a_citation(path: Path) -> None:
    assert not list(uncited(tomllib.loads(path.read_text(encoding="utf-8"))))


def test_the_files_of_numbers_are_all_looked_at() -> None:
    names = {path.name for path in PARAMETERS}
    shipped = {f"{name}.toml" for name in limits.shipped_names()}
    assert names >= shipped | {"floor.toml", "ranges.toml", "repeatability.toml", "formulas.toml"}


def test_every_citation_says_its_text_and_strength() -> None:
    assert not [key for key, one in citations().items() if not one.text or not one.strength]


@pytest.mark.parametrize("name", [*RULES, *REGIMENS])
def test_every_rule_and_regimen_has_a_source_words_and_a_worked_example(name: str) -> None:
    one = by_name()[name]
    assert one.cites and one.title and one.leans and one.needs
    assert len(one.words) > 200, "a rule opens with its words, population and two examples"
    assert one.stories, HOW.format(name)


@pytest.mark.parametrize("name", RULES)
def test_an_example_of_each_rule_is_raised_and_another_visit_is_not(name: str) -> None:
    said = {then for story in worked.stories(name) for _eye, _day, then in story.expected}
    assert "raised" in said and said - {"raised"}, HOW.format(name)


@pytest.mark.parametrize("name", [*RULES, *REGIMENS])
def test_the_engine_says_at_each_example_what_the_example_expects(name: str) -> None:
    for story in worked.stories(name):
        assert story.expected, story.title
        found = {(v.eye, v.date): v.reading or v.outcome for v in story.verdicts()}
        expected = {(eye, day): then for eye, day, then in story.expected}
        assert {at: found.get(at) for at in expected} == expected, story.title


def test_every_file_of_examples_is_about_a_rule_or_regimen() -> None:
    assert set(worked.named()) == {*RULES, *REGIMENS, worked.QUIET}
    assert worked.stories("no_such_rule") == ()


# By hand, beside each: what the formula gives for its example.
EXPECTED = {
    # 85 - 50 x 0.34 = 85 - 17
    "letters_from_logmar": ["85 − 50 × 0.3400 = 68 → 68 letters"],
    # log10(20) - log10(70) = 1.30103 - 1.84510
    "logmar_from_fraction": ["−log10(20/70) = 0.5441 logMAR"],
    # log10(40) - log10(20) = 0.30103, 0.0010 from 0.3
    "snapped_line": [
        "−log10(20/40) = 0.3010",
        "0.0010 off the line 0.3000, at most 0.0060: counted as 0.3000 logMAR",
    ],
    "letters_of_a_chart_test": ["12 at 4 m, below 20; 12 + 25 = 37"],
    "letters_from_100_based": ["83 − 15 = 68 letters"],
    # (0 + 1) / 2 = 0.5; 20 x 10^0.5 = 63.2; decimals (1.0 + 0.1) / 2 = 0.55; 20 / 0.55 = 36.4
    "mean_acuity": [
        "mean of 0.0000 (20/20) and 1.0000 (20/200) = 0.5000 logMAR = 20/63.2",
        "averaged as decimals it would read 0.55 = 20/36.4",
    ],
    # 0.18 logMAR / 0.02 a letter = 9
    "repeatability": ["70 ± 9 letters: 61 to 79"],
    # 78 + 60 / 3
    "mean_arterial_pressure": ["78 + (138 − 78) / 3 = 98.0 mmHg"],
    # 65.33 - 18
    # Differences over gaps in order of size: -3 -3 4 4.5 6.5 7.6 9 29/3 29/3 10 10.25 11 12 16 21;
    # the eighth of fifteen is 29/3 in 28 days, 29/84 = 0.3452 a day.
    "theil_sen": [
        "300, 312, 309, 330, 341, 338 µm on days 0, 28, 56, 84, 112, 140",
        "median of 15 slopes = 0.3452 µm a day = 9.7 µm in 28 days",
    ],
    # All fifteen pairs rise; of 6! = 720 orders one rises and one falls throughout.
    "mann_kendall": [
        "300, 304, 309, 315, 318, 325 µm: S = 15 − 0 = 15",
        "p = 2 of 720 orders = 0.0028",
    ],
    # 2.1 x 7 = 14.7; 0.16 x 49 = 7.84; 0.009 x 343 = 3.087
    # 138 - 18 and 78 - 18.
    "part_perfusion_pressure": ["138 − 18 = 120 mmHg", "78 − 18 = 60 mmHg"],
    "colloid_osmotic_pressure": ["C = 7.0 g/dL: 14.70 + 7.84 + 3.09 = 25.6 mmHg"],
    "perfusion_pressure": ["78 + (138 − 78) / 3 = 98.0 mmHg", "2/3 × 98.0 − 18 = 47.3 mmHg"],
}


@pytest.mark.parametrize("name", EXPECTED)
def test_a_formulas_example_comes_out_as_worked_by_hand(name: str) -> None:
    assert formulas()[name].arithmetic() == EXPECTED[name]


def test_the_check_characters_of_the_example_leave_one() -> None:
    *_steps, last = formulas()["check_characters"].arithmetic()
    code, left = last.split(" leaves ")
    # Python's own reading to base 36; 1271 is the modulus of the standard.
    assert int(code, 36) % 1271 == int(left) == 1


def test_every_formula_is_worked_and_cited() -> None:
    assert list(formulas()) == list(WORKERS)
    for one in formulas().values():
        assert one.citation.text and one.words and one.arithmetic()


def test_the_entries_are_grouped_in_order_and_hold_every_table_of_the_general_set() -> None:
    groups = list(dict.fromkeys(one.group for one in by_name().values()))
    assert groups == list(GROUPS)
    general = limits.shipped("general")
    for table, name, entry in general.entries():
        found = {one.name: one for one in by_name()[table].limits}[name]
        assert (found.value, found.citation.key, found.memory) == (
            entry.value,
            entry.cite,
            entry.memory,
        )


def test_what_another_set_holds_otherwise_stands_beside_the_general_number() -> None:
    other = by_name()["treat_and_extend"].elsewhere
    held = {(one.limit_set, one.name): one.value for one in other}
    # NCT02633852: at most four months, read as 17 weeks; the general set has 12.
    assert held["extend_by_fluid", "most_weeks"] == 17
    assert not by_name()["thickening"].elsewhere


def run(capsys: pytest.CaptureFixture[str], *given: str) -> tuple[int, str, str]:
    code = main(["sources", *given])
    told = capsys.readouterr()
    return code, told.out, told.err


def test_the_command_prints_one_rule_with_numbers_marks_and_example(
    capsys: pytest.CaptureFixture[str],
) -> None:
    code, out, _err = run(capsys, "--rule", "thickening")
    flat = " ".join(out.split())
    assert code == 0 and out.startswith("thickening: Thicker than the last comparable scan")
    assert "permille_TD = 110 per mille; source 3, abstract [" + FROM_MEMORY + "]" in flat
    assert "Source 3 Krzystolik MG et al." in flat and "Strength: measured." in flat
    # 483 - 439 = 44; 44 / 439 = 10.02 %
    assert "RAISED, rank: weigh today" in out and "(483 − 439) / 439 = +10.0 %" in out


def test_the_command_prints_everything_by_name(capsys: pytest.CaptureFixture[str]) -> None:
    code, out, _err = run(capsys)
    assert code == 0
    assert [name for name in by_name() if f"\n{name}: " not in "\n" + out] == []
    code, out, _err = run(capsys, "--names")
    assert out.split() == list(by_name())


def test_the_command_names_what_it_knows_when_asked_for_another(
    capsys: pytest.CaptureFixture[str],
) -> None:
    code, out, err = run(capsys, "--rule", "thickness")
    assert (code, out) == (2, "")
    assert err.startswith("--rule thickness: allowed: thickening, ")


def test_a_reader_that_stops_early_gets_no_complaint() -> None:
    told = subprocess.Popen(
        [sys.executable, "-m", "trends", "sources"],
        cwd=FOLDER.parent,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    assert told.stdout and told.stderr
    with told, told.stdout, told.stderr:
        assert told.stdout.readline().startswith("thickening: ")
        told.stdout.close()
        assert told.stderr.read() == ""
    assert told.returncode == 0


def test_a_closed_output_ends_the_command_without_an_error(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with (tmp_path / "out").open("w") as file:

        class Closed(io.StringIO):
            def write(self, text: str) -> int:
                raise BrokenPipeError

            def fileno(self) -> int:
                return file.fileno()

        monkeypatch.setattr(sys, "stdout", Closed())
        assert main(["sources", "--names"]) == 0
    assert (tmp_path / "out").read_text() == ""


def test_an_entry_says_whether_a_number_of_it_is_from_memory() -> None:
    known = by_name()
    # Time-domain 11 % is from memory; late is not; an applanation range is.
    assert [known[name].memory for name in ("thickening", "late", "ranges.iop_tenths")] == [
        True,
        False,
        True,
    ]


def test_a_whole_code_fits_and_a_changed_one_does_not() -> None:
    assert fits("7K2M9QXA58") and not fits("7K2M9QXA59") and not fits("7K2M9QXA5!")
