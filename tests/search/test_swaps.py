"""A single pole in place of a few: right whenever found, and found whenever there is one."""

from __future__ import annotations

from itertools import product
from random import Random

import pytest
from oracles import behaviour

from contactlogic.search.diagrams import diagram
from contactlogic.search.encoding import Ends
from contactlogic.search.mesh import Mesh, to_network
from contactlogic.search.swaps import bystander, stand_in
from contactlogic.truth import Target

RELAYS = ("A", "B", "C")


def works(mesh: Mesh, targets: list[Target]) -> bool:
    names = [f"Z{k}" for k in range(len(targets))]
    seen = behaviour(to_network(mesh, RELAYS, names))
    return all(target.accepts(seen[name]) for name, target in zip(names, targets, strict=True))


def some(random: Random) -> tuple[Mesh, list[Target]]:
    targets = []
    for _ in range(random.choice((1, 2, 3))):
        free = random.getrandbits(8) & random.getrandbits(8)
        targets.append(Target(3, random.getrandbits(8) & ~free, free))
    return diagram(targets, random.sample(range(3), 3)), targets


@pytest.mark.parametrize("single", [False, True])
@pytest.mark.parametrize("seed", range(12))
def test_a_pole_stands_in_just_where_one_can(seed: int, single: bool) -> None:
    random = Random(f"{seed} {single}")
    mesh, targets = some(random)
    if len(mesh.poles) < 2:
        return
    assert works(mesh, targets)
    for _ in range(6):
        out = random.sample(range(len(mesh.poles)), random.choice((1, 2)))
        rest = [pole for k, pole in enumerate(mesh.poles) if k not in out]
        taken = [mesh.poles[k] for k in out]
        found = stand_in(mesh, out, targets, random, single=range(3) if single else ())
        if found is not None:
            assert works(Mesh((*rest, *found), mesh.feeds), targets)
            assert not set(found) & set(taken)
            assert len(found) == (not works(Mesh(tuple(rest), mesh.feeds), targets))
            assert not single or all(None in (pole.make, pole.break_) for pole in found)
            continue
        if any(works(Mesh((*rest, pole), mesh.feeds), targets) for pole in taken):
            continue  # it draws lots, and may have drawn the very pole taken out
        nets = sorted(mesh.nets())
        for relay, common, make, break_ in product(range(3), nets, [*nets, None], [*nets, None]):
            pole = Ends(relay, common, make, break_)
            if (single and None not in (make, break_)) or make == break_:
                continue
            assert not works(Mesh((*rest, pole), mesh.feeds), targets), (rest, pole)


def test_a_pole_that_nothing_needs_goes() -> None:
    mesh = Mesh((Ends(0, 0, 1, None), Ends(0, 0, 1, 2)), (1,))
    assert stand_in(mesh, [1], [Target(3, 0b10101010)], Random(1)) == ()


@pytest.mark.parametrize("seed", range(20))
def test_a_bystander_does_no_harm(seed: int) -> None:
    random = Random(seed)
    mesh, targets = some(random)
    for _ in range(5):
        more = bystander(mesh, targets, random, single=() if seed % 2 else range(3))
        if more is not None:
            assert works(Mesh((*mesh.poles, more), mesh.feeds), targets)
            assert seed % 2 or None in (more.make, more.break_)
