"""The one place where an error becomes a sentence on stderr and an exit status."""

from __future__ import annotations

import os
import sys
from typing import Any

import typer
from typer.core import TyperGroup

from chooser.cli.tables import visible
from chooser.errors import ChooserError, Exit


class Boundary(TyperGroup):
    """A command group whose errors end as one plain sentence; set on the top group only."""

    def main(self, *args: Any, **extra: Any) -> Any:
        """Run the program; what is printed before any command, as by --help, may fail too."""
        try:
            try:
                return super().main(*args, **extra)
            finally:
                _flush()
        except BrokenPipeError:
            _leave_stdout()
            sys.exit(int(Exit.ANSWERED))
        except OSError as error:
            _say_unwritten(error)
            sys.exit(int(Exit.BAD_INPUT))

    def invoke(self, ctx: Any) -> Any:
        """Run the command; turn what it raises into a message and a status."""
        try:
            try:
                return super().invoke(ctx)
            finally:
                _flush()  # here, where a full disk can still be told of, and not at exit
        except ChooserError as error:
            say(str(error))
            raise typer.Exit(int(error.status)) from None
        except BrokenPipeError:
            # The reader (head, less) went away: not our business, and no second complaint at exit.
            _leave_stdout()
            raise typer.Exit(int(Exit.ANSWERED)) from None
        except KeyboardInterrupt:
            say("Stopped.")
            raise typer.Exit(130) from None
        except typer.Exit:
            raise
        except Exception as error:  # the last net: a fault of ours is said as one sentence too
            if isinstance(error, OSError) and error.filename is None:
                _say_unwritten(error)
                raise typer.Exit(int(Exit.BAD_INPUT)) from None
            if os.environ.get("CHOOSER_DEBUG") or _is_usage(error):
                raise
            say(
                f"chooser itself failed ({type(error).__name__}: {error}); please report it. "
                "Set CHOOSER_DEBUG=1 to see where."
            )
            raise typer.Exit(int(Exit.OUR_FAULT)) from None


def say(text: str) -> None:
    """Talk to the person, on stderr; what others wrote cannot drive the terminal."""
    print("\n".join(map(visible, text.split("\n"))), file=sys.stderr)  # noqa: T201


def _flush() -> None:
    if sys.stdout is not None:
        sys.stdout.flush()


def _leave_stdout() -> None:
    """Throw away what could not be written, so that nobody tries again at exit."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, sys.stdout.fileno())
    os.close(nowhere)


def _say_unwritten(error: OSError) -> None:
    """Say that stdout failed: an error without a file name comes from nothing we opened."""
    _leave_stdout()
    reason = error.strerror or str(error)
    say(f"The answer could not be written: {reason[:1].lower()}{reason[1:]}.")


def _is_usage(error: Exception) -> bool:
    """Tell whether typer itself raised this to show its usage message."""
    return type(error).__module__.startswith("typer.")
