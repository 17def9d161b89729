"""Every exception contactlogic raises on purpose, as one tree.

    ContactLogicError
    ├── InputError                 what the user gave cannot be used (exit status 2)
    │   ├── JobError               a job file, its tables and its formulas
    │   │   ├── JobFileError       missing, unreadable, not TOML, unknown keys, wrong types
    │   │   ├── TableError         rows: ragged, illegal cell, contradicting, missing
    │   │   ├── FormulaError       switching algebra that does not parse or names no relay
    │   │   └── LimitError         too many inputs, a pole budget that cannot be met
    │   ├── DesignFileError        a design.json that does not keep the contract
    │   ├── WiringError            a list of wires that cannot be traced
    │   ├── PartsError             a parts list that cannot be used, or does not hold what is needed
    │   └── OutputError            a folder that cannot or must not be written
    ├── NotALadder                 a network that cannot be drawn as a ladder
    ├── RenderError                the renderer failed
    │   └── RendererMissing        no renderer is installed
    └── InternalError              contactlogic broke its own promise; no design is given out
        └── ProofFailed            a finished network failed its own proof

Messages say where, what, what was expected and what to do, in a few lines and without a
traceback.  `InputError.__str__` builds that text from the parts, so that every message looks alike.
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = [
    "ContactLogicError",
    "DesignFileError",
    "FormulaError",
    "InputError",
    "InternalError",
    "JobError",
    "JobFileError",
    "LimitError",
    "NotALadder",
    "OutputError",
    "PartsError",
    "Place",
    "ProofFailed",
    "RenderError",
    "RendererMissing",
    "TableError",
    "WiringError",
]


@dataclass(frozen=True)
class Place:
    """Where in the user's files something stands.

    `line` is the text shown above the caret, `column` the 0-based character the caret points at,
    `width` how many characters it underlines.  `row` is what the user would call it: "row 3",
    "line 12", "sheet Table, row 4".
    """

    file: str | None = None
    section: str | None = None
    row: str | None = None
    line: str | None = None
    column: int | None = None
    width: int = 1

    def heading(self) -> str:
        """File, section and row on one line, without what is not known."""
        section = f"[{self.section}]" if self.section else None
        return ", ".join(part for part in (self.file, section, self.row) if part)

    def caret(self) -> list[str]:
        """The offending text with a caret under it, or nothing."""
        if self.line is None:
            return []
        # a terminal acts on control characters, and the caret needs one column for each
        text = "".join(c if c.isprintable() else " " for c in self.line)
        start = self.column or 0
        if len(text) > 100:  # a window round the caret keeps very long lines readable
            cut = max(0, min(start - 40, len(text) - 100))
            text, start = text[cut : cut + 100], start - cut
        shown = ["    " + text]
        if self.column is not None:
            shown.append("    " + " " * start + "^" * max(1, min(self.width, len(text) - start)))
        return shown


class ContactLogicError(Exception):
    """Base of everything contactlogic raises on purpose."""


class InputError(ContactLogicError):
    """Something the user gave cannot be used.

    Args:
        what: one sentence, what is wrong.
        place: where it stands.
        expected: what would have been right ("0, 1 or -").
        hint: what to do ("did you mean UP?").
    """

    def __init__(
        self,
        what: str,
        *,
        place: Place | None = None,
        expected: str | None = None,
        hint: str | None = None,
    ) -> None:
        super().__init__(what)
        self.what = what
        self.place = place or Place()
        self.expected = expected
        self.hint = hint

    def __str__(self) -> str:
        heading = self.place.heading()
        lines = [f"{heading}: {self.what}" if heading else self.what, *self.place.caret()]
        if self.expected:
            lines.append(f"  expected: {self.expected}")
        if self.hint:
            lines.append(f"  {self.hint}")
        return "\n".join(lines)


class JobError(InputError):
    """A job file that cannot be used."""


class JobFileError(JobError):
    """Missing, unreadable, not TOML, unknown keys or wrong types."""


class TableError(JobError):
    """Rows that are ragged, contradict each other, are missing or hold an illegal cell."""


class FormulaError(JobError):
    """Switching algebra that does not parse or names no known relay."""


class LimitError(JobError):
    """More inputs than can be proved, or a budget that cannot be met."""


class DesignFileError(InputError):
    """A design file that does not keep the `contactlogic/design/1` contract."""


class WiringError(InputError):
    """A list of wires that cannot be traced: a line, a terminal or a rail that is not clear."""


class PartsError(InputError):
    """A parts list that cannot be used, or from which what is needed cannot be bought."""


class OutputError(InputError):
    """An output folder that cannot be written, or holds other files."""


class NotALadder(ContactLogicError):
    """A network that does not keep the ladder definition, so that it has no ladder drawing."""


class RenderError(ContactLogicError):
    """The drawing's text was made but no renderer could turn it into a picture."""


class RendererMissing(RenderError):
    """No renderer is installed; the drawing's text can still be kept."""


class InternalError(ContactLogicError):
    """contactlogic broke its own promise.  Nothing is given out."""


class ProofFailed(InternalError):
    """A finished network failed its own proof."""
