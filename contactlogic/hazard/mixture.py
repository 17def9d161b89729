"""One relay in transit: which rows some mixture of its contacts feeds, or leaves unfed.

While a relay moves, each of its poles is old, open or new, independently of the others; the rest
of the network stands still.  More contacts closed never feed less, so the 3^k mixtures of k poles
need no enumeration.  A net can be *left unfed* iff it is with every pole open.  It can be *fed*
iff it is with every pole on one of its throws; among those 2^k mixtures the search is lazy: take
every undecided changeover as closed both ways; where that feeds nothing, nothing does; where a
shortest path uses no pole twice, its mixture feeds all rows it feeds; only a pole whose make and
break both lie on the path is decided, once each way.

A make-before-break pole (form D) is instead on its old throw, on both, or on its new one: it is
closed both ways where most is fed, and where least is fed it is on one of the two, decided in the
same lazy way.

Rows are the bits of Python ints; any set of settings will do that does not depend on the relay
that moves.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Collection, Iterable, Mapping, Sequence

from contactlogic.network import Contact, Pole

__all__ = ["Edge", "Transit", "halves"]

Edge = tuple[str, str, int]
"""Two nets and the rows in which a contact between them is closed."""

_Choice = Mapping[Pole, bool]  # poles decided: on make (True) or on break


def halves(pole: Pole) -> tuple[Contact, ...]:
    """The pole's wired contacts, make first."""
    ends = ((True, pole.make), (False, pole.break_))
    return tuple(
        Contact(pole.relay, make, pole.common, throw, pole)
        for make, throw in ends
        if throw is not None
    )


