"""The key file: who is who stays outside, readable by its owner only."""

import os
from pathlib import Path

import pytest

from clinic.exchange.intake.keys import prepare_keys, read_keys, settle_keys
from clinic.exchange.intake.refused import IntakeRefused


def test_keys_come_back_as_written_and_are_the_owners_only(tmp_path: Path) -> None:
    path = tmp_path / "keys" / "who.csv"
    keys = {"A,1": "CODE1", 'B"2': "CODE2"}
    prepare_keys(path, keys)
    assert not path.exists()
    settle_keys(path)
    assert read_keys(path) == keys
    assert path.stat().st_mode & 0o777 == 0o600
    assert list(path.parent.iterdir()) == [path]


def test_a_key_file_that_others_may_read_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "who.csv"
    prepare_keys(path, {"A": "X"})
    settle_keys(path)
    os.chmod(path, 0o644)
    with pytest.raises(IntakeRefused, match="owner only"):
        read_keys(path)


@pytest.mark.parametrize(
    "text", ["a,b\nA,X\n", "source_id,code\nA\n", "source_id,code\nA,X\nA,Y\n", ""]
)
def test_anything_but_a_key_file_is_refused(tmp_path: Path, text: str) -> None:
    path = tmp_path / "who.csv"
    path.write_text(text)
    path.chmod(0o600)
    with pytest.raises(IntakeRefused, match="key file"):
        read_keys(path)
