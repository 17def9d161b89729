"""A portfolio of walks over worker processes, with the best so far always at hand.

Each errand (a ladder, a bridge) is walked by several walkers with seeds of their own.  By the clock
every worker walks until time is up; by effort every errand has the same walkers with the same
number of windows whatever the machine, so that equal input gives equal bytes.  Workers are child
processes: one that crashes takes nothing with it, and Ctrl-C ends the search with what is found.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from queue import Empty, Queue
from time import monotonic

from contactlogic.child import Event, Stream
from contactlogic.search.goal import Goal
from contactlogic.search.mesh import Mesh
from contactlogic.search.windows import Found, wander

__all__ = ["Errand", "Progress", "Standing", "explore"]

_WALKERS = 2  # for each errand when running by effort
_TICK = 0.2  # seconds between looks at the clock


@dataclass(frozen=True)
class Errand:
    """A goal with networks to start from; `enough` is a proved bound: no need to go below it."""

    starts: tuple[Mesh, ...]
    goal: Goal
    enough: int = 0


@dataclass(frozen=True)
class Standing:
    """Where one errand stands: the cheapest checked network, None if no start was accepted."""

    best: Mesh | None = None
    windows: int = 0
    crashed: int = 0


@dataclass(frozen=True)
class Progress:
    """What a watcher is told: the standings, in the order of the errands, and seconds so far."""

    standings: tuple[Standing, ...]
    seconds: float
    interrupted: bool = False


@dataclass(frozen=True)
class _Walker:
    errand: int
    seed: int


def explore(
    errands: Sequence[Errand],
    *,
    seconds: float | None,
    effort: int | None,
    seed: int,
    workers: int,
    watch: Callable[[Progress], None] | None = None,
) -> Progress:
    """Walk all errands and return where they stand at the end.

    Args:
        errands: what to improve.
        seconds: wall-clock limit, None for none (then `effort` must be given).
        effort: windows for each walker; None walks until time is up.
        seed: walkers derive theirs from it.
        workers: processes at a time.
        watch: called now and then with the progress.

    Ctrl-C (KeyboardInterrupt) ends the search at once; the result then says `interrupted`.
    """
    start = monotonic()
    state = [Standing() for _ in errands]
    waiting = _walkers(errands, effort, seed, workers)
    running: dict[int, tuple[_Walker, Stream]] = {}
    seen: dict[int, int] = {}  # windows each stream has reported
    inbox: Queue[Event] = Queue()
    interrupted = False
    serial = 0
    try:
        while waiting or running:
            while waiting and len(running) < workers:
                walker = waiting.pop(0)
                errand = errands[walker.errand]
                arguments = (errand.starts, errand.goal, walker.seed, effort, errand.enough)
                running[serial] = (walker, Stream(wander, *arguments, inbox=inbox, name=serial))
                serial += 1
            left = _TICK if seconds is None else min(_TICK, seconds - (monotonic() - start))
            if left <= 0:
                break
            try:
                event = inbox.get(timeout=left)
            except Empty:
                event = None
            if event is not None and event.name in running:
                walker, stream = running[event.name]
                state[walker.errand] = _heard(
                    errands[walker.errand].goal, state[walker.errand], event, seen
                )
                if event.ended:
                    stream.close()
                    del running[event.name]
            if watch is not None:
                watch(Progress(tuple(state), monotonic() - start))
    except KeyboardInterrupt:
        interrupted = True
    finally:
        for _, stream in running.values():
            stream.close()
    return Progress(tuple(state), monotonic() - start, interrupted)


def _walkers(
    errands: Sequence[Errand], effort: int | None, seed: int, workers: int
) -> list[_Walker]:
    """Walkers in turn over the errands, each with a seed of its own."""
    rounds = _WALKERS if effort is not None else max(1, -(-workers // max(1, len(errands))))
    return [
        _Walker(errand, 1000 * seed + len(errands) * turn + errand)
        for turn in range(rounds)
        for errand in range(len(errands))
    ]


def _heard(goal: Goal, standing: Standing, event: Event, seen: dict[int, int]) -> Standing:
    if event.ended:
        return replace(standing, crashed=standing.crashed + (event.failure is not None))
    found = event.value
    if not isinstance(found, Found):
        return standing
    windows = standing.windows + found.windows - seen.get(event.name, 0)
    seen[event.name] = found.windows
    best = standing.best
    if found.best is not None and (best is None or _key(goal, found.best) < _key(goal, best)):
        best = found.best
    return replace(standing, best=best, windows=windows)


def _key(goal: Goal, mesh: Mesh) -> tuple[object, ...]:
    """Cost, then the wiring itself, so that the order in which walkers finish does not matter."""
    order = tuple(tuple(-1 if net is None else net for net in pole) for pole in mesh.poles)
    return (*goal.cost(mesh), order)
