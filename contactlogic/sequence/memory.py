"""States that occur twice with different wants: other step orders, then the fewest memory relays.

A relay-wired sequencer sees only the positions of its relays, so a state that is passed twice
and left differently needs something that remembers which time it is.  Moving the relays of a
transition in another order may avoid the state; otherwise memory relays are added, each of which
moves alone between two moves of the others.  Their number is the least, and for that number
their moves are the fewest, both by SAT (the search is small: one bit per relay and step).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from itertools import combinations, islice, permutations, product

from contactlogic.errors import InternalError, Place, TableError
from contactlogic.job.sequence import SequenceTable, moves_to_make
from contactlogic.sequence.steps import (
    Ambiguity,
    Expansion,
    Step,
    ambiguities,
    clash,
    expand,
)

__all__ = ["add_memory", "resolve"]

_ORDERS = 1500  # step orders tried before whole sets of them
_NOTES = 4  # orders that have a sentence each
_MOST = 6  # memory relays at most; more would tell more than 64 occurrences apart
_SECONDS = 20.0  # for making the memory's moves fewer; its number is settled before

Orders = Mapping[tuple[int, int], tuple[int, ...]]


def resolve(table: SequenceTable, *, wired: bool = False) -> Expansion:
    """The expanded list with every ambiguity removed, and notes that say how.

    Args:
        wired: the drives are there already, so that no relay can be added.

    Raises:
        TableError: rows that cannot be used, or an ambiguity where memory is forbidden.
    """
    expansion = expand(table)
    if not ambiguities(expansion):
        return expansion
    orders = _best_orders(table, expansion)
    expansion = expand(table, orders)
    notes = _order_notes(table, orders)
    unclear = ambiguities(expansion)
    if not unclear:
        return replace(expansion, notes=tuple(notes))
    if wired or table.memory == "forbidden":
        raise _forbidden(table, expansion, unclear[0], wired)
    added = add_memory(expansion)
    return replace(added, notes=(*notes, *added.notes))


def _forbidden(
    table: SequenceTable, expansion: Expansion, unclear: Ambiguity, wired: bool
) -> TableError:
    places = [
        f"{'on the way from' if expansion.steps[i].inserted else 'in'} row {expansion.steps[i].row}"
        for i in unclear.steps
    ]
    values = " ".join(str(unclear.state >> i & 1) for i in range(len(expansion.columns)))
    return TableError(
        f"the state {values} ({' '.join(expansion.columns)}) occurs {' and '.join(places)}, but "
        f"{unclear.why}; nothing tells the wiring which time it is",
        place=table.place(expansion.steps[unclear.steps[0]].row),
        hint="make the relay that remembers which time it is a column, with its drive"
        if wired
        else 'allow memory = "allowed", or add a relay that differs between these rows',
    )


def _order_notes(table: SequenceTable, orders: Orders) -> list[str]:
    """Which orders were chosen: a sentence for each, or one for many."""
    chosen = [
        (here, there, ", then ".join(table.columns[i] for i in order))
        for (here, there), order in sorted(orders.items())
    ]
    why = "so that no state occurs twice with different wants"
    if len(chosen) <= _NOTES:
        return [
            f"From row {here} to row {there} the order of moves is {order}, {why}."
            for here, there, order in chosen
        ]
    said = "; ".join(f"from row {here} {order}" for here, _, order in chosen)
    return [f"The order of moves was chosen {why}: {said}."]


def _best_orders(table: SequenceTable, expansion: Expansion) -> Orders:
    """Orders of moves with the least ambiguity left, changing as few transitions as possible.

    Where many must change, all are first changed alike, then one after the other.
    """
    choices = _choices(table, expansion)
    best: Orders = {}
    least = _unclear(expansion)
    for orders in _to_try(choices):
        found = _unclear(expand(table, orders))
        if found < least:
            best, least = orders, found
        if least == (0, 0):
            return best
    improved = True
    while improved:
        improved = False
        for link in sorted(choices):
            for order in choices[link]:
                found = _unclear(expand(table, {**best, link: order}))
                if found < least:
                    best, least, improved = {**best, link: order}, found, True
                if least == (0, 0):
                    return best
    return best


def _to_try(choices: Mapping[tuple[int, int], Sequence[tuple[int, ...]]]) -> Iterator[Orders]:
    """Changes of few transitions, then of all in the same manner."""
    few = (
        dict(zip(links, picked, strict=True))
        for number in range(1, len(choices) + 1)
        for links in combinations(sorted(choices), number)
        for picked in product(*(choices[link] for link in links))
    )
    yield from islice(few, _ORDERS)
    for k in range(max(map(len, choices.values()), default=0)):
        yield {link: orders[min(k, len(orders) - 1)] for link, orders in choices.items()}


def _unclear(expansion: Expansion) -> tuple[int, int]:
    """How bad the ambiguities are: most occurrences of one state, all occurrences."""
    sizes = [len(found.steps) for found in ambiguities(expansion)]
    return (max(sizes, default=0), sum(sizes))


def _choices(
    table: SequenceTable, expansion: Expansion
) -> dict[tuple[int, int], list[tuple[int, ...]]]:
    """Other orders for each transition of several moves that meets an ambiguous state."""
    unclear = {i for found in ambiguities(expansion) for i in found.steps}
    rows = {expansion.steps[i].row for i in unclear}
    count = len(table.rows)
    links = [(here, here % count + 1) for here in range(1, count + (1 if table.repeat else 0))]
    first = {(branch.after, branch.goto): branch for branch in table.branches}
    found = {}
    for link in (*links, *first):
        moves = moves_to_make(table, table.rows[link[0] - 1].state, table.rows[link[1] - 1].state)
        if len(moves) < 2 or link[0] not in rows:
            continue
        head: tuple[int, ...] = ()
        if link in first:
            head = (table.columns.index(first[link].when.removesuffix("'")),)
            moves = tuple(move for move in moves if move not in head)
        outside = [m for m in moves if table.columns[m] in table.inputs]
        inside = [m for m in moves if m not in outside]
        default = (*head, *moves)
        found[link] = [
            order
            for before in permutations(outside)
            for after in permutations(inside)
            if (order := (*head, *before, *after)) != default
        ]
    return {link: orders for link, orders in found.items() if orders}


def add_memory(expansion: Expansion) -> Expansion:
    """Add the fewest memory relays that tell all occurrences of states apart.

    Raises:
        TableError: more occurrences than `_MOST` relays can tell apart.
    """
    least = max(_classes(expansion)) - 1
    for relays in range(max(1, least.bit_length()), _MOST + 1):
        moves = _place(expansion, relays)
        if moves is not None:
            return _with_memory(expansion, relays, moves)
    raise TableError(
        f"{_MOST} memory relays do not tell the occurrences of some state apart",
        place=Place(None, "sequence"),
        hint="add relays of your own that differ between the rows",
    )


def _classes(expansion: Expansion) -> list[int]:
    """For each state that occurs again, how many of its occurrences clash pairwise at least."""
    places: dict[int, list[Step]] = {}
    for step in expansion.steps:
        places.setdefault(step.state, []).append(step)
    sizes = [1]
    for steps in places.values():
        apart: list[Step] = []
        for step in steps:
            if all(clash(expansion.columns, expansion.loads, step, other) for other in apart):
                apart.append(step)
        sizes.append(len(apart))
    return sizes


def _place(expansion: Expansion, relays: int) -> list[list[tuple[int, int]]] | None:
    """Where the memory relays stand and move, or None if so few cannot do it.

    Returns:
        For each step the memory's values on arrival (as a number) and after each of its moves,
        as (values, relay that moves next or -1).
    """
    from contactlogic.search.solver import Session

    coding = _Coding(expansion, relays)
    with Session(coding.clauses) as session:
        if session.solve() != "sat":
            return None
        model = set(session.model())
        best = coding.read(model)
        total = coding.counter(session)
        while True:
            used = sum(len(slots) - 1 for slots in best)
            if used <= 1 or session.solve((-total[used - 1],), seconds=_SECONDS) != "sat":
                return best
            best = coding.read(set(session.model()))


class _Coding:
    """Clauses for the placing of memory relays: values `at` slots and moves between slots.

    Each step has one slot on arrival and one after each of up to `relays` memory moves.
    """

    def __init__(self, expansion: Expansion, relays: int) -> None:
        self.steps = expansion.steps
        self.relays = relays
        self.clauses: list[tuple[int, ...]] = []
        self._last = 0
        slots = range(relays + 1)
        self.at = [[self._new(relays) for _ in slots] for _ in self.steps]
        self.flips = [[self._new(relays) for _ in range(relays)] for _ in self.steps]
        for place in range(len(self.steps)):
            self._moves(place)
            for _, onward in self.steps[place].leaving:
                for one, two in zip(self.at[place][-1], self.at[onward][0], strict=True):
                    self.clauses += [(-one, two), (one, -two)]
        self.clauses += [(-value,) for value in self.at[0][0]]  # released where the list begins
        for first, second in combinations(range(len(self.steps)), 2):
            if self.steps[first].state == self.steps[second].state:
                why = clash(
                    expansion.columns, expansion.loads, self.steps[first], self.steps[second]
                )
                self._tell_apart(first, second, why is not None)

    def _new(self, count: int) -> list[int]:
        self._last += count
        return list(range(self._last - count + 1, self._last + 1))

    def _moves(self, place: int) -> None:
        at, flips = self.at[place], self.flips[place]
        for slot, row in enumerate(flips):
            for one, two in combinations(row, 2):
                self.clauses.append((-one, -two))
            for before, flip, after in zip(at[slot], row, at[slot + 1], strict=True):
                self.clauses += [
                    (-flip, before, after),
                    (-flip, -before, -after),
                    (flip, -before, after),
                    (flip, before, -after),
                ]
            if slot:  # moves come first, then rest
                self.clauses += [(-flip, *flips[slot - 1]) for flip in row]
        for one_relay in zip(*flips, strict=True):
            for one, two in combinations(one_relay, 2):
                self.clauses.append((-one, -two))

    def _tell_apart(self, first: int, second: int, clashing: bool) -> None:
        """In no two slots may the values agree, unless the two go on alike from there."""
        for one, two in product(range(self.relays + 1), repeat=2):
            differ = self._new(self.relays)
            pairs = zip(differ, self.at[first][one], self.at[second][two], strict=True)
            for variable, a, b in pairs:
                self.clauses += [(-variable, a, b), (-variable, -a, -b)]
            if clashing:
                self.clauses.append(tuple(differ))
                continue
            none = [0] * self.relays
            left = self.flips[first][one] if one < self.relays else none
            right = self.flips[second][two] if two < self.relays else none
            for a, b in zip(left, right, strict=True):
                if a:
                    self.clauses.append((*differ, -a, *([b] if b else [])))
                if b:
                    self.clauses.append((*differ, -b, *([a] if a else [])))

    def counter(self, session: object) -> list[int]:
        """Variables that are true where more than so many flips are made (unary counting).

        Sinz (2005), sequential counter: `total[k]` holds if at least `k + 1` flips are made.
        """
        from contactlogic.search.solver import Session

        assert isinstance(session, Session)
        flat = [flip for rows in self.flips for row in rows for flip in row]
        before: list[int] = []
        clauses: list[tuple[int, ...]] = []
        for flip in flat:
            now = self._new(len(before) + 1)
            clauses.append((-flip, now[0]))
            for k, old in enumerate(before):
                clauses += [(-old, now[k]), (-old, -flip, now[k + 1])]
            before = now
        session.add(clauses)
        return before

    def read(self, model: set[int]) -> list[list[tuple[int, int]]]:
        found = []
        for at, flips in zip(self.at, self.flips, strict=True):
            slots = []
            for slot, row in enumerate((*flips, [])):
                value = sum(1 << b for b, variable in enumerate(at[slot]) if variable in model)
                moved = next((b for b, flip in enumerate(row) if flip in model), -1)
                slots.append((value, moved))
                if moved < 0:
                    break
            found.append(slots)
        return found


def _with_memory(
    expansion: Expansion, relays: int, placed: Sequence[Sequence[tuple[int, int]]]
) -> Expansion:
    """The expansion with the memory relays as last columns and their moves as steps."""
    n = len(expansion.columns)
    names = _names(expansion, relays)
    begins = []
    total = 0
    for slots in placed:
        begins.append(total)
        total += len(slots)
    steps: list[Step] = []
    for step, slots in zip(expansion.steps, placed, strict=True):
        for k, (value, moved) in enumerate(slots):
            last = k == len(slots) - 1
            leaving = (
                tuple((mover, begins[onward]) for mover, onward in step.leaving)
                if last
                else ((n + moved, len(steps) + 1),)
            )
            state = step.state | value << n
            steps.append(Step(state, step.row, step.inserted or not last, step.loads, leaving))
    done = replace(
        expansion,
        columns=(*expansion.columns, *names),
        steps=tuple(steps),
        memory=names,
    )
    if ambiguities(done):
        raise InternalError("memory relays were added but a state is still ambiguous")
    return replace(done, notes=tuple(_notes(done, n)))


def _names(expansion: Expansion, relays: int) -> tuple[str, ...]:
    taken = {name.lower() for name in (*expansion.columns, *expansion.loads)}
    stem = next(s for s in ("M", "MEM", "MEMORY", "MEMORY_") if f"{s}1".lower() not in taken)
    free = (f"{stem}{k}" for k in range(1, 1000) if f"{stem}{k}".lower() not in taken)
    return tuple(name for name, _ in zip(free, range(relays), strict=False))


def _notes(expansion: Expansion, n: int) -> Iterator[str]:
    """What was added, and when doing it by hand can be better."""
    for i in range(n, len(expansion.columns)):
        turns = [
            f"{'releases' if step.state >> i & 1 else 'operates'} "
            f"{'after' if step.inserted else 'in'} row {step.row}"
            for step in expansion.steps
            if step.movers == (i,)
        ]
        yield f"Memory relay {expansion.columns[i]} was added: it {', '.join(turns)}."
    added = sum(step.movers[0] >= n for step in expansion.steps if step.movers)
    yield (
        f"The memory relays move in {added} steps of their own. A relay that you place by hand "
        "can do better if it moves where the sequence may pass through further states, or if an "
        "existing relay can be wired to differ between the rows that look alike."
    )
