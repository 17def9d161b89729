"""The result of wiring a sequence, as a value.

It stands apart from `sequencer`, which makes it, so that papers of a table need not load all that
sequences take.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from contactlogic.design import Result

if TYPE_CHECKING:
    from contactlogic.job.sequence import Timing
    from contactlogic.sequence.recovery import Recovery
    from contactlogic.sequence.steps import Expansion
    from contactlogic.sequence.transit import Transit

__all__ = ["SequencerResult"]


@dataclass(frozen=True)
class SequencerResult(Result):
    """A result with what was proved of it as a sequencer.

    Args:
        expansion: the one-relay steps.
        timing: which relays are slow.
        recoveries: of each design, in the order of `designs`.
        transits: gaps and flashes at coils while a relay moves, of each design.
        notes: what was chosen or added: relays of a pattern, step orders, memory relays.
    """

    expansion: Expansion = field(kw_only=True)
    timing: Timing = field(kw_only=True)
    recoveries: tuple[Recovery, ...] = ()
    transits: tuple[tuple[Transit, ...], ...] = ()
    notes: tuple[str, ...] = ()
