"""Wiring in which no single open fault turns a named load on.

A contact that never closes or a wire that is off takes paths away and turns nothing on.  A dead
coil leaves its relay released.  Where the load must be off with the relay operated and is on with
it released, no wiring of that relay alone can help: a repeater (a second relay, its coil in
parallel over wires of its own) is given to it, and the load is wanted off with either of the two
left behind.  Elsewhere the load is only kept off in cells that were free.  So what is asked comes
to an ordinary job over more relays, which the search solves as any other.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from contactlogic.check import verify
from contactlogic.design import Design, Result
from contactlogic.errors import LimitError, Place, ProofFailed
from contactlogic.hazard.mixture import Transit
from contactlogic.job.model import Job, Load
from contactlogic.naming import free_name
from contactlogic.network import Network
from contactlogic.synthesis import Search, synthesise
from contactlogic.truth import MAX_INPUTS, Target, all_rows, literal, rows_of, variable

__all__ = ["coils_that_turn_on", "wire_fail_off"]


def coils_that_turn_on(
    network: Network, load: str, target: Target, repeaters: Mapping[str, str]
) -> tuple[str, ...]:
    """Relays whose dead coil, and nothing else wrong, turns the load on in some row."""
    net = network.loads[load]
    if net is None:
        return ()
    inputs = [name for name in network.relays if name not in repeaters]
    n = len(inputs)
    place = {name: inputs.index(repeaters.get(name, name)) for name in network.relays}
    found = []
    for dead in network.relays:
        edges = [
            (
                contact.common,
                contact.throw,
                (0 if contact.make else all_rows(n))
                if contact.relay == dead
                else literal(n, place[contact.relay], contact.make),
            )
            for contact in network.contacts()
        ]
        live = Transit(network.supply, edges, (), all_rows(n)).live(())
        if live.get(net, 0) & target.off:
            found.append(dead)
    return tuple(found)


def wire_fail_off(job: Job, search: Search, loads: Sequence[str]) -> Result:
    """Wire a job so that no single open fault turns any of `loads` on.

    Raises:
        LimitError: too many relays with the repeaters needed, or no network within the budgets.
        ProofFailed: contactlogic built a network that fails its own proof.
    """
    place = Place(file=job.file)
    kept = tuple(
        replace(load, target=_kept_off(load.target)) if load.name in loads else load
        for load in job.loads
    )
    targets = {load.name: load.target for load in kept}
    need = [
        relay
        for i, relay in enumerate(job.relays)
        if any(_left_on(targets[name], i) for name in loads)
    ]
    for relay in need:
        if relay in job.limits.contacts:
            raise LimitError(
                f"{relay} left released turns a load on, and has no coil that can be repeated",
                place=place,
                expected="a relay, so not in contacts of [limits]",
            )
    if len(job.relays) + len(need) > MAX_INPUTS:
        raise LimitError(
            f"{len(need)} repeaters are needed beside {len(job.relays)} relays",
            place=place,
            expected=f"at most {MAX_INPUTS} in all",
        )
    added: dict[str, str] = {}
    for relay in need:
        taken = (*job.relays, *(load.name for load in job.loads), *added)
        added[free_name(relay, taken)] = relay
    wider = _wider(replace(job, loads=kept), loads, added)
    result = synthesise(wider, search)
    follows = {**added}
    for name, relay in result.repeaters.items():  # for budgets; of a repeater, of what it follows
        follows[name] = added.get(relay, relay)
    designs = tuple(_proved(design, job, loads, follows, added) for design in result.designs)
    return Result(job, designs, result.relays, follows, result.interrupted)


def _kept_off(target: Target) -> Target:
    """The target with free cells off where a dead coil would lead to them from an off row."""
    reached = 0
    for i in range(target.n):
        reached |= (target.off & variable(target.n, i)) >> (1 << i)
    return replace(target, free=target.free & ~reached)


def _left_on(target: Target, i: int) -> int:
    """Rows in which the load is on, and off with relay `i` operated as well."""
    return (target.off & variable(target.n, i)) >> (1 << i) & target.on


def _wider(job: Job, loads: Sequence[str], added: Mapping[str, str]) -> Job:
    """The job over its relays and their repeaters, one of which may be left behind."""
    if not added:
        return job
    n = len(job.relays)
    pairs = [(n + k, job.relays.index(relay)) for k, relay in enumerate(added.values())]
    together: dict[int, int] = {}  # row of the job -> the same with all repeaters following
    for row in range(1 << n):
        together[row] = row | sum((row >> relay & 1) << own for own, relay in pairs)
    listed = sum(1 << together[row] for row in rows_of(job.listed))
    wider = []
    for load in job.loads:
        on = sum(1 << together[row] for row in rows_of(load.target.on))
        off = sum(1 << together[row] for row in rows_of(load.target.off))
        if load.name in loads:
            for row in rows_of(load.target.off):
                for own, relay in pairs:
                    if row >> relay & 1:
                        off |= 1 << (together[row] ^ 1 << own)
                        off |= 1 << (together[row] ^ 1 << relay)
        whole = n + len(pairs)
        wider.append(replace(load, target=Target(whole, on, all_rows(whole) & ~(on | off))))
    budgets = dict(job.limits.poles)
    budgets |= {name: budgets[relay] for name, relay in added.items() if relay in budgets}
    limits = replace(job.limits, poles=budgets)
    return replace(
        job, relays=(*job.relays, *added), loads=tuple(wider), listed=listed, limits=limits
    )


def _proved(
    design: Design,
    job: Job,
    loads: Sequence[str],
    follows: Mapping[str, str],
    added: Mapping[str, str],
) -> Design:
    proof = verify(design, job, repeaters=follows)
    if not proof.ok:
        raise ProofFailed(proof.explain())
    wanted: dict[str, Load] = {load.name: load for load in job.loads}
    for name in loads:
        guilty = coils_that_turn_on(design.network, name, wanted[name].target, follows)
        if guilty:
            raise LimitError(
                f"no {design.form} found keeps {name} off when the coil of {guilty[0]} is dead",
                place=Place(file=job.file),
                hint="leave out --repeaters, or raise the pole budgets",
            )
    notes = [
        f"{name} is a repeater of {relay}: its coil in parallel, over wires of its own"
        for name, relay in added.items()
    ]
    notes.append(f"no single open fault turns {' or '.join(loads)} on")
    return replace(design, verified_rows=proof.rows, notes=(*design.notes, *notes))
