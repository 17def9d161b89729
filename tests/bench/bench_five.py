"""Fifty random loads of five relays: poles found, bounds, and how many are proved least.

    python tests/bench/bench_five.py [seconds for each load] [loads]

The loads are the same every time.  Printed as a Markdown table: how many loads need how many poles,
and how many of those are proved.
"""

from __future__ import annotations

import sys
from collections import Counter
from random import Random
from time import monotonic

import contactlogic
from contactlogic.job.model import Job, Load
from contactlogic.truth import Target, all_rows

RELAYS = tuple("ABCDE")


def loads(count: int) -> list[Target]:
    random = Random(5)
    return [Target(5, random.getrandbits(32)) for _ in range(count)]


def main(seconds: float, count: int) -> None:
    found: Counter[tuple[int, int]] = Counter()
    gaps: Counter[int] = Counter()
    took = []
    for number, target in enumerate(loads(count)):
        start = monotonic()
        job = Job(f"load {number}", RELAYS, (Load("Z", target),), all_rows(5))
        (bridge,) = contactlogic.wire(job, form="bridge", seconds=seconds).designs
        took.append(monotonic() - start)
        poles, at_least = len(bridge.network.poles), bridge.bound.at_least
        found[poles, at_least] += 1
        gaps[poles - at_least] += 1
        print(f"{target.on:08x} {poles} poles, at least {at_least}", file=sys.stderr, flush=True)
    print("| poles | loads | proved | open by 1 | open by more |")
    print("|---|---|---|---|---|")
    for poles in sorted({poles for poles, _ in found}):
        own = {poles - least: many for (size, least), many in found.items() if size == poles}
        more = sum(many for gap, many in own.items() if gap > 1)
        total = sum(own.values())
        print(f"| {poles} | {total} | {own.get(0, 0)} | {own.get(1, 0)} | {more} |")
    mean = sum(poles * many for (poles, _), many in found.items()) / count
    print(
        f"\n{count} loads, {seconds:g} s each at most ({sum(took) / count:.1f} s on average):"
        f" {mean:.2f} poles on average, {gaps[0]} proved least ({gaps[0] / count:.0%}),"
        f" {gaps[1]} open by one pole"
    )


if __name__ == "__main__":
    limit = float(sys.argv[1]) if len(sys.argv) > 1 else 60.0
    main(limit, int(sys.argv[2]) if len(sys.argv) > 2 else 50)
