"""What options take that are one of a few words."""

from __future__ import annotations

from enum import StrEnum

__all__ = ["Form", "Forms", "Moves"]


class Forms(StrEnum):
    """What `--form` takes."""

    ladder = "ladder"
    bridge = "bridge"
    both = "both"


class Form(StrEnum):
    """What `--form` takes where one is meant."""

    ladder = "ladder"
    bridge = "bridge"


class Moves(StrEnum):
    """What `--moves` takes."""

    single = "single"
    together = "together"
