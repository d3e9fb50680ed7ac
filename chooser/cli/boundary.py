"""The one place where an error becomes a sentence on stderr and an exit status."""

from __future__ import annotations

import os
import sys
from typing import Any

import typer
from typer.core import TyperGroup

from chooser.errors import ChooserError, Exit


class Boundary(TyperGroup):
    """A command group whose errors end as one plain sentence; set on the top group only."""

    def invoke(self, ctx: Any) -> Any:
        """Run the command; turn what it raises into a message and a status."""
        try:
            return super().invoke(ctx)
        except ChooserError as error:
            say(str(error))
            raise typer.Exit(int(error.status)) from None
        except BrokenPipeError:
            # The reader (head, less) went away: not our business, and no second complaint at exit.
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
            raise typer.Exit(int(Exit.ANSWERED)) from None
        except KeyboardInterrupt:
            say("Stopped; nothing was changed.")
            raise typer.Exit(130) from None
        except typer.Exit:
            raise
        except Exception as error:  # the last net: a fault of ours is said as one sentence too
            if os.environ.get("CHOOSER_DEBUG") or _is_usage(error):
                raise
            say(
                f"chooser itself failed ({type(error).__name__}: {error}); please report it. "
                "Set CHOOSER_DEBUG=1 to see where."
            )
            raise typer.Exit(int(Exit.OUR_FAULT)) from None


def say(text: str) -> None:
    """Talk to the person, on stderr."""
    print(text, file=sys.stderr)  # noqa: T201


def _is_usage(error: Exception) -> bool:
    """Tell whether typer itself raised this to show its usage message."""
    return type(error).__module__.startswith("typer.")
