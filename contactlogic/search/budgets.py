"""Pole budgets of finished networks: what is over, repeaters for it, or why it is refused."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from contactlogic.design import Form
from contactlogic.errors import LimitError, Place
from contactlogic.job.model import Job
from contactlogic.naming import free_name
from contactlogic.network import Network, Pole
from contactlogic.search.problem import Problem
from contactlogic.search.shares import shortfall

__all__ = ["excess", "over_budget", "refuse_at_once", "with_repeaters"]

_OR_REPEATERS = ", or allow repeaters with --repeaters"


def with_repeaters(
    job: Job, networks: Mapping[Form, Network]
) -> tuple[dict[Form, Network], dict[str, str]]:
    """Poles over budget moved to repeaters; the same repeaters for every form."""
    need: dict[str, int] = {}
    for network in networks.values():
        for relay, count in network.per_relay().items():
            most = job.limits.poles.get(relay)
            if most:
                need[relay] = max(need.get(relay, 0), -(-count.poles // most) - 1)
    taken = [*job.relays, *(load.name for load in job.loads)]
    added: dict[str, str] = {}
    names: dict[str, list[str]] = {}
    for relay, more in need.items():
        names[relay] = [relay]
        for _ in range(more):
            name = free_name(relay, [*taken, *added])
            added[name] = relay
            names[relay].append(name)
    moved: dict[Form, Network] = {}
    for form, network in networks.items():
        poles = []
        for pole in network.poles:
            most = job.limits.poles.get(pole.relay)
            if most:
                turn, place = divmod(pole.number - 1, most)
                pole = Pole(names[pole.relay][turn], place + 1, pole.common, pole.make, pole.break_)
            poles.append(pole)
        order = {name: k for k, name in enumerate((*job.relays, *added))}
        poles.sort(key=lambda pole: (order[pole.relay], pole.number))
        moved[form] = replace(network, relays=(*job.relays, *added), poles=tuple(poles))
    return moved, added


def excess(job: Job, network: Network) -> int:
    """Poles, makes and breaks beyond the budgets."""
    use = network.per_relay()
    over = sum(max(0, use[name].poles - most) for name, most in job.limits.poles.items())
    for name, have in job.limits.contacts.items():
        over += max(0, use[name].makes - have.makes) + max(0, use[name].breaks - have.breaks)
    return over


def refuse_at_once(job: Job, repeaters: bool) -> None:
    """Refuse budgets that no network can keep, where that shows without a search.

    Repeaters help every relay that has poles at all, but no push-button or contactor.

    Raises:
        LimitError: with the least that every network needs.
    """
    poles = job.limits.poles
    if repeaters:
        poles = {relay: most for relay, most in poles.items() if not most}
    if not poles and not job.limits.contacts:
        return
    short = shortfall(
        Problem(
            job.relays,
            job.targets,
            poles,
            job.limits.contacts,
            job.isolated,
            job.limits.objective,
        )
    )
    if short is None:
        return
    who = " and ".join(short.relays)
    one = "pole" if short.allowed == 1 else short.what
    together = " together" if len(short.relays) > 1 else ""
    raise LimitError(
        f"{who} may use {short.allowed} {one}{together}; every network needs at least "
        f"{short.least} (proved)",
        place=Place(file=job.file, section="limits"),
        expected="budgets that some network keeps",
        hint="raise the budget" + ("" if repeaters else _OR_REPEATERS),
    )


def over_budget(
    job: Job, found: Mapping[Form, Network], over: Mapping[Form, int], feasible: bool
) -> LimitError:
    """What the least is, and for which relay."""
    network = next(found[form] for form, excess in over.items() if excess)
    use = network.per_relay()
    short = [name for name, most in job.limits.poles.items() if use[name].poles > most]
    if short:
        name = short[0]
        most, least = job.limits.poles[name], use[name].poles
        poles = "pole" if most == 1 else "poles"
        what = f"{name} may use {most} {poles}; the least found for it is {least}"
    else:
        name, have = next(
            (name, have)
            for name, have in job.limits.contacts.items()
            if use[name].makes > have.makes or use[name].breaks > have.breaks
        )
        what = (
            f"{name} has {have.makes} makes and {have.breaks} breaks; the least found for it is"
            f" {use[name].makes} makes and {use[name].breaks} breaks"
        )
    if not feasible:
        what += " (proved: no network keeps all budgets)"
    return LimitError(
        what,
        place=Place(file=job.file, section="limits"),
        expected="budgets that a network found can keep",
        hint="raise the budget" + _OR_REPEATERS,
    )
