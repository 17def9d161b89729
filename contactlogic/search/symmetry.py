"""One network of each kind: clauses that strike out redrawings and wasted contacts.

Soundness, in one piece, because clauses that are sound one by one may still clash.  Call two
networks equal if one comes from the other by any of these steps, none of which changes what is
joined among the fixed nets in any row, the number of poles or the number of contacts:

 a. inner nets renamed;
 b. two poles of one kind trade places;
 c. a pole wired on one throw only has that contact turned round;
 d. two changeovers of one relay with one common trade their breaks;
 e. (`ends_alike`) nets 0 and 1 trade names, where every row treats them alike.

Step d may leave a pole with both throws on one net, which no clause allows.  Then its common and
that net are joined in every row, released by one pole and operated by the other.  Such a network
is not looked for: with the two nets made one it has a pole less and does the same, loads of the two
nets sharing it.  (Between boundary nets of a window that cannot be done; windows prove nothing.)

Write a network as the word of its numbers: kinds of all poles, then common, make, break of the
first pole, of the second, and so on, "not wired" being larger than every net.  Each class has a
least word.  Every clause of `break_symmetry` holds for the least word, because otherwise one of
the steps would make it smaller; so all of them together keep at least one network of each class:

 * kinds ascend, and among poles of one kind commons do; with equal commons makes and breaks do
   (b, d);
 * an inner net appears for the first time only after the inner net numbered before it: trading
   the two names would lower the first place where they differ (a); the same for 1 after 0 (e);
 * a pole wired on one throw has its common at its lower net (c);
 * an unwired pole has its common at net 0.

`strike_waste` leaves out networks that do not have the fewest poles, or among those the fewest
contacts.  Its clauses speak only of properties that steps a to e keep, so they go together with
the least word of a class.  It may be used only where a network with fewer poles is excluded (P - 1
refuted) or is itself a solution of the clauses (spare poles); its reasons are given below.
"""

from __future__ import annotations

from collections.abc import Collection
from itertools import combinations

from contactlogic.search.encoding import Encoding, Kind

__all__ = ["break_symmetry", "order_throws", "strike_waste"]


def break_symmetry(encoding: Encoding, *, ends_alike: bool = False) -> None:
    """Add the clauses that keep the least word of each class."""
    _sort_poles(encoding)
    _lower_common(encoding)
    _number_nets(encoding, ends_alike)


def _sort_poles(encoding: Encoding) -> None:
    add = encoding.clauses.append
    for pole in range(len(encoding.kind) - 1):
        mine, next_ = encoding.kind[pole], encoding.kind[pole + 1]
        for kind, literal in mine.items():
            for other, theirs in next_.items():
                if other < kind:
                    add([-literal, -theirs])
        for kind in sorted(set(mine) & set(next_)):
            _ascend(encoding, pole, [-mine[kind], -next_[kind]])


def _ascend(encoding: Encoding, pole: int, guard: list[int]) -> None:
    add = encoding.clauses.append
    here, there = encoding.common[pole], encoding.common[pole + 1]
    same = encoding.new()
    for net, literal in enumerate(there):
        add([*guard, -literal, *here[: net + 1]])
        add([-literal, -here[net], same])
    for mine, theirs in (
        (encoding.make[pole], encoding.make[pole + 1]),
        (encoding.break_[pole], encoding.break_[pole + 1]),
    ):
        if mine.at and theirs.at:
            for net, literal in enumerate(theirs.at):
                add([*guard, -same, -literal, *mine.at[: net + 1]])


def _lower_common(encoding: Encoding) -> None:
    add = encoding.clauses.append
    for pole, common in enumerate(encoding.common):
        make, break_ = encoding.make[pole], encoding.break_[pole]
        for wired, other in ((make, break_), (break_, make)):
            for net, literal in enumerate(wired.at):
                add([-literal, -other.none, *common[:net]])
        add([-make.none, -break_.none, common[0]])


def _number_nets(encoding: Encoding, ends_alike: bool) -> None:
    add = encoding.clauses.append
    pairs = [(net, net + 1) for net in range(encoding.fixed, encoding.nets - 1)]
    if ends_alike:
        pairs.append((0, 1))
    for before, after in pairs:
        seen: int | None = None  # whether `before` stands on an earlier pole
        for pole, common in enumerate(encoding.common):
            make, break_ = encoding.make[pole].at, encoding.break_[pole].at
            ends = [[] if seen is None else [seen]]
            for side in (common, make, break_):
                if side:
                    add([-side[after], *ends[-1]])
                    ends.append([*ends[-1], side[before]])
            if pole + 1 < len(encoding.common):
                now = encoding.new()
                add([-now, *ends[-1]])
                seen = now


