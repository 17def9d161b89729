"""What a finished network does, for the papers: rows as built, loads on at rest, longest runs.

The longest run is the longest simple path, from the supply to a load, whose contacts can all be
closed in one row; its length is how many contact resistances stand in series.  The search walks
simple paths depth first and remembers, for each net, how the walk can go on: by the nets still
open to it and by the relays whose position is settled and still matters there.  In a ladder few
such states arise.  In general the problem is NP-hard, so the work is bounded and the answer says
whether it is exact.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from contactlogic.design import Design
from contactlogic.job.model import Job
from contactlogic.network import Network, conduction, folded
from contactlogic.truth import all_rows, rows_of

__all__ = [
    "Facts",
    "Run",
    "as_built",
    "constant",
    "facts",
    "free_cells",
    "free_on",
    "longest_runs",
    "on_at_rest",
]


@dataclass(frozen=True)
class Run:
    """The most contacts in series on a conducting path to a load.

    `exact` is False where the work ran out; then the true figure may be larger.
    """

    contacts: int
    exact: bool = True

    def __str__(self) -> str:
        return str(self.contacts) if self.exact else f"at least {self.contacts}"


@dataclass(frozen=True)
class Facts:
    """What the papers of one design say of each load, worked out once.

    Args:
        formulas: switching algebra of each load: as wired, or where the wiring is not
            series-parallel, a short formula for what it does.
        as_wired: loads whose formula is read off the wiring.
        tables: rows in which each load is on, as truth tables.
        runs: longest run of contacts in series to each load.
    """

    formulas: Mapping[str, str]
    as_wired: frozenset[str]
    tables: Mapping[str, int]
    runs: Mapping[str, Run]

    @property
    def longest(self) -> tuple[str | None, Run]:
        """The load with the longest run (the first of equals; None without loads), and the run."""
        if not self.runs:
            return None, Run(0)
        load = max(self.runs, key=lambda name: self.runs[name].contacts)
        return load, Run(self.runs[load].contacts, all(run.exact for run in self.runs.values()))


def facts(design: Design, repeaters: Mapping[str, str] = MappingProxyType({})) -> Facts:
    """Formulas, rows and longest runs of a design; `repeaters` as in `Result`."""
    from contactlogic.ladder import formula_of, formulas

    network = folded(design.network, repeaters)
    tables = as_built(network)
    wired = formulas(network)
    texts = {
        load: wired[load] if load in wired else formula_of(table, network.relays)
        for load, table in tables.items()
    }
    return Facts(texts, frozenset(wired), tables, longest_runs(network))


def as_built(network: Network) -> dict[str, int]:
    """Rows in which each load is on, as truth tables, in the loads' order."""
    joined = conduction(network)
    return {load: 0 if net is None else joined[net] for load, net in network.loads.items()}


def on_at_rest(tables: Mapping[str, int]) -> tuple[str, ...]:
    """Loads that are on with every relay released (row 0)."""
    return tuple(load for load, table in tables.items() if table & 1)


def free_cells(job: Job) -> int:
    """How many cells (row and load) of the job are free."""
    return sum(load.target.free.bit_count() for load in job.loads)


def free_on(
    job: Job, tables: Mapping[str, int], within: int | None = None
) -> dict[int, dict[str, str]]:
    """Free cells in which a load is on: row -> load -> "free" or "unlisted", rows ascending.

    A cell is "unlisted" where the job's table does not list the row at all.  With `within`, a truth
    table, only those rows are looked at.
    """
    found: dict[int, dict[str, str]] = {}
    for load in job.loads:
        marked = tables.get(load.name, 0) & load.target.free
        for row in rows_of(marked if within is None else marked & within):
            kind = "free" if job.listed >> row & 1 else "unlisted"
            found.setdefault(row, {})[load.name] = kind
    return dict(sorted(found.items()))


def constant(table: int, relays: int) -> str | None:
    """What to say of a load that no relay changes, None for any other."""
    if table == 0:
        return "never on"
    return "always on" if table == all_rows(relays) else None


def longest_runs(network: Network, *, work: int = 1_000_000) -> dict[str, Run]:
    """The longest run of contacts in series of each load, in the loads' order.

    Args:
        work: how many net visits may be spent, shared out evenly over the loads (a million take
            about a second).
    """
    graph = _Graph(network)
    known: dict[str, Run] = {}
    runs: dict[str, Run] = {}
    share = work // max(1, len(network.loads))
    for load, net in network.loads.items():
        if net is None or net == network.supply:
            runs[load] = Run(0)
            continue
        if net not in known:
            known[net] = _Search(graph, net, share).run()
        runs[load] = known[net]
    return runs


class _Graph:
    """Nets as bits; per net its neighbours, its contacts and the relays that touch it."""

    def __init__(self, network: Network) -> None:
        self.index = {net: i for i, net in enumerate(network.nets())}  # the supply is 0
        place = {relay: i for i, relay in enumerate(network.relays)}
        count = len(self.index)
        self.near = [0] * count
        self.relays = [0] * count
        self.edges: list[list[tuple[int, int, int]]] = [[] for _ in range(count)]
        for contact in network.contacts():
            a, b = self.index[contact.common], self.index[contact.throw]
            if a == b:
                continue
            bit = 1 << place[contact.relay]
            made, broken = (bit, 0) if contact.make else (0, bit)
            for here, there in ((a, b), (b, a)):
                self.near[here] |= 1 << there
                self.relays[here] |= bit
                self.edges[here].append((there, made, broken))


class _Search:
    """One load's search.  `work` counts net visits, the unit of its budget."""

    def __init__(self, graph: _Graph, net: str, work: int) -> None:
        self.graph = graph
        self.target = graph.index[net]
        self.work = work
        self.best = 0
        self.memo: dict[tuple[int, int, int, int], int | None] = {}

    def run(self) -> Run:
        everything = (1 << len(self.graph.near)) - 1
        self.walk(0, everything & ~1, 0, 0, 0)
        return Run(self.best, self.work > 0)

    def walk(self, here: int, open_: int, made: int, broken: int, length: int) -> int | None:
        """Most contacts from `here` to the target through `open_` nets, None if there is no way."""
        if here == self.target:
            self.best = max(self.best, length)
            return 0
        open_, relays = self.region(here, open_)
        if not open_ >> self.target & 1 or self.work <= 0:
            return None
        key = (here, open_, made & relays, broken & relays)
        if key in self.memo:
            rest = self.memo[key]
            if rest is not None:
                self.best = max(self.best, length + rest)
            return rest
        rest = None
        for there, make, break_ in self.graph.edges[here]:
            if not open_ >> there & 1 or make & broken or break_ & made:
                continue
            found = self.walk(
                there, open_ & ~(1 << there), made | make, broken | break_, length + 1
            )
            if found is not None and (rest is None or found + 1 > rest):
                rest = found + 1
        self.memo[key] = rest
        return rest

    def region(self, here: int, open_: int) -> tuple[int, int]:
        """Open nets that can be reached from `here` short of passing the target, and the relays
        that stand between them."""
        seen = 0
        relays = self.graph.relays[here]
        waiting = self.graph.near[here] & open_
        while waiting:
            low = waiting & -waiting
            waiting ^= low
            seen |= low
            self.work -= 1
            net = low.bit_length() - 1
            relays |= self.graph.relays[net]
            if net != self.target:
                waiting |= self.graph.near[net] & open_ & ~seen
        return seen, relays
