"""From a sequence of relay states to self-starting wiring, proved from its contacts.

The expanded list gives the wanted drive of every coil and the wanted loads; coils and loads
together are one network over all relay states.  The search starts from wiring that comes home from
every state (`sequence.selfstart`) and keeps to networks that recover; what it ends with is proved
twice more, row by row by `check` and by exhausting the state space of its contacts.
"""

from __future__ import annotations

from dataclasses import replace

from contactlogic.design import Design, Result
from contactlogic.errors import LimitError, Place, TableError
from contactlogic.job.model import Job, Load, LoadFacts, LoadKind, PatternJob, SequenceJob
from contactlogic.job.sequence import SequenceTable, Timing, state_text
from contactlogic.network import folded
from contactlogic.sequence.memory import resolve
from contactlogic.sequence.pattern import sequence_of
from contactlogic.sequence.prove import network_motion, prove_network
from contactlogic.sequence.recovery import Recovery
from contactlogic.sequence.selfstart import Blemishes, Recovers, homing, shared_coils
from contactlogic.sequence.starting import needed_relays, start
from contactlogic.sequence.steps import Expansion
from contactlogic.sequence.transit import Transit, transits
from contactlogic.sequence.wants import drive_targets, load_targets
from contactlogic.sequenced import SequencerResult
from contactlogic.synthesis import Search, finish, synthesise
from contactlogic.truth import Target

__all__ = [
    "MOST_RELAYS",
    "SequencerResult",
    "as_sequencer",
    "as_table_job",
    "expanded",
    "table_job",
    "wire_sequence",
]

MOST_RELAYS = 24
"""Most relays and inputs of a sequence that is wired; recovery is proved of more."""

_SEARCHED = 10  # relays and inputs up to which the wiring is searched, not only built
_FEW = 5  # up to here the search also begins with wiring that comes home by the shortest way


def table_job(job: SequenceJob, expansion: Expansion) -> Job:
    """The sequence as a table job: coils and loads over all states of the relays.

    Args:
        job: the sequence.
        expansion: its steps, unambiguous.
    """

    def load(name: str, target: Target, kind: LoadKind | None = None) -> Load:
        facts = job.facts.get(name, LoadFacts(kind))
        return Load(name, target, facts.kind or kind, facts.amps)

    coils = [load(name, target, "coil") for name, target in drive_targets(expansion).items()]
    loads = [load(name, target) for name, target in load_targets(expansion).items()]
    timing = job.table.timing
    listed = 0
    for step in expansion.steps:
        listed |= 1 << step.state
    return Job(
        job.title,
        expansion.columns,
        (*coils, *loads),
        listed,
        job.supply,
        job.limits,
        job.file,
        frozenset(n for n in expansion.relays if n in timing.slow_release + timing.slow_operate)
        | job.bench.stored,
        job.bench,
    )


def as_table_job(job: SequenceJob | PatternJob) -> Job:
    """What a sequence or pattern wants of its wiring, row by row."""
    return expanded(job)[0]


def expanded(job: SequenceJob | PatternJob) -> tuple[Job, Expansion]:
    """What a sequence or pattern wants of its wiring, row by row, and its one-relay steps."""
    listed, _ = _listed(job)
    expansion = resolve(listed.table)
    return table_job(listed, expansion), expansion


def _listed(job: SequenceJob | PatternJob) -> tuple[SequenceJob, tuple[str, ...]]:
    """The sequence of a pattern, with what was chosen; a sequence as it is."""
    if isinstance(job, SequenceJob):
        return job, ()
    made, choice = sequence_of(job)
    return made, choice.notes


def wire_sequence(job: SequenceJob | PatternJob, search: Search) -> SequencerResult:
    """Wire a sequence so that it starts itself, and prove that it does.

    Args:
        job: the sequence, or a pattern for which the relays are chosen first.
        search: how to search.

    Raises:
        TableError: the sequence is ambiguous, or no wiring found starts itself.
        LimitError: more relays than can be searched.
        ProofFailed: contactlogic built a network that fails its own proof.
    """
    job, notes = _listed(job)
    table = job.table
    expansion = resolve(table)
    if len(expansion.columns) > MOST_RELAYS:
        raise LimitError(
            f"the sequence has {len(expansion.columns)} relays and inputs",
            place=Place(table.file, "sequence"),
            expected=f"at most {MOST_RELAYS} for wiring",
            hint="contactlogic recover proves the recovery of larger sequencers",
        )
    result = _wired(table_job(job, expansion), table, expansion, search)
    sequencer = _sequencer(result, table, expansion, notes)
    for found in sequencer.recoveries:
        if found.verdict != "recovers":
            raise _not_self_starting(table, found, len(expansion.columns))
    return sequencer


