"""Every command says what it does, shows an example that it would take, and fits a terminal."""

import re
import shlex

import click
import pytest
from click.testing import CliRunner

from bandbook.cli import COMMANDS, main

ALL = pytest.mark.parametrize("command", COMMANDS, ids=lambda command: str(command.name))


def shown(*arguments: str) -> str:
    done = CliRunner().invoke(main, [*arguments, "--help"])
    assert done.exit_code == 0
    return done.output


@ALL
def test_help_says_what_a_command_does_and_shows_an_example(command: click.Command) -> None:
    text = shown(str(command.name))
    assert max(map(len, text.splitlines())) <= 100
    _, found, after = text.partition("Example:\n")
    assert found
    assert re.match(rf" +bandbook {command.name}\b", after)


@ALL
def test_the_examples_are_calls_that_the_command_takes(command: click.Command) -> None:
    """Only what is given is read; nothing is called."""
    examples = [shlex.split(line) for line in shown(str(command.name)).splitlines() if re.match(r" +bandbook ", line)]
    own = [words[2:] for words in examples if words[1] == command.name]
    assert own
    for arguments in own:
        with command.make_context(str(command.name), arguments) as context:
            assert context.params


@ALL
def test_every_option_is_explained(command: click.Command) -> None:
    options = [one for one in command.params if isinstance(one, click.Option)]
    assert [one.name for one in options if not one.help] == []


def test_help_lists_every_command() -> None:
    text = shown()
    assert [str(one.name) for one in COMMANDS if not re.search(rf"^  {one.name} ", text, flags=re.MULTILINE)] == []
