"""A portfolio of walks and one proof over worker processes, the best so far always at hand.

Each errand (a ladder, a bridge) is walked by several walkers with seeds of their own; beside them
the exact search raises the lower bound.  By the clock every worker walks until time is up; by
effort the proof comes first and every errand has the same walkers with the same number of windows
whatever the machine, so that equal input gives equal bytes.  Workers are child processes: one that
crashes takes nothing with it, and Ctrl-C ends the search with what is found.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from queue import Empty, Queue
from time import monotonic

from contactlogic.child import Event, Inbox, Spares, Stream
from contactlogic.network import Network
from contactlogic.search.exact import ExactNews, prove
from contactlogic.search.goal import Goal
from contactlogic.search.mesh import Mesh, from_network
from contactlogic.search.problem import Problem
from contactlogic.search.windows import Found, wander

__all__ = ["Errand", "Progress", "Proving", "Standing", "explore"]

_WALKERS = 2  # for each errand when running by effort
_SHORT = 10  # windows below which one walker is enough: a second would take longer to start
_TICK = 0.2  # seconds between looks at the clock
_PROVING_SHARE = 0.5  # of the time goes to the proof at most


@dataclass(frozen=True)
class Errand:
    """A goal with networks to start from."""

    starts: tuple[Mesh, ...]
    goal: Goal


@dataclass(frozen=True)
class Proving:
    """What the exact search is asked.

    Args:
        problem: the same wants as the errands', without the ladder form.
        known: a correct network; only smaller ones are searched for.
        conflicts: budget when running by effort.
        most: sizes up to this are tried; None for all below the known network's.
        at_least: bound known beforehand.
    """

    problem: Problem
    known: Network | None
    conflicts: int
    most: int | None = None
    at_least: int = 0


@dataclass(frozen=True)
class Standing:
    """Where one errand stands: the cheapest checked network, None if no start was accepted."""

    best: Mesh | None = None
    windows: int = 0
    crashed: int = 0


@dataclass(frozen=True)
class Progress:
    """Standings in the order of the errands, what is proved, seconds so far.

    `at_least` counts what the objective counts; `feasible` is False if proved that no network at
    all keeps the budgets.
    """

    standings: tuple[Standing, ...]
    at_least: int
    seconds: float
    feasible: bool = True
    interrupted: bool = False


def explore(
    errands: Sequence[Errand],
    *,
    proving: Proving | None = None,
    seconds: float | None,
    effort: int | None,
    seed: int,
    workers: int,
    watch: Callable[[Progress], None] | None = None,
    spares: Spares | None = None,
) -> Progress:
    """Walk all errands and return where they stand at the end.

    Args:
        errands: what to improve.
        proving: what to prove beside, None for nothing.
        seconds: wall-clock limit, None for none (then `effort` must be given).
        effort: windows for each walker; None walks until time is up.
        seed: walkers derive theirs from it.
        workers: walking processes at a time; the proof has one of its own.
        watch: called now and then with the progress.
        spares: child processes that are starting already.

    Ctrl-C (KeyboardInterrupt) ends the search at once; the result then says `interrupted`.
    """
    run = _Run(errands, proving, seconds, effort, watch, spares)
    interrupted = False
    try:
        if proving is not None:
            conflicts = None if effort is None else proving.conflicts
            run.start_proof(proving, conflicts)
        if effort is not None:
            while run.proof is not None:
                run.listen()
        run.waiting = run.walkers(seed, workers)
        while (run.waiting or run.walks) and not run.over():
            run.start_walks(workers)
            run.listen()
            if effort is None:
                run.release()
        while effort is None and run.proof is not None and not (run.over() or run.settled()):
            run.listen()
    except KeyboardInterrupt:
        interrupted = True
    finally:
        run.close()
    return replace(run.progress(), interrupted=interrupted)


@dataclass(frozen=True)
class _Walker:
    errand: int
    seed: int


class _Run:
    """The state of one `explore`."""

    def __init__(
        self,
        errands: Sequence[Errand],
        proving: Proving | None,
        seconds: float | None,
        effort: int | None,
        watch: Callable[[Progress], None] | None,
        spares: Spares | None,
    ) -> None:
        self.errands = errands
        self.seconds = seconds
        self.effort = effort
        self.watch = watch
        self.spares = spares
        self.start = monotonic()
        self.state = [Standing() for _ in errands]
        self.at_least = proving.at_least if proving else 0
        self.feasible = True
        self.found: Mesh | None = None  # by the proof
        self.waiting: list[_Walker] = []
        self.walks: dict[int, tuple[_Walker, Stream]] = {}
        self.proof: tuple[int, Stream] | None = None
        self.inbox: Inbox = Queue()
        self._serial = 0
        self._seen: dict[int, int] = {}  # windows each stream has reported

    def start_proof(self, proving: Proving, conflicts: int | None) -> None:
        name = self._name()
        arguments = (proving.problem, proving.known, conflicts, proving.most)
        self.proof = (name, self._stream(_proof, *arguments, name=name))

    def walkers(self, seed: int, workers: int) -> list[_Walker]:
        """Walkers in turn over the errands, each with a seed of its own.

        By effort, an errand that starts at the proved bound needs but one, to settle ties.
        """
        count = len(self.errands)
        if self.effort is None:
            rounds = max(1, -(-workers // max(1, count)))
        else:
            rounds = _WALKERS if self.effort >= _SHORT else 1
        return [
            _Walker(errand, 1000 * seed + count * turn + errand)
            for turn in range(rounds)
            for errand in range(count)
            if not turn or not self._starts_at_bound(errand)
        ]

    def _starts_at_bound(self, errand: int) -> bool:
        goal = self.errands[errand].goal
        meshes = (*self.errands[errand].starts, *([self.found] if self.found else []))
        return any(goal.reached(m, self.at_least) and goal.accepts(m) for m in meshes)

    def start_walks(self, workers: int) -> None:
        while self.waiting and len(self.walks) < workers:
            walker = self.waiting.pop(0)
            errand = self.errands[walker.errand]
            starts = errand.starts
            if self.found is not None and errand.goal.accepts(self.found):
                starts = (self.found, *starts)
            arguments = (starts, errand.goal, walker.seed, self.effort, self.at_least)
            name = self._name()
            self.walks[name] = (walker, self._stream(wander, *arguments, name=name))

    def _stream(
        self, function: Callable[..., Iterator[object]], *arguments: object, name: int
    ) -> Stream:
        return Stream(function, *arguments, inbox=self.inbox, name=name, spares=self.spares)

    def _name(self) -> int:
        self._serial += 1
        return self._serial

    def over(self) -> bool:
        return self.seconds is not None and monotonic() - self.start >= self.seconds

    def listen(self) -> None:
        """Wait a moment for an event and take it in."""
        spent = monotonic() - self.start
        wait = _TICK if self.seconds is None else max(0.0, min(_TICK, self.seconds - spent))
        try:
            event = self.inbox.get(timeout=wait)
        except Empty:
            pass
        else:
            if self.proof is not None and event.name == self.proof[0]:
                self._proof_said(event)
            elif event.name in self.walks:
                self._walk_said(event)
        share = None if self.seconds is None else _PROVING_SHARE * self.seconds
        if self.proof is not None and share is not None and spent > share:
            self.proof[1].close()
            self.proof = None
        if self.watch is not None:
            self.watch(self.progress())

    def _proof_said(self, event: Event) -> None:
        assert self.proof is not None
        if event.ended:
            self.proof[1].close()
            self.proof = None
            return
        news = event.value
        if not isinstance(news, ExactNews):
            return
        self.at_least = max(self.at_least, news.at_least)
        self.feasible = self.feasible and news.feasible
        if news.network is not None:
            self.found = from_network(news.network)
            for k, errand in enumerate(self.errands):
                if errand.goal.accepts(self.found):
                    self._take(k, self.found)

    def _walk_said(self, event: Event) -> None:
        walker, stream = self.walks[event.name]
        standing = self.state[walker.errand]
        if event.ended:
            crashed = standing.crashed + (event.failure is not None)
            self.state[walker.errand] = replace(standing, crashed=crashed)
            stream.close()
            del self.walks[event.name]
            return
        found = event.value
        if not isinstance(found, Found):
            return
        windows = standing.windows + found.windows - self._seen.get(event.name, 0)
        self._seen[event.name] = found.windows
        self.state[walker.errand] = replace(standing, windows=windows)
        if found.best is not None:
            self._take(walker.errand, found.best)

    def _take(self, errand: int, mesh: Mesh) -> None:
        """Keep the cheaper network; at equal cost the wiring itself decides, not who came first."""
        goal, best = self.errands[errand].goal, self.state[errand].best
        if best is None or _key(goal, mesh) < _key(goal, best):
            self.state[errand] = replace(self.state[errand], best=mesh)

    def reached(self, errand: int) -> bool:
        best = self.state[errand].best
        return best is not None and self.errands[errand].goal.reached(best, self.at_least)

    def settled(self) -> bool:
        """Whether every errand has reached the proved bound."""
        return all(self.reached(k) for k in range(len(self.errands)))

    def release(self) -> None:
        """End walks whose errand has reached the bound, and walk the others in their place."""
        open_errands = [k for k in range(len(self.errands)) if not self.reached(k)]
        self.waiting = [walker for walker in self.waiting if walker.errand in open_errands]
        for name, (walker, stream) in list(self.walks.items()):
            if walker.errand in open_errands:
                continue
            stream.close()
            del self.walks[name]
            if open_errands:
                self.waiting.append(_Walker(open_errands[0], walker.seed + 500_000))

    def progress(self) -> Progress:
        spent = monotonic() - self.start
        return Progress(tuple(self.state), self.at_least, spent, self.feasible)

    def close(self) -> None:
        for _, stream in self.walks.values():
            stream.close()
        if self.proof is not None:
            self.proof[1].close()


def _proof(
    problem: Problem, known: Network | None, conflicts: int | None, most: int | None
) -> Iterator[ExactNews]:
    return prove(problem, known=known, conflicts=conflicts, most=most)


def _key(goal: Goal, mesh: Mesh) -> tuple[object, ...]:
    order = tuple(tuple(-1 if net is None else net for net in pole) for pole in mesh.poles)
    return (*goal.cost(mesh), order)
