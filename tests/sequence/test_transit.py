"""Gaps and flashes while contacts move, against trying every mixture in every state."""

from __future__ import annotations

from itertools import product

import networkx as nx
from hypothesis import given, settings
from strategies import networks

from contactlogic.job.sequence import Timing
from contactlogic.network import Network, Pole
from contactlogic.sequence.prove import network_motion
from contactlogic.sequence.transit import transits


def is_fed(network, state, net, mover=None, mixture=()):
    """Whether a net is joined to the supply with the mover's poles as in `mixture`."""
    joined = nx.Graph()
    joined.add_nodes_from([net, network.supply])
    place = {name: i for i, name in enumerate(network.relays)}
    own = iter(mixture)
    for pole in network.poles:
        if pole.relay == mover:
            throw = {"make": pole.make, "break": pole.break_, "open": None}[next(own)]
        else:
            throw = pole.make if state >> place[pole.relay] & 1 else pole.break_
        if throw is not None:
            joined.add_edge(pole.common, throw)
    return nx.has_path(joined, net, network.supply)


def mixtures_of(network, mover):
    count = sum(pole.relay == mover for pole in network.poles)
    return list(product(("make", "break", "open"), repeat=count))


def by_trying(network):
    """{(mover, coil, kind): states} by the definition, every mixture in every state."""
    n = len(network.relays)
    coils = {r: network.loads[r] for r in network.relays if network.loads.get(r)}
    found = {}
    for state in range(2**n):
        fed = {r: is_fed(network, state, net) for r, net in coils.items()}
        driven = {r: fed.get(r, False) for r in network.relays if r in network.loads}
        pending = [i for i, r in enumerate(network.relays) if r in driven]
        pending = [i for i in pending if driven[network.relays[i]] != bool(state >> i & 1)]
        if not pending:  # at rest only inputs move
            pending = [i for i, r in enumerate(network.relays) if r not in driven]
        for i in pending:
            mover = network.relays[i]
            for coil, net in coils.items():
                after = is_fed(network, state ^ 1 << i, net)
                if after != fed[coil]:
                    continue
                mixtures = mixtures_of(network, mover)
                between = [is_fed(network, state, net, mover, m) for m in mixtures]
                if after and not all(between):
                    found.setdefault((mover, coil, "gap"), []).append(state)
                if not after and any(between):
                    found.setdefault((mover, coil, "flash"), []).append(state)
    return found


@given(networks(relays=3, poles=5, nets=4, loads=1))
@settings(max_examples=100)
def test_transits_agree_with_trying_every_mixture(network):
    feeds = [*network.nets()]
    loads = {r: feeds[i % len(feeds)] for i, r in enumerate(network.relays) if i != 1}
    network = Network(network.relays, network.supply, loads, network.poles)
    motion = network_motion(network, Timing())
    found = transits(network, motion, (0, 1))
    expected = by_trying(network)
    assert {(t.mover, t.coil, t.kind): t.states for t in found} == {
        key: len(states) for key, states in expected.items()
    }
    for transit in found:
        states = expected[transit.mover, transit.coil, transit.kind]
        assert transit.in_sequence == len({0, 1} & set(states))
        assert transit.example == min({0, 1} & set(states) or states)


def test_a_changeover_that_hands_over_a_feed_leaves_a_gap():
    # B is fed over A's make or A's break: always, but not while A moves.
    network = Network(
        ("A", "B"),
        "L",
        {"A": "a", "B": "b"},
        (Pole("A", 1, "b", "L", "L"), Pole("B", 1, "L", "a", None)),
    )
    (gap,) = transits(network, network_motion(network, Timing()))
    assert (gap.kind, gap.mover, gap.coil) == ("gap", "A", "B")


def test_two_changeovers_of_one_relay_can_let_a_flash_through():
    # A is fed only if the first pole is still on break and the second already on make.
    network = Network(
        ("B", "A"),
        "L",
        {"A": "a", "B": None},
        (
            Pole("B", 1, "L", None, "x"),
            Pole("B", 2, "x", "a", None),
        ),
    )
    (flash,) = transits(network, network_motion(network, Timing()))
    assert (flash.kind, flash.mover, flash.coil) == ("flash", "B", "A")
