"""The house keeps its own rules: guides that do not drift, files that stay small, no traces of a machine."""

import argparse
import re
import tomllib
from collections.abc import Iterator
from pathlib import Path

import pytest

import curator
from curator.cli.options import parser

_TOP = Path(__file__).parent.parent
_PACKAGE = Path(curator.__file__).parent


def _commands(top: argparse.ArgumentParser, name: str = "") -> Iterator[tuple[str, argparse.ArgumentParser]]:
    for action in top._actions:
        if isinstance(action, argparse._SubParsersAction):
            for child, command in action.choices.items():
                yield f"{name} {child}".strip(), command
                yield from _commands(command, f"{name} {child}".strip())


@pytest.mark.parametrize(("name", "command"), list(_commands(parser())), ids=lambda value: str(value)[:20])
def test_every_command_and_option_stands_in_the_readme(name: str, command: argparse.ArgumentParser) -> None:
    guide = (_TOP / "README.md").read_text()
    assert f"`{name}" in guide or name == "verdicts"
    for action in command._actions:
        for option in action.option_strings:
            assert option in guide or option in ("-h", "--help"), option


def test_every_dependency_is_justified() -> None:
    project = tomllib.loads((_TOP / "pyproject.toml").read_text())["project"]
    guide = (_TOP / "DEVELOPERS.md").read_text()
    named = project["dependencies"] + [name for extra in project["optional-dependencies"].values() for name in extra]
    for dependency in named:
        name = re.split(r"[<>=\[]", dependency)[0]
        assert f"`{name}`" in guide or name == "pairwright", name


@pytest.mark.parametrize("path", sorted(_PACKAGE.rglob("*.py")), ids=lambda path: path.stem)
def test_files_stay_small(path: Path) -> None:
    assert len(path.read_text().splitlines()) <= 400


def test_resources_come_with_the_package() -> None:
    from curator.resources import resource

    assert resource("embedders", "default-face.toml").is_file()


def test_the_recipe_in_the_readme_is_a_recipe() -> None:
    from curator.recipe import parse_recipe

    text = re.search(r"```toml\n(.*?)```", (_TOP / "README.md").read_text(), re.DOTALL)
    assert text is not None
    assert parse_recipe(text[1]).pairs.counts["train"] == 4000
