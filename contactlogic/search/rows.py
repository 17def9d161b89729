"""Many rows at once: do the poles of a candidate do what the rows ask?

Bit `r` of every integer stands for row `r` of a list.  Reached rows are propagated from net to
net until nothing changes, over poles and over what the outside joins.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from contactlogic.search.encoding import Ends, Row

__all__ = ["Rows", "merged"]


def merged(rows: Iterable[Row]) -> tuple[Row, ...]:
    """Rows of one setting, joining and source taken together; rows that ask for nothing left out.

    Order of first appearance is kept.
    """
    groups: dict[tuple[int, tuple[int, ...], int], list[Row]] = {}
    for row in rows:
        groups.setdefault((row.setting, row.node, row.source), []).append(row)
    found = []
    for (setting, node, source), group in groups.items():
        on = sorted({load for row in group for load in row.on} - {source})
        off = sorted({load for row in group for load in row.off})
        apart = sorted({pair for row in group for pair in row.apart if pair[0] != source})
        if on or off or apart:
            found.append(Row(setting, node, source, tuple(on), tuple(off), tuple(apart)))
    return tuple(found)


class Rows:
    """Rows prepared for checking candidates.

    Args:
        rows: all over the same fixed nets.
        relays: number of relays.
    """

    def __init__(self, rows: Sequence[Row], relays: int) -> None:
        self.rows = tuple(rows)
        self._full = (1 << len(rows)) - 1
        self._operated = [
            sum((row.setting >> i & 1) << r for r, row in enumerate(rows)) for i in range(relays)
        ]
        fixed = len(rows[0].node) if rows else 0
        self._fixed = fixed
        self._joins = [
            (net, other, mask)
            for net in range(fixed)
            for other in range(net)
            if (mask := sum((row.node[net] == other) << r for r, row in enumerate(rows)))
        ]
        self._source = [
            sum((row.node[net] == row.source) << r for r, row in enumerate(rows))
            for net in range(fixed)
        ]
        self._on = [sum((net in row.on) << r for r, row in enumerate(rows)) for net in range(fixed)]
        self._off = [
            sum((net in row.off) << r for r, row in enumerate(rows)) for net in range(fixed)
        ]
        self._apart: dict[int, dict[int, int]] = {}
        for r, row in enumerate(rows):
            for load, other in row.apart:
                others = self._apart.setdefault(load, {})
                others[other] = others.get(other, 0) | 1 << r

    def wrong(self, poles: Iterable[Ends]) -> int:
        """Rows whose wants these poles do not meet."""
        poles = tuple(poles)
        edges = list(self._joins)
        top = self._fixed
        for pole in poles:
            operated = self._operated[pole.relay]
            if pole.make is not None:
                edges.append((pole.common, pole.make, operated))
            if pole.break_ is not None:
                edges.append((pole.common, pole.break_, self._full & ~operated))
            top = max(top, pole.common + 1, (pole.make or 0) + 1, (pole.break_ or 0) + 1)
        live = self._spread([*self._source, *[0] * (top - self._fixed)], edges)
        wrong = 0
        for net in range(self._fixed):
            wrong |= self._on[net] & ~live[net] | self._off[net] & live[net]
        for load, others in self._apart.items():
            start = [0] * top
            start[load] = self._full
            joined = self._spread(start, edges)
            for other, rows in others.items():
                wrong |= rows & joined[other] & ~live[load]
        return wrong

    @staticmethod
    def _spread(reached: list[int], edges: Sequence[tuple[int, int, int]]) -> list[int]:
        changed = True
        while changed:
            changed = False
            for a, b, closed in edges:
                both = (reached[a] | reached[b]) & closed
                if both & ~reached[a]:
                    reached[a] |= both
                    changed = True
                if both & ~reached[b]:
                    reached[b] |= both
                    changed = True
        return reached
