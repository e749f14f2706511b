"""Patient codes against the standard's own examples."""

import itertools
import tomllib
from pathlib import Path

import pytest

from clinic import codes

FILE = Path(__file__).parents[1] / "trends" / "reference" / "iso7064.toml"
EXAMPLES = tomllib.loads(FILE.read_text(encoding="utf-8"))["example"]


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda one: one["body"])
def test_the_standards_example_has_its_check_characters(example: dict[str, str]) -> None:
    assert example["system"] == "MOD 1271-36"
    assert codes.check_characters(example["body"]) == example["check"]
    assert codes.fits(example["body"] + example["check"])


def test_every_single_substitution_and_neighbour_swap_is_caught() -> None:
    # The pure two-character systems catch all of them (ISO/IEC 7064, clause on capabilities).
    code = codes.fresh()
    for place, letter in itertools.product(range(len(code)), codes.ALPHABET):
        wrong = code[:place] + letter + code[place + 1 :]
        assert wrong == code or not codes.fits(wrong)
    for place in range(len(code) - 1):
        wrong = code[:place] + code[place + 1] + code[place] + code[place + 2 :]
        assert wrong == code or not codes.fits(wrong)


def test_codes_hold_no_look_alikes_and_differ() -> None:
    many = {codes.fresh() for _ in range(500)}
    assert len(many) == 500
    assert not any(set(code) & set("ILOU") for code in many)


def test_look_alikes_spaces_and_small_letters_are_read_kindly() -> None:
    code = next(c for c in iter(codes.fresh, "") if "1" in c and "0" in c)
    typed = f" {code[:5].lower()}-{code[5:]} ".replace("0", "O").replace("1", "l")
    assert codes.normalise(typed) == code


@pytest.mark.parametrize("typed", ["", "ABC", "ABCDEFGH!!", "0000000000", "1234567890123"])
def test_a_mistyped_code_says_what_is_wrong(typed: str) -> None:
    with pytest.raises(codes.CodeMistyped, match="Compare it with the card"):
        codes.normalise(typed)
