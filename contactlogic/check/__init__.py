"""Row-by-row proof of finished contact networks.

Nothing here is shared with what builds networks: the proof reads poles and walks them by its
own code, so that one mistake cannot hide in both (design.md sections 2 and 3).
"""

from contactlogic.check.proof import Backfeed, NotSeriesParallel, Proof, WrongRow
from contactlogic.check.prove import prove, verify

__all__ = ["Backfeed", "NotSeriesParallel", "Proof", "WrongRow", "prove", "verify"]
