"""Builds the catalogue of least networks of up to four relays.

    python -m contactlogic.search.catalogue_build             what is missing, then the table
    python -m contactlogic.search.catalogue_build --table     print the distribution of the table

Every class (402, see `classes`) is searched for each form by `cheapest`.  Functions of three relays
come first: holding relays of a network at one position leaves a network for what is left of its
function, so what the cofactors need is needed on the other relays together, and most ways to
share poles out fall at once.

Finished searches are kept line by line in a file of results, so a build that was stopped goes on
where it was.  All limits are in conflicts of the solver, none in seconds, so that equal code gives
an equal table.
"""

from __future__ import annotations

import argparse
from collections import Counter
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import ProcessPoolExecutor, as_completed
from dataclasses import replace
from itertools import combinations, count, product
from pathlib import Path
from time import monotonic

from contactlogic.errors import ProofFailed
from contactlogic.ladder.arrange import Rules, arrange
from contactlogic.ladder.build import Edge, lay, pair
from contactlogic.ladder.build import build as build_ladder
from contactlogic.ladder.plan import plan_rungs
from contactlogic.ladder.recognise import series_parallel
from contactlogic.ladder.small import least_trees
from contactlogic.ladder.synthesise import LadderTask, best_ladder
from contactlogic.network import Network
from contactlogic.search.catalogue import (
    FORMS,
    Entry,
    Form,
    contacts_of,
    entries,
    from_lines,
    order,
    size,
    to_lines,
)
from contactlogic.search.cheapest import Wish, cheapest
from contactlogic.search.classes import FUNCTIONS, RELAYS, classes
from contactlogic.search.encoding import Ends
from contactlogic.search.goal import Goal
from contactlogic.search.mesh import SUPPLY, Mesh, from_network, to_network
from contactlogic.search.tallies import least_tallies
from contactlogic.search.windows import wander
from contactlogic.truth import Target, cofactor, support

Found = dict[tuple[Form, int], Entry]

_NAMES = tuple("ABCD")
_SUPPLY, _LOAD = "L", "X"
_PASSES = (20_000, 150_000)  # conflicts on one number of poles, for classes still open
_TREES = 60  # of fewest contacts, looked at for one of as few poles
_WINDOWS = 60  # tried for a class that is not proved in the first pass
_SECONDS = 600.0  # an upper limit that the ladders of four relays never come near


# -- bounds from cofactors


def _cofactors(table: int) -> Iterator[tuple[tuple[int, ...], list[int]]]:
    """Sets of relays, and what is left of the function when all others stand still."""
    for width in range(1, RELAYS):
        for relays in combinations(range(RELAYS), width):
            still = [i for i in range(RELAYS) if i not in relays]
            left = []
            for values in product((0, 1), repeat=len(still)):
                rest = table
                for relay, value in zip(still, values, strict=True):
                    rest = cofactor(rest, RELAYS, relay, value)
                left.append(rest)
            yield relays, left


def _demands(table: int, form: Form, found: Found) -> dict[tuple[int, ...], int]:
    """For sets of relays, the size that every network of this form has on them together."""
    return {
        relays: max(found[form, classes().leader(rest)].at_least for rest in left)
        for relays, left in _cofactors(table)
        if table not in left
    }


# -- one search


def search(table: int, form: Form, found: Found, conflicts: int) -> Entry:
    """The best network and the best bound for one class.

    Args:
        table: the leader, not constant.
        form: what to minimise.
        found: entries of every function of fewer relays in all forms, the bridge of this function
            unless that is wanted, and what an earlier pass found.
        conflicts: limit on each number of poles; bridges have none.
    """
    earlier = found.get((form, table))
    bound = 0 if earlier is None else earlier.at_least
    contacts: dict[str, int] = {}
    if form == "ladder":
        bound = max(bound, found["bridge", table].at_least)
        contacts = least_tallies(table)
    elif form == "bridge":
        contacts = {
            "".join("a" if i in relays else "o" for i in range(RELAYS)): need
            for relays, need in _demands(table, "contacts", found).items()
        }
    wish = Wish(
        table,
        ladder=form == "ladder",
        singly=form == "contacts",
        poles=_demands(table, form, found),
        contacts=contacts,
        conflicts=None if form == "bridge" else conflicts,
    )
    if earlier is None:
        known = list(_known(table, form, found))
    else:
        known = [earlier.mesh, _walked(wish, earlier)]
    best = min(known, key=lambda mesh: order(form, mesh), default=None)
    mesh, bound = _climb(wish, bound, best)
    if best is None and mesh is None:
        best = _ladder(table)  # the solver does not find one soon
    elif best is not None and mesh is None and earlier is not None and wish.ladder:
        level = len(best.poles)  # not from the solver: its ties may be bettered
        mesh = cheapest(replace(wish, at_least=level), most=level).mesh
    mesh = None if mesh is None else _numbered(_paired(mesh) if wish.singly else mesh)
    if best is None or (mesh is not None and order(form, mesh) < order(form, best)):
        best = mesh
    assert best is not None
    return Entry(best, bound, size(form, best) == bound)


