"""How many contacts of chosen kinds every ladder of a function needs.

A ladder is a series-parallel tree of contacts.  Count only some of them, say the makes of A, all
contacts of B and none of C: the least such tally over all trees of a function follows from the
recurrence of formula size (Knuth, The Art of Computer Programming 4A, 7.1.2) with weights 1 and 0
on the literals.  A pole of a relay holds at most one make and one break, so tallies bound poles.

A weighting is a word with a letter for each relay: `o` counts nothing, `m` makes, `b` breaks, `a`
all.  Weightings that permuting or negating relays joins share one table over all functions.
"""

from __future__ import annotations

from functools import cache
from itertools import product
from typing import TYPE_CHECKING, Any

from contactlogic.search.classes import FUNCTIONS, RELAYS, Turn, turns
from contactlogic.truth import literal

if TYPE_CHECKING:
    import numpy

    Array = numpy.ndarray[Any, Any]

__all__ = ["MOST_ON_A_POLE", "least_tallies"]

MOST_ON_A_POLE = {"o": 0, "m": 1, "b": 1, "a": 2}
"""Contacts that a weighting's letter counts on one pole at most."""

_UNKNOWN = 255


def least_tallies(table: int) -> dict[str, int]:
    """For every weighting the least tally over all ladders of a function.

    Those that count nothing, or one throw of one relay, say too little and are left out.
    """
    found = {}
    for word in map("".join, product("omba", repeat=RELAYS)):
        if sum(MOST_ON_A_POLE[letter] for letter in word) < 2:
            continue
        turn, model = _turn_to_model(word)
        found[word] = int(_tallies(model)[turn.apply(table)])
    return found


@cache
def _turn_to_model(word: str) -> tuple[Turn, str]:
    """A turn that takes a weighting to the one whose table serves it, without breaks, sorted."""
    places = sorted(range(RELAYS), key=lambda i: word[i].replace("b", "m"))
    order = tuple(places.index(i) for i in range(RELAYS))
    flips = sum(1 << i for i in range(RELAYS) if word[i] == "b")
    model = "".join(sorted(word.replace("b", "m")))
    return Turn(order, flips), model


@cache
def _tallies(model: str) -> Array:
    """The least tally of every function for one weighting of the letters a, m, o."""
    import numpy

    counted: list[int] = []
    free: list[int] = []
    for relay, make in product(range(RELAYS), (True, False)):
        weighs = model[relay] == "a" or (model[relay] == "m" and make)
        (counted if weighs else free).append(literal(RELAYS, relay, make))
    tally = numpy.full(FUNCTIONS, _UNKNOWN, dtype=numpy.uint8)
    nothing = _closure(free)
    tally[nothing] = 0
    least = _least_images(model)
    layers = [nothing]
    leaders = [nothing[:0]]
    while (tally == _UNKNOWN).any():
        k = len(layers)
        reached = numpy.zeros(FUNCTIONS, dtype=bool)
        if k == 1:
            reached[counted] = True
        for i in range(1, k):
            for chosen in leaders[i]:
                reached[layers[k - i] & chosen] = True
                reached[layers[k - i] | chosen] = True
        reached = _spread(reached, least)
        fresh = numpy.flatnonzero(reached & (tally == _UNKNOWN))
        while fresh.size:  # contacts that weigh nothing may be added anywhere
            tally[fresh] = k
            more = numpy.zeros(FUNCTIONS, dtype=bool)
            for one in nothing:
                more[fresh & one] = True
                more[fresh | one] = True
            fresh = numpy.flatnonzero(more & (tally == _UNKNOWN))
        layers.append(numpy.flatnonzero(tally == k))
        leaders.append(layers[k][least[layers[k]] == layers[k]])
    return tally


def _spread(reached: Array, least: Array) -> Array:
    """All functions whose least image is the least image of a reached one."""
    import numpy

    hit = numpy.zeros_like(reached)
    hit[least[reached]] = True
    result: Array = hit[least]
    return result


def _closure(literals: list[int]) -> Array:
    """The constants and all functions made from these literals."""
    import numpy

    found = {0, FUNCTIONS - 1, *literals}
    waiting = list(literals)
    while waiting:
        one = waiting.pop()
        for other in list(found):
            for both in (one & other, one | other):
                if both not in found:
                    found.add(both)
                    waiting.append(both)
    return numpy.array(sorted(found))


def _least_images(model: str) -> Array:
    """For every function the least of its images under turns that keep the weighting."""
    import numpy

    every = numpy.arange(FUNCTIONS)
    least = every.copy()
    for turn in turns():
        if all(
            model[i] == model[turn.order[i]] and (model[i] != "m" or not turn.flips >> i & 1)
            for i in range(RELAYS)
        ):
            image = numpy.zeros_like(every)
            for row, source in enumerate(turn.sources()):
                image |= (every >> source & 1) << row
            numpy.minimum(least, image, out=least)
    return least
