"""What ends a command that cannot be blamed on its words."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest
import typer
from typer.testing import CliRunner

from chooser.cli.boundary import Boundary, say

CHOOSER = [sys.executable, "-m", "chooser"]
FULL = Path("/dev/full")


@pytest.mark.skipif(not FULL.exists(), reason="only some systems have a device that is always full")
@pytest.mark.parametrize(
    "arguments", [["--help"], ["stock", "--help"], ["db", "where"], ["stock", "list"]], ids=" ".join
)
def test_a_full_disk_for_the_answer_is_one_sentence(tmp_path, arguments):
    db = str(tmp_path / "stock.db")
    rows = "".join(f"resistor,{number}k,5,A1,{'note ' * 20}\n" for number in range(1, 200))
    sheet = tmp_path / "parts.csv"
    sheet.write_text("kind,value,count,drawer,note\n" + rows, encoding="utf-8")
    environment = os.environ | {"CHOOSER_DB": db}
    if arguments == ["stock", "list"]:  # longer than the buffer, so that printing itself fails
        load = [*CHOOSER, "stock", "load", str(sheet)]
        subprocess.run(load, env=environment, check=True, capture_output=True)
    with FULL.open("w") as full:
        done = subprocess.run(
            [*CHOOSER, *arguments],
            env=environment,
            stdout=full,
            stderr=subprocess.PIPE,
            text=True,
            check=False,
        )
    assert done.stderr == "The answer could not be written: no space left on device.\n"
    assert done.returncode == 2


def program(fault: Exception | KeyboardInterrupt) -> typer.Typer:
    app = typer.Typer(cls=Boundary, pretty_exceptions_enable=False)

    @app.command()
    def one() -> None:
        raise fault

    @app.command()
    def other() -> None:
        pass

    return app


@pytest.mark.parametrize(
    ("fault", "status", "said"),
    [
        (KeyboardInterrupt(), 130, "Stopped.\n"),
        (ZeroDivisionError("x"), 1, "chooser itself failed (ZeroDivisionError: x)"),
        # With a name it is a file that we should have refused in a better sentence.
        (PermissionError(13, "denied", "some.file"), 1, "chooser itself failed (PermissionError"),
    ],
)
def test_each_end_has_its_sentence_and_status(fault, status, said):
    done = CliRunner().invoke(program(fault), ["one"])
    assert (done.exit_code, done.stdout) == (status, "")
    assert done.stderr.startswith(said)


def test_what_is_said_drives_no_terminal_and_keeps_its_lines(capsys):
    say("A\x1b[31m is no drawer.\nNor is B.")
    assert capsys.readouterr().err == ("A\N{REPLACEMENT CHARACTER}[31m is no drawer.\nNor is B.\n")
