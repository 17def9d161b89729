"""Results drawn up by hand, so that reports are tested without a search."""

from __future__ import annotations

from contactlogic.design import Bound, Design, LoadStatus, Result
from contactlogic.job.model import Job, Limits, Load, Supply
from contactlogic.network import Network, Pole
from contactlogic.report.facts import Facts, as_built, longest_runs
from contactlogic.truth import Target

# LAMP: up without down, or flood. HORN: down without up. Row 6 (down in a flood) was left open for
# HORN, row 3 (up and down) is not listed at all.
SLUICE_JOB = Job(
    title="Sluice house",
    relays=("UP", "DOWN", "FLOOD"),
    loads=(
        Load("LAMP", Target(3, on=0b1111_0010 & ~0b1000, free=0b1000), kind="lamp", amps=0.2),
        Load("HORN", Target(3, on=0b0000_0100, free=0b0100_1000)),
    ),
    listed=0b1111_0111,
    supply=Supply(feed="+24 V", return_="0 V"),
    limits=Limits(poles={"UP": 2}),
    file="sluice.toml",
)

SLUICE_TOML = """\
title = "Sluice house"
[table]
columns = "UP DOWN FLOOD | LAMP HORN"
rows = \"\"\"
0 0 0 | 0 0
1 0 0 | 1 0
0 1 0 | 0 1
0 0 1 | 1 0
1 0 1 | 1 0
0 1 1 | 1 -
1 1 1 | 1 0
\"\"\"
unlisted = "free"
"""
"""The same job as a file, without its supply and what is known of its loads."""

SLUICE_NETWORK = Network(
    relays=("UP", "DOWN", "FLOOD"),
    supply="L",
    loads={"LAMP": "n2", "HORN": "n4"},
    poles=(
        Pole("UP", 1, "L", "n1", "n3"),
        Pole("DOWN", 1, "n1", None, "n2"),
        Pole("DOWN", 2, "n3", "n4"),
        Pole("FLOOD", 1, "L", "n2"),
    ),
)

SLUICE_DESIGN = Design(
    form="ladder",
    network=SLUICE_NETWORK,
    bound=Bound(at_least=3, proven_minimum=False),
    verified_rows=8,
    covers=(
        LoadStatus("LAMP", "UP DOWN' + FLOOD", 3, 2, True),
        LoadStatus("HORN", "UP' DOWN", 2, 1, False),
    ),
    notes=("nothing is isolated",),
)

SLUICE_RESULT = Result(SLUICE_JOB, (SLUICE_DESIGN,), SLUICE_JOB.relays)

SLUICE_FACTS = Facts(
    {"LAMP": "FLOOD + UP DOWN'", "HORN": "UP' DOWN"},
    frozenset(("LAMP", "HORN")),
    as_built(SLUICE_NETWORK),
    longest_runs(SLUICE_DESIGN.network),
)

SLUICE_BRIDGE = Design(
    form="bridge",
    network=Network(
        relays=("UP", "DOWN", "FLOOD"),
        supply="L",
        loads={"LAMP": "n1", "HORN": "n3"},
        poles=(
            Pole("UP", 1, "L", "n1", "n2"),
            Pole("DOWN", 1, "n2", "n3"),
            Pole("FLOOD", 1, "L", "n1"),
        ),
    ),
    bound=Bound(at_least=3, proven_minimum=True),
    verified_rows=8,
    covers=SLUICE_DESIGN.covers,
)

SLUICE_BOTH = Result(SLUICE_JOB, (SLUICE_DESIGN, SLUICE_BRIDGE), SLUICE_JOB.relays)

SLUICE_BRIDGE_FACTS = Facts(
    {"LAMP": "UP + FLOOD", "HORN": "UP' DOWN"},
    frozenset(("LAMP", "HORN")),
    as_built(SLUICE_BRIDGE.network),
    longest_runs(SLUICE_BRIDGE.network),
)
