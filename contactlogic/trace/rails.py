"""Which terminals of a list are the feed and the return.

In this order: what the user says; the job's labels; what rails are usually called; of two that
are left, the one from which loads are returned.  What stays unclear is asked, never guessed.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Mapping, Sequence

from contactlogic.errors import Place, WiringError
from contactlogic.naming import did_you_mean
from contactlogic.trace.known import Known, key, natural
from contactlogic.trace.listing import Wire

__all__ = ["Rails", "find_rails"]

_PREFIX = "rail:"
_FEEDS = {"supply", "feed", "+", "l+", "plus", "positive", "vcc", "vdd"}
_BACKS = {"return", "0", "-", "l-", "minus", "negative", "gnd", "ground", "neutral"}
_MORE_FEEDS = {"l", "l1", "p", "line", "live"}  # behind `rail:` alone; else they may be loads
_MORE_BACKS = {"n", "m", "e", "earth", "common"}
_VOLTS = re.compile(r"\+?([0-9]+(?:[.,][0-9]+)?)v(?:ac|dc)?")

Rails = Mapping[str, bool]
"""Keys of the terminals that are rails: True for the feed, False for the return."""


def find_rails(wires: Sequence[Wire], known: Known) -> Rails:
    """The rails by the keys of their terminals.

    Raises:
        WiringError: a rail named is not in the list, or which is the feed is not clear.
    """
    spelt: dict[str, str] = {}
    places: dict[str, Place] = {}
    for wire in wires:
        for end in (wire.start, wire.end):
            k = key(end.terminal)
            spelt[k] = min(end.terminal, spelt.get(k, end.terminal))
            places.setdefault(k, end.place)
    rails: dict[str, bool] = {}
    for names, is_feed, option in ((known.feed, True, "--feed"), (known.back, False, "--return")):
        for name in names:
            found = [k for k in (key(name), key(_PREFIX + name)) if k in spelt]
            if not found:
                raise WiringError(
                    f"no wire goes to {name}",
                    expected=f"after {option} a terminal of the list",
                    hint=did_you_mean(name, sorted(spelt.values())),
                )
            for k in found:
                if rails.get(k, is_feed) is not is_feed:
                    raise WiringError(f"{name} cannot be both the feed and the return")
                rails[k] = is_feed
    loads = {key(name) for name in (*known.loads, *known.relays, *known.names)}
    for k in spelt:
        meaning = _usual(k, known, loads)
        # where the user names a rail, only that one counts on its side
        if k not in rails and meaning is not None and not (known.feed if meaning else known.back):
            rails[k] = meaning
    for words, is_feed in ((_MORE_FEEDS, True), (_MORE_BACKS, False)):
        if is_feed not in rails.values():  # words that may also name a load
            rails |= dict.fromkeys((k for k in spelt if k in words - loads), is_feed)
    if _PREFIX.rstrip(":") not in loads:  # else `rail:11` may be a contact of a relay so named
        _left_over(rails, spelt, places, wires)
    if True not in rails.values() and not _only_returns(rails, spelt, wires):
        raise WiringError(
            "no rail of the list is known to be the feed",
            expected="a terminal such as rail:SUPPLY, or the feed's name after --feed",
            hint=f"the most wires go to {', '.join(_busiest(wires))}",
        )
    return rails


def _only_returns(rails: Rails, spelt: Collection[str], wires: Iterable[Wire]) -> bool:
    """Whether every terminal is on the return rail: then no load is ever fed, and that is all."""
    return bool(rails) and _joined(rails, wires) >= set(spelt)


def _usual(k: str, known: Known, loads: Collection[str]) -> bool | None:
    """What a terminal is by its name alone: True for a feed, False for a return."""
    if known.rails:
        feed, back = (key(rail) for rail in known.rails)
        if k in (feed, feed.removeprefix(_PREFIX)):
            return True
        if k in (back, back.removeprefix(_PREFIX)):
            return False
    label = k.removeprefix(_PREFIX)
    behind = label != k
    if k in loads or (behind and _PREFIX.rstrip(":") in loads):
        return None
    if behind and known.rails:
        # the job names both: another rail is asked about unless its name leaves no doubt
        behind = False
    if label.endswith("(feed)") or label in _FEEDS or (behind and label in _MORE_FEEDS):
        return True
    if label.endswith("(return)") or label in _BACKS or (behind and label in _MORE_BACKS):
        return False
    volts = _VOLTS.fullmatch(label)
    return None if volts is None else float(volts[1].replace(",", ".")) > 0


def _left_over(
    rails: dict[str, bool],
    spelt: Mapping[str, str],
    places: Mapping[str, Place],
    wires: Sequence[Wire],
) -> None:
    """Settle terminals behind `rail:` whose name says nothing."""
    left = sorted((k for k in spelt if k.startswith(_PREFIX) and k not in rails), key=natural)
    if not left:
        return
    sides = set(rails.values())
    if len(left) == 1 and len(sides) == 1:
        rails[left[0]] = not next(iter(sides))
        return
    if len(left) == 2 and not sides:
        returned = _returns(wires)
        backs = [k for k in left if k in returned]
        if len(backs) == 1:
            rails.update({k: k not in backs for k in left})
            return
    raise WiringError(
        f"whether {spelt[left[0]]} is the feed or the return is not clear",
        place=places[left[0]],
        expected="two rails: the feed and the return",
        hint="say which is which with --feed NAME and --return NAME",
    )


def _returns(wires: Sequence[Wire]) -> set[str]:
    """Keys of the terminals joined by wires to the second terminal of a load."""
    ends = (key(end.terminal) for wire in wires for end in (wire.start, wire.end))
    return _joined([k for k in ends if k.endswith((":x2", ":a2", ":-"))], wires)


def _joined(starts: Iterable[str], wires: Iterable[Wire]) -> set[str]:
    """Keys of the terminals that wires join to any of `starts`."""
    near: dict[str, list[str]] = {}
    for wire in wires:
        a, b = key(wire.start.terminal), key(wire.end.terminal)
        near.setdefault(a, []).append(b)
        near.setdefault(b, []).append(a)
    found = set(starts)
    waiting = list(found)
    while waiting:
        for other in near.get(waiting.pop(), ()):
            if other not in found:
                found.add(other)
                waiting.append(other)
    return found


def _busiest(wires: Iterable[Wire]) -> list[str]:
    count: dict[str, int] = {}
    for wire in wires:
        for end in (wire.start, wire.end):
            count[end.terminal] = count.get(end.terminal, 0) + 1
    return sorted(count, key=lambda name: (-count[name], natural(name)))[:3]