def order_throws(encoding: Encoding, relays: Collection[int]) -> None:
    """On the first pole of each of these relays, which must be given, the make's net is the lower.

    For relays i such that some set of relays with i as its first may be negated together without
    changing what is wanted.  Trading make and break on all poles of the set is one more step (f)
    between equal networks; the first pole it changes is the first of relay i, so the least word
    has the lower net at its make there.
    """
    add = encoding.clauses.append
    done: set[int] = set()
    for pole, kinds in enumerate(encoding.choices):
        relay = kinds[0].relay
        if relay in relays and relay not in done:
            done.add(relay)
            add([-encoding.make[pole].none])
            for net, literal in enumerate(encoding.break_[pole].at):
                add([-literal, *encoding.make[pole].at[:net]])


def strike_waste(encoding: Encoding) -> None:
    """Leave out networks that could lose a pole or a contact; only with P - 1 refuted."""
    _touched_twice(encoding)
    _no_twins(encoding)
    _no_unpaired(encoding)


def _touches(encoding: Encoding, pole: int, net: int) -> list[int]:
    sides = (encoding.common[pole], encoding.make[pole].at, encoding.break_[pole].at)
    return [side[net] for side in sides if side]


def _relays(encoding: Encoding, pole: int) -> set[int]:
    return {kind.relay for kind in encoding.kind[pole]}


def _touched_twice(encoding: Encoding) -> None:
    """Every inner net in use touches two poles, and poles of two relays where relays are given.

    One pole only: a throw there is a dead end and its contact can go; a common there joins its
    throws to nothing in any row and the pole can go.

    One relay only, with at most two poles at the net w.  A make and a break in series never
    conduct: both can go.  Makes u-w-v conduct as one make u-v.  So: two single contacts go or
    become one.  A changeover with common at w and a throw of another: released or operated, w is
    a dead end once and a plain joint once, and one contact does for the two.  Two changeovers
    with common at w: a make between their makes' nets and a break between their breaks' nets
    do, two contacts instead of four.  Throws of two changeovers on w, both makes: move one
    throw over to the other's common, one contact less; a make and a break: both can go.
    (Three changeovers with commons at w are no waste: they may have three nets either side.)
    """
    add = encoding.clauses.append
    poles = range(len(encoding.kind))
    for net in range(encoding.fixed, encoding.nets):
        touches = [_touches(encoding, pole, net) for pole in poles]
        for pole in poles:
            others = [lit for other in poles if other != pole for lit in touches[other]]
            for literal in touches[pole]:
                add([-literal, *others])
        groups: dict[int, list[int]] = {}
        for pole in poles:
            if len(_relays(encoding, pole)) != 1:
                return
            groups.setdefault(encoding.choices[pole][0].relay, []).append(pole)
        for group in groups.values():
            if len(group) != 2:
                continue
            others = [lit for pole in poles if pole not in group for lit in touches[pole]]
            for literal in touches[group[0]]:
                add([-literal, *others])


def _no_twins(encoding: Encoding) -> None:
    """No two makes, and no two breaks, of one relay between the same two nets: one can go."""
    add = encoding.clauses.append
    for p, q in combinations(range(len(encoding.kind)), 2):
        if _relays(encoding, p) != _relays(encoding, q) or len(_relays(encoding, p)) != 1:
            continue
        for mine, theirs in (
            (encoding.make[p].at, encoding.make[q].at),
            (encoding.break_[p].at, encoding.break_[q].at),
        ):
            if not mine or not theirs:
                continue
            for a, b in combinations(range(encoding.nets), 2):
                for u, v in ((a, b), (b, a)):
                    add([-encoding.common[p][u], -mine[v], -encoding.common[q][u], -theirs[v]])
                    add([-encoding.common[p][u], -mine[v], -encoding.common[q][v], -theirs[u]])


def _no_unpaired(encoding: Encoding) -> None:
    """A lone make and a lone break of one relay at one net pair up: a pole less."""
    add = encoding.clauses.append
    for p, q in combinations(range(len(encoding.kind)), 2):
        if _relays(encoding, p) != _relays(encoding, q) or len(_relays(encoding, p)) != 1:
            continue
        relay = encoding.choices[p][0].relay
        if encoding.choices[p] != (Kind(relay),) or encoding.choices[q] != (Kind(relay),):
            continue
        for one, two in ((p, q), (q, p)):
            lone = [-encoding.break_[one].none, -encoding.make[two].none]
            lone += [encoding.make[one].none, encoding.break_[two].none]  # wired at all
            for net in range(encoding.nets):
                for mine in (encoding.common[one], encoding.make[one].at):
                    for theirs in (encoding.common[two], encoding.break_[two].at):
                        add([*lone, -mine[net], -theirs[net]])
