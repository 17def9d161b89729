"""Row-by-row proof of a network against what its loads must do.

All `2**n` rows are walked at once as the bits of Python integers: 16 inputs, 60 poles and 20
loads take about a second.  Sneak paths need no rule of their own: the walk passes every contact
both ways (design.md section 3).
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import replace

from contactlogic.check.proof import Backfeed, Proof, WrongRow
from contactlogic.check.structure import bridges, faults
from contactlogic.check.wiring import Wiring
from contactlogic.design import Design, Form
from contactlogic.job.model import Job, SeparateContacts
from contactlogic.network import Network
from contactlogic.truth import Target, settings

__all__ = ["prove", "verify"]


def prove(
    network: Network,
    targets: Mapping[str, Target],
    *,
    form: Form,
    isolated: Collection[str] = (),
    pole_limits: Mapping[str, int] = {},
    separate: Mapping[str, SeparateContacts] = {},
    repeaters: Mapping[str, str] = {},
) -> Proof:
    """Prove one network.

    Args:
        network: what to prove.  Its relays that are no repeaters are the bits of a row number.
        targets: what each load must do, over those relays.
        form: a "ladder" must also be series-parallel.
        isolated: loads that, when off, may be joined to no other load that is off.
        pole_limits: most poles of a relay.
        separate: relays whose makes and breaks never pair, with how many they have.
        repeaters: relays that follow another, by name; they add no rows.

    Raises:
        ValueError: targets over another number of relays, or an isolated load without target.
    """
    inputs = tuple(dict.fromkeys(name for name in network.relays if name not in repeaters))
    for load, target in targets.items():
        if target.n != len(inputs):
            raise ValueError(f"{load} is wanted over {target.n} relays, not {len(inputs)}")
    if strangers := sorted(set(isolated) - set(targets)):
        raise ValueError(f"isolated but not wanted: {', '.join(strangers)}")
    wiring = Wiring(network, inputs, repeaters, separate)
    from_supply = wiring.joined(network.supply)
    as_built = {
        load: 0 if net is None else from_supply.get(net, 0) for load, net in network.loads.items()
    }
    asked = tuple(load for load in targets if load in isolated)
    return Proof(
        form=form,
        rows=1 << len(inputs),
        as_built=as_built,
        wrong=tuple(_wrong_rows(network, wiring, inputs, targets, as_built)),
        backfeeds=tuple(_backfeeds(network, wiring, inputs, asked, as_built)),
        structure=tuple(
            faults(
                network,
                wiring,
                wanted=targets,
                known={*inputs, *(name for name, of in repeaters.items() if of in inputs)},
                as_built=as_built,
                pole_limits=pole_limits,
                separate=separate,
            )
        ),
        series_parallel=tuple(bridges(network, wiring)) if form == "ladder" else (),
        isolated=asked,
    )


def verify(design: Design, job: Job, *, repeaters: Mapping[str, str] = {}) -> Proof:
    """Prove any design against a job: behaviour, isolation, budgets and form.

    Relays are matched by name: the design may list them in another order, leave out those it
    does not use and add repeaters.  Other relays that the job does not know are reported under
    `structure` and taken as never making contact.

    Args:
        design: from `wire`, or from a file read by `contactlogic.report.designfile`.
        job: what is wanted.
        repeaters: relays of the design that follow one of the job's, by name.
    """
    added = tuple(name for name in design.network.relays if name in repeaters)
    network = replace(design.network, relays=job.relays + added)
    proof = prove(
        network,
        job.targets,
        form=design.form,
        isolated=job.isolated,
        pole_limits=job.limits.poles,
        separate=job.limits.contacts,
        repeaters={name: repeaters[name] for name in added},
    )
    with_contacts = {pole.relay for pole in network.poles}  # these are reported pole by pole
    problems = [
        f"there is no relay {name} in the job"
        for name in design.network.relays
        if name not in network.relays and name not in with_contacts
    ]
    if design.bound.at_least > len(network.poles):
        problems.append(
            f"claims that {design.bound.at_least} poles are least, but uses {len(network.poles)}"
        )
    return replace(proof, structure=proof.structure + tuple(problems))


def _wrong_rows(
    network: Network,
    wiring: Wiring,
    inputs: tuple[str, ...],
    targets: Mapping[str, Target],
    as_built: Mapping[str, int],
) -> Iterator[WrongRow]:
    for load, target in targets.items():
        if load not in as_built:  # a missing load is a fault of structure
            continue
        differs = (as_built[load] ^ target.on) & ~target.free
        if not differs:
            continue
        row = _first(differs)
        got = as_built[load] >> row & 1
        net = network.loads[load]
        path: tuple[str, ...] = ()
        if got and net is not None:
            path = ("supply", *wiring.path(network.supply, net, row), load)
        yield WrongRow(load, row, _named(row, inputs), 1 - got, got, path)


def _backfeeds(
    network: Network,
    wiring: Wiring,
    inputs: tuple[str, ...],
    isolated: tuple[str, ...],
    as_built: Mapping[str, int],
) -> Iterator[Backfeed]:
    told: set[tuple[str, str]] = set()
    for load in isolated:
        net = network.loads.get(load)
        if net is None:
            continue
        joined = wiring.joined(net)
        for other, elsewhere in network.loads.items():
            if elsewhere is None or elsewhere == net or (other, load) in told:
                continue
            # Joined to a load that is off, so the other is off as well.
            rows = joined.get(elsewhere, 0) & ~as_built[load]
            if rows:
                told.add((load, other))
                row = _first(rows)
                path = (load, *wiring.path(net, elsewhere, row), other)
                yield Backfeed(load, other, row, _named(row, inputs), path)


def _first(rows: int) -> int:
    return (rows & -rows).bit_length() - 1


def _named(row: int, inputs: tuple[str, ...]) -> dict[str, int]:
    return dict(zip(inputs, settings(row, len(inputs)), strict=True))
