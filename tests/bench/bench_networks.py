"""Poles of the shared jobs by each way of wiring them, as a Markdown table.

    python tests/bench/bench_networks.py [seconds for each job] [job ...]

Columns: contacts of the least two-level covers, none paired; contacts of the factored ladder,
none paired; nodes of the shared decision diagram in its best order, free rows off; the same where
free rows are used level by level, as our search starts; our ladder; our bridge; its proved bound;
seconds in all.  Below stand the sums, and the least that any bridges could come to by the bounds.
"""

from __future__ import annotations

import sys
from time import monotonic

from bench_jobs import JOBS

import contactlogic
from contactlogic.job.model import Job, Load
from contactlogic.ladder import LadderTask, best_ladder
from contactlogic.minimize import covers
from contactlogic.search.diagrams import fewest_nodes
from contactlogic.truth import Target, all_rows


def main(seconds: float, names: list[str]) -> None:
    print("| job | two-level | factored | diagram | free used | ladder | bridge | at least | s |")
    print("|---|---|---|---|---|---|---|---|---|")
    diagrams = narrow = ladders = bridges = bounds = proved = 0
    for name in names:
        relays, targets = JOBS[name]
        found = {load: covers(target) for load, target in targets.items()}
        flat = sum(best[0].literals for best in found.values())
        factored = best_ladder(LadderTask(relays, targets, found), seconds=20).network
        contacts = sum(1 for _ in factored.contacts())
        plain = [Target(target.n, target.on) for target in targets.values()]
        nodes = len(fewest_nodes(plain).poles)
        fewer = len(fewest_nodes(list(targets.values())).poles)
        loads = tuple(Load(load, target) for load, target in targets.items())
        start = monotonic()
        job = Job(name, relays, loads, all_rows(len(relays)))
        ladder, bridge = contactlogic.wire(job, seconds=seconds).designs
        took = monotonic() - start
        poles = len(bridge.network.poles)
        mark = " (proved)" if bridge.bound.proven_minimum else ""
        print(
            f"| {name} | {flat} | {contacts} | {nodes} | {fewer} | {len(ladder.network.poles)} "
            f"| {poles} | {bridge.bound.at_least}{mark} | {took:.0f} |",
            flush=True,
        )
        diagrams += nodes
        narrow += fewer
        ladders += len(ladder.network.poles)
        bridges += poles
        bounds += bridge.bound.at_least
        proved += bridge.bound.proven_minimum
    print(
        f"\ndiagrams {diagrams} ({narrow} with free rows used), ladders {ladders},"
        f" bridges {bridges}: {bridges / diagrams:.2f} of the diagrams; no bridges come below"
        f" {bounds}: {bounds / diagrams:.2f}; {proved} of {len(names)} proved least"
    )


if __name__ == "__main__":
    limit = float(sys.argv[1]) if len(sys.argv) > 1 else 60.0
    main(limit, sys.argv[2:] or list(JOBS))
