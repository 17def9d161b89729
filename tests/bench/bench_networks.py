"""Poles of the shared jobs by each way of wiring them, as a Markdown table.

    python tests/bench/bench_networks.py [seconds for each job] [job ...]

Columns: contacts of the least two-level covers, none paired; contacts of the factored ladder,
none paired; nodes of the best decision diagram; our ladder; our bridge; its proved bound;
seconds in all.
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
from contactlogic.truth import all_rows


def main(seconds: float, names: list[str]) -> None:
    print("| job | two-level | factored | diagram | ladder | bridge | at least | s |")
    print("|---|---|---|---|---|---|---|---|")
    diagrams = bridges = proved = 0
    for name in names:
        relays, targets = JOBS[name]
        found = {load: covers(target) for load, target in targets.items()}
        flat = sum(best[0].literals for best in found.values())
        factored = best_ladder(LadderTask(relays, targets, found), seconds=20).network
        contacts = sum(1 for _ in factored.contacts())
        nodes = len(fewest_nodes(list(targets.values())).poles)
        loads = tuple(Load(load, target) for load, target in targets.items())
        start = monotonic()
        job = Job(name, relays, loads, all_rows(len(relays)))
        ladder, bridge = contactlogic.wire(job, seconds=seconds).designs
        took = monotonic() - start
        poles = len(bridge.network.poles)
        mark = " (proved)" if bridge.bound.proven_minimum else ""
        print(
            f"| {name} | {flat} | {contacts} | {nodes} | {len(ladder.network.poles)} | {poles} "
            f"| {bridge.bound.at_least}{mark} | {took:.0f} |",
            flush=True,
        )
        diagrams += nodes
        bridges += poles
        proved += bridge.bound.proven_minimum
    share = bridges / diagrams
    print(f"\nbridges {bridges}, diagrams {diagrams}: {share:.2f}; {proved} of {len(names)} proved")


if __name__ == "__main__":
    limit = float(sys.argv[1]) if len(sys.argv) > 1 else 60.0
    main(limit, sys.argv[2:] or list(JOBS))
