"""A limit set that rules couldn't run with, or whose numbers nobody can check, is refused."""

import pytest

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
