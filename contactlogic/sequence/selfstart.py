"""Choosing the free drives so that a sequencer falls into its cycle from every state.

`homing` fills the states outside the sequence so that recovery is certain: in each of them exactly
one relay is pending, and its move leads one step nearer to the sequence.  `Recovers` judges a
finished network by its contacts, for the search to weigh: the search starts from the homing wiring
and keeps to networks that recover, while the drives of states outside the sequence stay free.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

from contactlogic.job.sequence import Timing
from contactlogic.network import Network
from contactlogic.sequence.prove import network_motion, prove_network
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.transit import transits
from contactlogic.truth import Target

__all__ = ["Blemishes", "Recovers", "homing", "shared_coils"]

_STICKS = 100_000  # excess of a network that does not recover: no repeater takes it off
_HUNTS = 50_000
_REMEMBERED = 64  # networks

_Known = dict[tuple[object, ...], int]


def homing(expansion: Expansion, targets: Mapping[str, Target]) -> dict[str, Target]:
    """The wanted drives with the states outside the sequence filled so that all come home.

    Args:
        expansion: unambiguous.
        targets: wanted drives by relay (`wants.drive_targets`).

    States from which no move of a relay leads to the sequence (an input would have to move) hold.
    """
    from contactlogic.sequence import bits

    n = len(expansion.columns)
    place = {name: i for i, name in enumerate(expansion.columns)}
    inside = bits.of_states(n, (step.state for step in expansion.steps))
    reached = frontier = inside
    toward = {name: bits.empty(n) for name in expansion.relays}  # states in which it moves home
    while frontier.any():  # breadth first, so that every state takes a shortest way
        fresh = bits.empty(n)
        for name, moving in toward.items():
            new = bits.swap(frontier, place[name]) & ~reached
            moving |= new
            reached = reached | new
            fresh |= new
        frontier = fresh
    outside = bits.full(n) & ~inside
    listed = bits.to_table(inside, n)
    filled = dict(targets)
    for name, moving in toward.items():
        position = bits.variable_words(place[name], 0, bits.words_of(n))
        on = bits.to_table((position ^ moving) & outside, n)
        target = targets[name]
        filled[name] = replace(target, on=target.on | on, free=target.free & listed)
    return filled


@dataclass(frozen=True)
class Recovers:
    """A penalty for `search.goal.Goal`: 0 for a network whose contacts recover."""

    timing: Timing
    expansion: Expansion
    inputs_return: bool = True
    _known: _Known = field(default_factory=dict, init=False, repr=False, compare=False)

    def __call__(self, network: Network) -> int:
        return _recalled(self._known, network, self._weigh)

    def _weigh(self, network: Network) -> int:
        found = prove_network(
            network, self.timing, self.expansion, inputs_return=self.inputs_return
        )
        return {"recovers": 0, "hunts": _HUNTS}.get(found.verdict or "", _STICKS)


@dataclass(frozen=True)
class Blemishes:
    """Counts what section 4 avoids among designs of equal poles.

    Gaps and flashes at coils while a relay moves, and stored coils that share their net with
    another load, which shortens their hold.
    """

    timing: Timing
    expansion: Expansion
    _known: _Known = field(default_factory=dict, init=False, repr=False, compare=False)

    def __call__(self, network: Network) -> int:
        return _recalled(self._known, network, self._count)

    def _count(self, network: Network) -> int:
        motion = network_motion(network, self.timing, self.expansion)
        states = [step.state for step in self.expansion.steps]
        shared = len(shared_coils(network, self.timing))
        return len(transits(network, motion, states)) + shared


def _recalled(known: _Known, network: Network, judge: Callable[[Network], int]) -> int:
    """A judgement, remembered: a search weighs its best network again beside every new one."""
    key = (network.poles, tuple(network.loads.items()))
    if key not in known:
        if len(known) >= _REMEMBERED:
            known.clear()
        known[key] = judge(network)
    return known[key]


def shared_coils(network: Network, timing: Timing) -> tuple[str, ...]:
    """Slow coils whose very net feeds another load too."""
    nets = [net for net in network.loads.values() if net is not None]
    slow = {*timing.slow_release, *timing.slow_operate}
    return tuple(
        load
        for load, net in network.loads.items()
        if load in slow and net is not None and nets.count(net) > 1
    )
