"""The command line: a thin skin that parses, calls and prints.

`main` is the installed command.  Nothing heavy is imported until a command needs it.
"""

from __future__ import annotations

from contactlogic.cli.app import app, main

__all__ = ["app", "main"]