def as_sequencer(result: Result, job: SequenceJob | PatternJob) -> SequencerResult:
    """Designs that are wired already, with what is proved of them as sequencers.

    Args:
        result: designs of what the job wants row by row.
        job: the sequence, or a pattern for which the relays are chosen.
    """
    job, notes = _listed(job)
    return _sequencer(result, job.table, resolve(job.table), notes)


def _sequencer(
    result: Result, table: SequenceTable, expansion: Expansion, notes: tuple[str, ...]
) -> SequencerResult:
    """The result with recovery and transit of each design."""
    recoveries: list[Recovery] = []
    gaps: list[tuple[Transit, ...]] = []
    for number, design in enumerate(result.designs):
        if number and design.network == result.designs[number - 1].network:
            recoveries.append(recoveries[-1])
            gaps.append(gaps[-1])
            continue
        network = folded(design.network, result.repeaters)
        recoveries.append(
            prove_network(network, table.timing, expansion, inputs_return=table.inputs_return)
        )
        motion = network_motion(network, table.timing, expansion)
        gaps.append(transits(network, motion, [step.state for step in expansion.steps]))
    designs = tuple(_with_notes(design, table.timing) for design in result.designs)
    return SequencerResult(
        result.job,
        designs,
        result.relays,
        result.repeaters,
        result.interrupted,
        tuple(recoveries),
        tuple(gaps),
        notes + expansion.notes,
        expansion=expansion,
        timing=table.timing,
    )


def _wired(job: Job, table: SequenceTable, expansion: Expansion, search: Search) -> Result:
    """Wiring that starts itself, as far as the search can tell."""
    n = len(expansion.columns)
    share = None if search.seconds is None else search.seconds / 3
    started = start(job, expansion, seconds=share, seed=search.seed)
    if n > _SEARCHED:
        if started.failed is not None:
            raise _not_self_starting(table, started.failed, n)
        return finish(
            job,
            search,
            dict.fromkeys(search.forms, started.network),
            at_least=needed_relays(expansion),
            statuses=started.statuses(job.relays),
        )
    penalty = Recovers(table.timing, expansion, table.inputs_return)
    blemishes = Blemishes(table.timing, expansion)
    home = None
    if started.failed is not None or n <= _FEW:
        drives = {name: job.targets[name] for name in expansion.relays}
        home = job.targets | homing(expansion, drives)
    return synthesise(
        job,
        search,
        home=home,
        penalty=penalty,
        blemishes=blemishes,
        starts=() if started.failed is not None else (started.network,),
        covered=None if home is not None else started.covers,
    )


def _with_notes(design: Design, timing: Timing) -> Design:
    """The design with a note for every stored coil that shares its net (section 3)."""
    notes = tuple(
        f"coil {name} shares its net with another load, which shortens its hold"
        for name in shared_coils(design.network, timing)
    )
    return replace(design, notes=design.notes + notes)


def _not_self_starting(table: SequenceTable, found: Recovery, n: int) -> TableError:
    """Why no wiring found starts itself, with the smallest trap."""
    stray = [trap for trap in found.traps if not trap.wanted]
    if found.verdict == "hunts" and found.hunting:
        what = f"it can hunt for ever from {state_text(found.hunting[0], n)}"
    elif stray:
        trap = min(stray, key=lambda t: t.states)
        what = f"it can stick in {trap.states} other states, such as {state_text(trap.example, n)}"
    else:
        what = "the wanted states have another way out"
    return TableError(
        f"no wiring found lets this sequence start itself: {what}",
        place=Place(table.file, "sequence"),
        hint="list what shall happen in those states, add a relay, or let inputs return",
    )
