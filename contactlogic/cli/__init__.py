"""The command line: a thin skin that parses, calls and prints.

`main` is the installed command.  Nothing heavy is imported until a command needs it.
"""

from __future__ import annotations

__all__ = ["main"]


def main() -> None:
    """The installed command `contactlogic`."""
    try:
        from contactlogic.cli.app import run

        run()
    except KeyboardInterrupt:  # while still starting; a running command says more (`status`)
        raise SystemExit(130) from None
