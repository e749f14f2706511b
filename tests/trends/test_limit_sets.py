"""A limit set that rules couldn't run with, or whose numbers nobody can check, is refused."""

import hashlib
import tomllib

import pytest

from trends import limit_texts
from trends.errors import LimitSetRefused
from trends.limits import RANK_NAMES, LimitSet, floor, shipped, shipped_names
from trends.verdict import RANKS

GENERAL = shipped("general").text
RANK = 'rank = { value = "weigh_today", unit = "rank", cite = "site-choice" }'


def head(causes: str = '["diabetic"]') -> str:
    return f'name = "own"\nversion = "1"\ntitle = "Own"\ncauses = {causes}\n'


@pytest.mark.parametrize(
    "text,told",
    [
        ("name = ", "TOML text"),
        ('name = "own"\nversion = "1"\ntitle = "Own"\n', "causes"),
        (head('["edema"]'), "branch_vein"),
        (head() + "[rules.thickness]\n", "thickening"),
        (head() + "[regimens.often]\n", "treat_and_extend"),
        (head() + "[rules.fluid_back]\nrank = 2\n", "a table with value, unit and cite"),
        (head() + '[rules.fluid_back]\nrank = { value = 1.5, cite = "site-choice" }\n', "a word"),
        (
            head() + '[rules.fluid_back]\nrank = { value = "weigh_today", cite = "x" }\n',
            "citations",
        ),
        (head() + '[rules.fluid_back]\nrank = { value = 2, cite = "site-choice" }\n', "such as"),
        (
            head() + '[rules.fluid_back]\nrank = { value = "urgent", cite = "site-choice" }\n',
            "raise_first, weigh_today, keep_in_mind",
        ),
        (
            head() + f'[rules.late]\n{RANK}\ndays = {{ value = -1, cite = "site-choice" }}\n',
            "0 or more",
        ),
        (head() + f"[rules.late]\n{RANK}\n", "late.days"),
        (
            head() + f'[rules.fluid_back]\n{RANK}\nday = {{ value = 1, cite = "site-choice" }}\n',
            "fluid_back.day",
        ),
    ],
)
def test_a_set_that_cannot_be_run_or_checked_is_refused(text: str, told: str) -> None:
    with pytest.raises(LimitSetRefused) as refused:
        LimitSet.from_toml(text)
    assert told in str(refused.value) and "nothing was adopted" in str(refused.value)


def test_a_rule_left_out_is_off_and_a_class_may_be_a_site_choice() -> None:
    own = LimitSet.from_toml(
        head()
        + f"[rules.thickening]\n{RANK}\n"
        + 'permille_SS = { value = 100, unit = "per mille", cite = "site-choice" }\n'
        + 'um_SS = { value = 20, unit = "µm", cite = "site-choice" }\n'
    )
    assert own.rule("fluid_back") is None
    table = own.rule("thickening")
    assert table is not None and table.get("um_SS") == 20 and table.get("um_TD") is None
    with pytest.raises(LimitSetRefused):
        table.number("rank")


def test_the_shipped_sets_hold_to_the_shape_and_an_unknown_name_is_refused() -> None:
    for name in shipped_names():
        assert LimitSet.from_toml(shipped(name).text).digest == shipped(name).digest
    with pytest.raises(LimitSetRefused, match="general"):
        shipped("none")


def test_line_ends_of_another_system_give_the_same_digest() -> None:
    other = LimitSet.from_toml(GENERAL.replace("\n", "\r\n"))
    assert other.digest == shipped("general").digest


def test_ranks_of_a_set_are_the_ranks_of_a_verdict() -> None:
    assert set(RANK_NAMES) == set(RANKS)
    assert floor().name == "floor"


def test_a_set_that_builds_on_another_is_stored_whole() -> None:
    general = shipped("general")
    for name in set(shipped_names()) - {"general"}:
        own = shipped(name)
        assert "builds_on" not in own.text and own.name == name
        assert set(own.rules) >= set(general.rules)
        assert own.regimens and set(own.regimens) <= set(general.regimens)


def test_what_a_form_states_wins_and_what_it_leaves_out_is_the_base_s() -> None:
    early, late = shipped("protocol_i"), shipped("protocol_t")
    first, second = (one.regimens["as_needed_stability"] for one in (early, late))
    # Protocol I gives four doses and asks for letters or thickness; protocol T six, and for both.
    assert (first["loading"], first["success_joined_by"]) == (4, "or")
    assert (second["loading"], second["success_joined_by"]) == (6, "and")
    assert first["letters"] == second["letters"] == 5


def test_written_out_and_read_again_a_set_has_the_same_entries() -> None:
    general = shipped("general")
    again = LimitSet.from_toml(limit_texts.render(tomllib.loads(general.text)))
    assert list(again.entries()) == list(general.entries()) and again.causes == general.causes


def test_a_set_stored_by_an_earlier_version_keeps_its_numbers_and_its_digest() -> None:
    # As if "note_below_days" of too_soon and the rule poor_scan had been added after adoption.
    lines = GENERAL.splitlines()
    start = lines.index("[rules.poor_scan]")
    end = next(n for n in range(start + 1, len(lines)) if lines[n].startswith("["))
    kept = [line for line in lines[:start] + lines[end:] if "note_below_days" not in line]
    early = "\n".join(kept).replace("below_days = { value = 21", "below_days = { value = 25") + "\n"
    with pytest.raises(LimitSetRefused, match="note_below_days"):
        LimitSet.from_toml(early)
    stored = LimitSet.from_stored(early)
    table = stored.rules["too_soon"]
    assert (table["below_days"], table["note_below_days"]) == (25, 28)
    assert "later version" in table.entries["note_below_days"].note
    assert stored.rule("poor_scan") is None
    assert stored.text == early and stored.digest == hashlib.sha256(early.encode()).hexdigest()