def _climb(wish: Wish, bound: int, best: Mesh | None) -> tuple[Mesh | None, int]:
    """The first network met on the way from `bound` up to what is known, and the new bound.

    With nothing known it ends at the first number of poles that is left open.
    """
    proved = True
    for level in count(bound):
        if best is not None and level >= (contacts_of(best) if wish.singly else len(best.poles)):
            break
        answer = cheapest(replace(wish, at_least=level), most=level)
        if answer.mesh is not None:
            return answer.mesh, bound
        proved = proved and answer.at_least > level
        if proved:
            bound = answer.at_least
        elif best is None:
            break
    return None, bound


def _known(table: int, form: Form, found: Found) -> Iterator[Mesh]:
    """Networks that cost little to come by."""
    if form == "bridge":
        return
    bridge = found["bridge", table].mesh
    if form == "contacts":
        yield bridge
        for tree in least_trees(table, 1):
            edges = lay(tree, _SUPPLY, _LOAD, _NAMES, (f"n{k}" for k in count()))
            yield _mesh(edges)
    elif series_parallel(to_network(bridge, _NAMES, [_LOAD])):
        yield bridge


def _walked(wish: Wish, entry: Entry) -> Mesh:
    """The best network on a walk through windows from an entry that is not proved."""
    goal = Goal(
        RELAYS,
        (Target(RELAYS, wish.table),),
        ladder=wish.ladder,
        separate=dict.fromkeys(range(RELAYS), (99, 99)) if wish.singly else {},
    )
    start = _singles(entry.mesh) if wish.singly else entry.mesh
    for found in wander([start], goal, wish.table, _WINDOWS, entry.at_least):
        start = found.best or start
    return _numbered(_paired(start) if wish.singly else start)


def _singles(mesh: Mesh) -> Mesh:
    """The same makes and breaks, each a pole of its own."""
    throws = [
        half
        for pole in mesh.poles
        for half in (pole._replace(make=None), pole._replace(break_=None))
        if half.make is not None or half.break_ is not None
    ]
    return Mesh(tuple(throws), mesh.feeds)


def _ladder(table: int) -> Mesh:
    """A good ladder by factoring and pairing."""
    task = LadderTask(_NAMES, {_LOAD: Target(RELAYS, table)}, {})
    return _numbered(from_network(best_ladder(task, seconds=_SECONDS).network))


def _mesh(edges: Iterable[Edge], fed: str = _LOAD) -> Mesh:
    """Contacts between named nets in as few poles as the nets allow; the load is on net `fed`."""
    network = Network(_NAMES, _SUPPLY, {_LOAD: fed}, pair(edges, _NAMES))
    return _numbered(from_network(network))


def _numbered(mesh: Mesh) -> Mesh:
    """The same mesh with the load on net 1 and inner nets numbered as they come."""
    number: dict[int | None, int | None] = {None: None, SUPPLY: SUPPLY, mesh.feeds[0]: 1}
    poles = []
    for pole in sorted(mesh.poles, key=lambda each: each.relay):
        for net in pole[1:]:
            number.setdefault(net, len(number) - 1)
        common = number[pole.common]
        assert common is not None
        poles.append(Ends(pole.relay, common, number[pole.make], number[pole.break_]))
    return Mesh(tuple(poles), (1,))


def _paired(mesh: Mesh) -> Mesh:
    """The same contacts in as few poles as their nets allow."""
    network = to_network(mesh, _NAMES, [_LOAD])
    fed = network.loads[_LOAD]
    assert fed is not None
    return _mesh((Edge(c.relay, c.make, c.common, c.throw) for c in network.contacts()), fed)


# -- the whole table


