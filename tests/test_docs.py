"""What exists stands in the documents: rules, regimens, sets, commands, settings, version."""

import re
from pathlib import Path

import pytest

import clinic
from clinic.notice import NOTICE
from trends import ENGINE_VERSION, limits
from trends.regimens import registry as regimens
from trends.rules import registry as rules

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
GUIDE = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
COMMANDS = sorted(
    path.stem
    for path in (ROOT / "clinic" / "management" / "commands").glob("*.py")
    if path.stem != "__init__"
)


@pytest.mark.parametrize("name", [*rules.by_id(), *regimens.by_id(), *limits.shipped_names()])
def test_every_rule_regimen_and_set_stands_in_the_readme(name: str) -> None:
    assert f"`{name}`" in README


@pytest.mark.parametrize("command", [*COMMANDS, "test"])
def test_every_command_stands_in_the_readme(command: str) -> None:
    assert re.search(rf"manage\.py {command}\b", README)


def test_every_setting_of_the_environment_stands_in_the_readme() -> None:
    code = "".join(
        path.read_text(encoding="utf-8")
        for path in (ROOT / "clinic/local.py", ROOT / "clinic/settings.py", ROOT / "manage.py")
    )
    names = set(re.findall(r'"(EBBLINE_[A-Z_]+|DATABASE_URL)"', code)) - {"EBBLINE_INSIDE_VENV"}
    assert names
    assert not [name for name in names if name not in README]
    example = (ROOT / ".env.example").read_text(encoding="utf-8")
    assert not [name for name in names if name not in example]


def test_the_notice_stands_in_the_readme() -> None:
    flat = re.sub(r"[\s>*]+", " ", README)
    assert NOTICE in flat


def test_the_version_is_the_top_of_the_changes() -> None:
    top = re.search(r"## Changes\s+### ([\d.]+)", README)
    assert top and top[1] == clinic.__version__ == ENGINE_VERSION
    assert f'version = "{clinic.__version__}"' in (ROOT / "pyproject.toml").read_text()


def test_every_package_of_the_code_stands_on_the_contributors_map() -> None:
    for folder in ("trends", "clinic"):
        for path in sorted((ROOT / folder).iterdir()):
            shown = path.is_dir() and path.name not in {"__pycache__", "migrations"}
            if shown:
                assert f"{path.name}/" in GUIDE, path


def test_pictures_of_the_tour_exist() -> None:
    pictures = re.findall(r"!\[[^\]]+\]\(([^)]+)\)", README)
    assert pictures and all((ROOT / picture).exists() for picture in pictures)
