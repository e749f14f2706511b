"""The file of rendered verdicts equals what the engine says now, and each verdict is whole."""

import re
from pathlib import Path

import pytest

from trends.__main__ import main
from trends.parts import EMERGENCY, PARTS, nine_parts
from trends.printed import quiet
from trends.regimens import registry as regimens
from trends.reviewable import verdict_file
from trends.rules import registry
from trends.wording import VerdictRow
from trends.worked import QUIET, stories

FILE = Path(__file__).parents[2] / "fixtures" / "verdicts.txt"
RULES, REGIMENS = registry.by_id(), regimens.by_id()
# Alarms and pressures at the top level show the clinic's own text in place of options.
EMERGENCIES = {"off_chart_step", "pressure", "alarm_symptoms", "pressure_after"}
NO_CHANGE = re.compile(r"no change|look again")


def raised(name: str) -> list[VerdictRow]:
    return [one for story in stories(name) for one in story.verdicts() if one.outcome == "raised"]


def test_the_file_is_what_the_engine_renders_now() -> None:
    told = "run: python -m trends sources --verdicts fixtures/verdicts.txt, and read the difference"
    assert FILE.read_text(encoding="utf-8") == verdict_file(), told


def test_the_command_writes_the_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["sources", "--verdicts", str(tmp_path / "v.txt")]) == 0
    assert (tmp_path / "v.txt").read_text(encoding="utf-8") == verdict_file()
    assert main(["sources", "--verdicts", str(tmp_path / "no" / "v.txt")]) == 2
    assert "can't be written" in capsys.readouterr().err


def test_forty_verdicts_or_more_stand_whole_and_every_outcome_occurs() -> None:
    text = FILE.read_text(encoding="utf-8")
    assert text.count(f"  {PARTS[0]} ") >= 40
    for outcome in ("RAISED", "still", "couldn't tell", "limit not reached", "doesn't apply"):
        assert re.search(rf"(·|:) {outcome}", text), outcome


@pytest.mark.parametrize("name", [*RULES, *REGIMENS])
def test_every_rule_and_regimen_has_a_whole_verdict_in_the_file(name: str) -> None:
    text = FILE.read_text(encoding="utf-8")
    shown = re.search(rf"\n{name} · (Right|Left) eye · .*\n  1 Fact ", text)
    assert shown and (name in REGIMENS or f"\n{name} · " in text and raised(name))


@pytest.mark.parametrize("name", RULES)
def test_each_raised_one_has_all_nine_parts_and_options_or_the_emergency_text(name: str) -> None:
    for one in raised(name):
        found = one.working
        assert found is not None
        weighed = EMERGENCY if found["emergency"] else PARTS[7]
        parts = nine_parts(found)
        assert [part.label for part in parts] == [*PARTS[:7], weighed, PARTS[8]]
        assert all(line.strip() for part in parts for line in part.lines)
        assert all(part.lines for part in parts)
        assert found["values"] and found["source"] and found["noise"] and found["not_for"]
        assert found["rule"]["limit"]
        if found["emergency"]:
            assert name in EMERGENCIES and one.rank == "raise_first" and not found["options"]
        else:
            assert len(found["options"]) >= 2, one
            assert any(NO_CHANGE.search(option) for option in found["options"]), one


@pytest.mark.parametrize("name", REGIMENS)
def test_each_reading_has_all_nine_parts_and_options(name: str) -> None:
    for story in stories(name):
        for one in story.verdicts():
            assert one.working is not None and len(one.working["options"]) >= 2
            assert one.working["source"] and one.working["arithmetic"] and one.working["not_for"]


def test_nothing_raised_names_every_rule_once_and_why_one_could_not_tell() -> None:
    for story in stories(QUIET):
        text = " ".join(" ".join(quiet(story.verdicts())).split())
        assert text.startswith("Nothing raised. That isn't a finding that all is well")
        assert "clear" not in text.lower()
        lines = [line.strip() for line in quiet(story.verdicts())]
        for name, module in RULES.items():
            title = module.INFO.title
            assert any(title in line or name == line for line in lines), title
    assert "Intraocular" not in text and "IOP" in text
    assert re.search(r"Pressure: missing or not comparable: IOP", text)


def test_a_visit_at_which_something_is_raised_is_not_shown_as_quiet() -> None:
    with pytest.raises(ValueError, match="raised"):
        quiet(raised("thickening"))


def test_no_verdict_gives_an_order_or_a_promise() -> None:
    text = FILE.read_text(encoding="utf-8").lower()
    for word in ("inject now", "must ", "you should", "all clear", "all-clear", "safe to"):
        assert word not in text, word