def build(results: Path, workers: int, tell: Callable[[str], None]) -> Found:
    """Search for what is still missing, keep it in `results`, and return all entries."""
    found = from_lines(results.read_text("ascii").splitlines() if results.exists() else ())
    start = monotonic()

    def keep(table: int, form: Form, entry: Entry) -> None:
        goal = Goal(RELAYS, (Target(RELAYS, table),), ladder=form == "ladder")
        if not goal.accepts(entry.mesh):
            raise ProofFailed(f"the {form} found for {table:04x} is not right")
        found[form, table] = entry
        with results.open("a", encoding="ascii") as file:
            file.writelines(line + "\n" for line in to_lines({(form, table): entry}))

    small = [table for table in classes().leaders if len(support(table, RELAYS)) < RELAYS]
    for table in small:
        for form in FORMS:
            if (form, table) not in found:
                keep(table, form, search(table, form, found, _PASSES[-1]))
    base = {(form, table): found[form, table] for form in FORMS for table in small}
    rest = [table for table in classes().leaders if table not in small]
    with ProcessPoolExecutor(workers) as pool:
        for turn, form in product(_PASSES, FORMS):
            todo = [
                table
                for table in rest
                if (form, table) not in found
                or (turn != _PASSES[0] and not found[form, table].proved)
            ]
            jobs = {}
            for table in todo:
                own = {(f, table): found[f, table] for f in FORMS if (f, table) in found}
                jobs[pool.submit(search, table, form, base | own, turn)] = table
            for k, job in enumerate(as_completed(jobs), start=1):
                table, entry = jobs[job], job.result()
                keep(table, form, entry)
                tell(
                    f"{monotonic() - start:6.0f} s  {form} {k}/{len(todo)}  {table:04x}: "
                    f"{size(form, entry.mesh)}, at least {entry.at_least}"
                )
    for table in classes().leaders:  # fewest contacts may go with fewest poles: fewer springs
        bridge, contacts = found["bridge", table], found["contacts", table]
        if order("bridge", contacts.mesh) < order("bridge", bridge.mesh):
            found["bridge", table] = replace(bridge, mesh=contacts.mesh)
    for table in classes().leaders:
        ladder = found["ladder", table]
        for mesh in _fewest_contacts(table):
            if order("ladder", mesh) < order("ladder", ladder.mesh):
                ladder = found["ladder", table] = replace(ladder, mesh=mesh)
    return found


def _fewest_contacts(table: int) -> Iterator[Mesh]:
    """Ladders of the fewest contacts there are; most have the fewest poles as well."""
    if table in (0, FUNCTIONS - 1):
        return
    for tree in least_trees(table, _TREES):
        arranged = arrange(plan_rungs([tree], share=False), Rules())
        if arranged is not None:
            yield _numbered(from_network(build_ladder(arranged.plan, _NAMES, [_LOAD])))


def distribution(found: Found) -> str:
    """How many of the 65536 functions need how many poles or contacts, as a table in Markdown."""
    members = Counter(int(number) for number in classes().number)
    tally: dict[Form, Counter[int]] = {form: Counter() for form in FORMS}
    proved: dict[Form, Counter[bool]] = {form: Counter() for form in FORMS}
    for number, leader in enumerate(classes().leaders):
        for form in FORMS:
            entry = found[form, leader]
            tally[form][size(form, entry.mesh)] += members[number]
            proved[form][entry.proved] += 1
    most = max(max(counts) for counts in tally.values())
    lines = [
        "| poles or contacts | bridge, poles | ladder, poles | bridge, contacts |",
        "|---|---|---|---|",
    ]
    for k in range(most + 1):
        cells = (str(tally[form][k] or "") for form in FORMS)
        lines.append(f"| {k} | " + " | ".join(cells) + " |")
    shares = (f"{proved[form][True]} of {len(classes().leaders)}" for form in FORMS)
    lines.append("| classes proved | " + " | ".join(shares) + " |")
    return "\n".join(lines)


def main() -> None:
    """Build, or print the distribution."""
    data = Path(__file__).parent.parent / "data" / "catalogue.txt"
    parser = argparse.ArgumentParser(description="Build the catalogue of least networks.")
    parser.add_argument("--table", action="store_true", help="print the distribution and stop")
    parser.add_argument("--workers", type=int, default=2, help="processes at a time")
    parser.add_argument(
        "--results", type=Path, default=Path("catalogue-results.txt"), help="finished searches"
    )
    args = parser.parse_args()
    if args.table:
        print(distribution(entries()))
        return
    found = build(args.results, args.workers, lambda line: print(line, flush=True))
    data.write_text("".join(line + "\n" for line in to_lines(found)), encoding="ascii")
    print(distribution(found))


if __name__ == "__main__":
    main()
