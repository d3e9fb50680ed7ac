"""Commands put together from parts: the same to Typer as if they had been written out."""

from __future__ import annotations

from typing import Annotated

import pytest
import typer
from typer.testing import CliRunner

from chooser.cli.app import app
from chooser.cli.composing import REQUIRED, Parameter, composed
from chooser.cli.families import FAMILIES

SIZE = Parameter("size", Annotated[int, typer.Option("--size", metavar="N", help="How big.")], 3)
LOUD = Parameter(
    "loud", Annotated[bool, typer.Option("--loud", help="Say it loudly.")], default=False
)
NAME = Parameter("name", Annotated[str, typer.Argument(metavar="NAME", help="Whose.")], REQUIRED)
TAGS = Parameter("tags", Annotated[list[str] | None, typer.Option("--tag", help="Words.")])


def program(*parameters, text="Do it.\n\nExample: program do it"):
    """A program of one composed command, and what that was last called with."""
    seen = {}
    made = typer.Typer(rich_markup_mode=None)
    made.command("do")(composed(seen.update, parameters, text))
    made.callback()(lambda: None)
    return made, seen


def run(made, *words):
    return CliRunner().invoke(made, ["do", *words])


def test_all_options_arrive_by_name_with_their_defaults():
    made, seen = program(NAME, SIZE, LOUD, TAGS)
    assert run(made, "boat").exit_code == 0
    assert seen == {"name": "boat", "size": 3, "loud": False, "tags": None}
    assert run(made, "boat", "--size", "7", "--loud", "--tag", "a", "--tag", "b").exit_code == 0
    assert seen == {"name": "boat", "size": 7, "loud": True, "tags": ["a", "b"]}


def test_types_are_checked_and_what_must_be_given_must_be():
    made, seen = program(NAME, SIZE)
    assert run(made).exit_code == 2
    assert run(made, "boat", "--size", "big").exit_code == 2
    assert run(made, "boat", "--loud").exit_code == 2
    assert seen == {}


def test_the_help_has_the_text_and_every_option_in_order():
    made, _ = program(NAME, SIZE, LOUD)
    out = run(made, "--help").stdout
    assert "Do it." in out
    assert "Example: program do it" in out
    places = [out.index(word) for word in ("NAME", "--size", "--loud")]
    assert places == sorted(places)
    assert "How big." in out


def test_two_commands_of_one_parameter_share_nothing():
    first, seen_first = program(SIZE)
    second, seen_second = program(SIZE)
    run(first, "--size", "5")
    run(second)
    assert (seen_first, seen_second) == ({"size": 5}, {"size": 3})


@pytest.mark.parametrize("group", ["fit", "check"])
@pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.name)
def test_every_family_has_both_commands_with_help_and_example(group, family):
    done = CliRunner().invoke(app, [group, family.name, "--help"])
    assert done.exit_code == 0
    example = family.fit if group == "fit" else family.check
    assert f"Example: chooser {group} {example}" in " ".join(done.stdout.split())
    for parameter in (*family.wishes, *family.device):
        declared = parameter.kind.__metadata__[0]
        # Where the type is annotated, the first word given is the option's name.
        assert (declared.param_decls or (declared.default,))[0] in done.stdout
    if group == "check":
        for slot in family.slots:
            assert f"--{slot} " in done.stdout


def test_no_two_options_of_a_family_have_one_name():
    for family in FAMILIES:
        names = [parameter.name for parameter in (*family.wishes, *family.device)]
        assert len(set(names)) == len(names), family.name
    assert len({family.name for family in FAMILIES}) == len(FAMILIES)