class Transit:
    """A network while the given poles move and all other contacts stand still.

    Args:
        supply: the net that feeds.
        fixed: contacts of all other relays.
        moving: poles of the relay that moves.
        rows: all rows, as bits.
        joining: those of `moving` that make before they break.
    """

    def __init__(
        self,
        supply: str,
        fixed: Sequence[Edge],
        moving: Sequence[Pole],
        rows: int,
        joining: Collection[Pole] = (),
    ) -> None:
        self.supply = supply
        self.moving = tuple(moving)
        self.rows = rows
        self.joining = frozenset(pole for pole in joining if None not in (pole.make, pole.break_))
        self._near: dict[str, list[tuple[str, int]]] = {supply: []}
        for one, two, closed in fixed:
            if one != two and closed:
                self._near.setdefault(one, []).append((two, closed))
                self._near.setdefault(two, []).append((one, closed))
        self._steady: dict[str, dict[str, int]] = {}
        self._mixtures: dict[str, list[dict[str, int]]] = {}

    def live(self, contacts: Iterable[Contact], source: str | None = None) -> dict[str, int]:
        """Rows in which each net is joined to `source` with these contacts of the mover closed.

        Nets never joined are left out.
        """
        start = self.supply if source is None else source
        if start not in self._steady:
            found = {start: self.rows}
            self._spread(found, [start], {})
            self._steady[start] = found
        joined = dict(self._steady[start])
        more: dict[str, list[str]] = {}
        for contact in contacts:
            more.setdefault(contact.common, []).append(contact.throw)
            more.setdefault(contact.throw, []).append(contact.common)
        if more:
            self._spread(joined, [net for net in more if net in joined], more)
        return joined

    def _spread(
        self, joined: dict[str, int], sources: Sequence[str], more: Mapping[str, Sequence[str]]
    ) -> None:
        """Join on from the sources to the fixed point; breadth first, each net once a round."""
        waiting = dict.fromkeys(sources)
        while waiting:
            following: dict[str, None] = {}
            for net in waiting:
                here = joined[net]
                for other, closed in self._near.get(net, ()):
                    new = here & closed & ~joined.get(other, 0)
                    if new:
                        joined[other] = joined.get(other, 0) | new
                        following[other] = None
                for other in more.get(net, ()):
                    new = here & ~joined.get(other, 0)
                    if new:
                        joined[other] = joined.get(other, 0) | new
                        following[other] = None
            waiting = following

    def steady(self, operated: bool, source: str | None = None) -> dict[str, int]:
        """Rows in which each net is joined to `source` with the mover at rest at one end."""
        at_rest = (half for pole in self.moving for half in halves(pole) if half.make == operated)
        return self.live(at_rest, source)

    def with_all_closed(self, source: str | None = None) -> dict[str, int]:
        """As `live` with every contact of the mover closed: what no mixture can exceed."""
        return self.live((half for pole in self.moving for half in halves(pole)), source)

    def can_feed(
        self, net: str, rows: int, *, open_: Collection[Pole] = (), source: str | None = None
    ) -> int:
        """Those of `rows` in which some mixture joins `net` to `source`.

        Args:
            open_: poles of the mover held open on both sides.
        """
        start = self.supply if source is None else source
        found = 0
        if not open_:
            for known in self._mixtures.get(start, ()):
                found |= known.get(net, 0)
        waiting: list[tuple[_Choice, int]] = [({}, rows)]
        while waiting:
            choice, left = waiting.pop()
            contacts = self._most(choice, open_)
            left &= ~found & self.live(contacts, start).get(net, 0)
            while left:
                row = left & -left
                path = self._path(start, net, row, contacts)
                pole = _used_twice(path, self.joining)
                if pole is not None:
                    waiting += [({**choice, pole: make}, left) for make in (False, True)]
                    break
                mixture = self._mixture(choice, path, open_)
                fed = self.live(mixture, start)
                if not open_:
                    self._mixtures.setdefault(start, []).append(fed)
                found |= fed.get(net, 0)
                left &= ~found
        return found & rows

    def can_leave(self, net: str, rows: int, *, source: str | None = None) -> int:
        """Those of `rows` in which some mixture leaves `net` apart from `source`."""
        found = 0
        waiting: list[tuple[_Choice, int]] = [({}, rows)]
        while waiting:
            choice, left = waiting.pop()
            decided = [h for pole, make in choice.items() for h in halves(pole) if h.make == make]
            left &= ~found & ~self.live(decided, source).get(net, 0)
            if not left:
                continue
            undecided = sorted(
                (pole for pole in self.joining if pole not in choice),
                key=lambda pole: (pole.relay, pole.number),
            )
            closed = [*decided, *(half for pole in undecided for half in halves(pole))]
            sure = left & ~self.live(closed, source).get(net, 0)
            found |= sure
            if left & ~sure and undecided:
                waiting += [({**choice, undecided[0]: make}, left) for make in (False, True)]
            elif not undecided:
                found |= left
        return found & rows

    def feeding(self, net: str, row: int, source: str | None = None) -> tuple[Contact, ...]:
        """A least set of the mover's contacts that, closed together, feed `net` in one row.

        Args:
            row: the row's bit; some mixture feeds the net there (`can_feed`).

        Without any one of them, and the mover's others open, the net is not fed.
        """
        start = self.supply if source is None else source
        waiting: list[_Choice] = [{}]
        while waiting:
            choice = waiting.pop()
            contacts = self._most(choice, ())
            if not self.live(contacts, start).get(net, 0) & row:
                continue
            path = self._path(start, net, row, contacts)
            pole = _used_twice(path, self.joining)
            if pole is not None:
                waiting += [{**choice, pole: make} for make in (False, True)]
                continue
            kept = list(path)
            for contact in path:
                fewer = [other for other in kept if other != contact]
                if self.live(fewer, start).get(net, 0) & row:
                    kept = fewer
            return tuple(sorted(kept, key=lambda half: half.pole.number))
        raise ValueError("no mixture feeds this net in this row")

    def holding(self, net: str, row: int) -> tuple[Pole, ...]:
        """A least set of the mover's poles that, open together, leave `net` unfed in one row.

        Args:
            row: the row's bit; the net is unfed there with every pole open.

        They do so whatever the mover's other poles do; no fewer of them would.
        """
        kept = list(self.moving)
        for pole in self.moving:
            fewer = [other for other in kept if other != pole]
            if not self.can_feed(net, row, open_=fewer):
                kept = fewer
        return tuple(kept)

    def _most(self, choice: _Choice, open_: Collection[Pole]) -> list[Contact]:
        """Contacts that may be closed together as far as decided."""
        return [
            half
            for pole in self.moving
            if pole not in open_
            for half in halves(pole)
            if pole in self.joining or choice.get(pole, half.make) == half.make
        ]

    def _mixture(
        self, choice: _Choice, path: Sequence[Contact], open_: Collection[Pole]
    ) -> list[Contact]:
        """A mixture with the path's contacts closed and every other pole on some throw."""
        on_path = {half.pole: half.make for half in path}
        closed: list[Contact] = []
        for pole in self.moving:
            if pole in open_:
                continue
            both = halves(pole)
            if pole in self.joining or len(both) == 1:
                closed += both
            else:
                make = on_path.get(pole, choice.get(pole, True))
                closed += [half for half in both if half.make == make]
        return closed

    def _path(
        self, source: str, net: str, row: int, contacts: Sequence[Contact]
    ) -> tuple[Contact, ...]:
        """The mover's contacts on a path of fewest contacts in one row; the path exists."""
        ends: dict[str, list[tuple[str, Contact | None]]] = {}
        for contact in contacts:
            ends.setdefault(contact.common, []).append((contact.throw, contact))
            ends.setdefault(contact.throw, []).append((contact.common, contact))
        came: dict[str, tuple[str, Contact | None]] = {source: (source, None)}
        waiting = deque([source])
        while net not in came:
            here = waiting.popleft()
            steps = [(other, None) for other, closed in self._near.get(here, ()) if closed & row]
            for other, by in [*steps, *ends.get(here, ())]:
                if other not in came:
                    came[other] = (here, by)
                    waiting.append(other)
        path = []
        while net != source:
            net, by = came[net]
            if by is not None:
                path.append(by)
        return tuple(path)


def _used_twice(path: Sequence[Contact], joining: Collection[Pole]) -> Pole | None:
    """A pole both of whose contacts lie on the path, None if there is none that may not."""
    seen: dict[Pole, bool] = {}
    for contact in path:
        if contact.pole in seen and contact.pole not in joining:
            return contact.pole
        seen[contact.pole] = contact.make
    return None
