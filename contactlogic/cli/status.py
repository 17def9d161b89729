"""Exit statuses, and what is said on the way out when something goes wrong.

0    done
1    done, and the answer is no: a design verified is wrong
2    what the user gave cannot be used; nothing was written
3    contactlogic's own fault; no design is given out
130  stopped by Ctrl-C; what a search had found by then was written
"""

from __future__ import annotations

import contextlib
import os
import sys
from collections.abc import Iterator
from enum import IntEnum

import typer

from contactlogic.errors import InputError

__all__ = ["Status", "guarded"]


class Status(IntEnum):
    """Exit statuses of the command."""

    DONE = 0
    WRONG = 1
    INPUT = 2
    INTERNAL = 3
    STOPPED = 130


@contextlib.contextmanager
def guarded(*, keep: str, trace: bool = False) -> Iterator[None]:
    """Turn exceptions into a message of a few lines and an exit status.

    Args:
        keep: the file to keep for a fault report.
        trace: show where an internal fault arose (without the values of variables).
    """
    try:
        yield
        sys.stdout.flush()
    except typer.Exit:
        raise
    except InputError as error:
        _say(str(error))
        raise typer.Exit(Status.INPUT) from None
    except KeyboardInterrupt:
        _say("stopped")
        raise typer.Exit(Status.STOPPED) from None
    except BrokenPipeError:
        # Whoever read standard output has closed it; Python's own flush at exit must not fail.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        raise typer.Exit(Status.DONE) from None
    except Exception as error:
        if trace:
            import traceback

            traceback.print_exc()
        _say(
            f"internal fault, no design is given out: {type(error).__name__}: {error}\n"
            f"  please keep {keep} and report this; it is contactlogic's fault, not the job's"
        )
        raise typer.Exit(Status.INTERNAL) from None


def _say(message: str) -> None:
    with contextlib.suppress(OSError):
        print(f"contactlogic: {message}", file=sys.stderr)
