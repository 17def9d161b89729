"""Prime implicants of an incompletely specified function, all rows at once.

The tabulation of Quine, "The problem of simplifying truth functions" (1952), as McCluskey,
"Minimization of Boolean functions" (1956), carries it out: cubes that differ in one relay merge,
and what merges no further is prime.  Here one Python int holds, for a set S of dropped relays,
every cube over the remaining relays at once (the bit of its row with all of S released), so that
a merge of all cubes is one shift and one AND.  That is 2**n integers of 2**n bits: n <= 12 is
milliseconds to a second.
"""

from __future__ import annotations

from contactlogic.minimize.cube import Cube
from contactlogic.truth import Target, all_rows, rows_of, variable

__all__ = ["primes"]


def primes(target: Target) -> tuple[Cube, ...]:
    """Prime implicants of on-or-free that cover at least one on row.

    Sorted by number of contacts, then by the contacts.
    """
    n = target.n
    full = all_rows(n)
    released = [full & ~variable(n, i) for i in range(n)]
    inside = [0] * (1 << n)  # by set of dropped relays: cubes wholly in on-or-free
    touches = [0] * (1 << n)  # the same: cubes with an on row in them
    inside[0], touches[0] = target.on | target.free, target.on
    for dropped in range(1, 1 << n):
        i = (dropped & -dropped).bit_length() - 1
        before = dropped & (dropped - 1)
        both = inside[before]
        inside[dropped] = both & both >> (1 << i) & released[i]
        either = touches[before]
        touches[dropped] = (either | either >> (1 << i)) & released[i]
    found: list[Cube] = []
    for dropped in range(1 << n):
        left = inside[dropped] & touches[dropped]
        for i in range(n):
            if not left:
                break
            if not dropped >> i & 1:
                merged = inside[dropped | 1 << i]
                left &= ~(merged | merged << (1 << i))
        care = (1 << n) - 1 & ~dropped
        found.extend(Cube(care, row) for row in rows_of(left))
    return tuple(sorted(found, key=lambda cube: (cube.literals, cube.care, cube.value)))
