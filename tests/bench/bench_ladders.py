"""Ladders over the shared jobs: contacts, poles, proved pairing, seconds.

python tests/bench/bench_ladders.py [seconds]
"""

from __future__ import annotations

import sys
from time import monotonic

from bench_jobs import JOBS

from contactlogic.ladder import LadderTask, best_ladder
from contactlogic.minimize import covers


def main(seconds: float) -> None:
    print(f"{'job':34}{'literals':>9}{'contacts':>9}{'poles':>6}{'busiest':>8}{'seconds':>8}")
    for name, (relays, targets) in JOBS.items():
        start = monotonic()
        found = {load: covers(target) for load, target in targets.items()}
        literals = sum(best[0].literals for best in found.values())
        ladder = best_ladder(LadderTask(relays, targets, found), seconds=seconds)
        poles, busiest, _, _ = ladder.network.cost()
        contacts = sum(1 for _ in ladder.network.contacts())
        took = monotonic() - start
        print(f"{name:34}{literals:9}{contacts:9}{poles:6}{busiest:8}{took:8.1f}", flush=True)


if __name__ == "__main__":
    main(float(sys.argv[1]) if len(sys.argv) > 1 else 60.0)
