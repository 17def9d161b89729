"""What `contactlogic faults` does: name what each single fault does to the loads."""

from __future__ import annotations

import json
import sys
from dataclasses import dataclass

from contactlogic.cli.subject import Source, subject
from contactlogic.errors import JobFileError
from contactlogic.naming import did_you_mean, listed

__all__ = ["Request", "run", "split_loads"]


@dataclass(frozen=True)
class Request:
    """The options of one run; `fail_off` names loads that no open fault may turn on."""

    source: Source
    fail_off: tuple[str, ...] = ()
    json: bool = False


def split_loads(text: str | None, known: tuple[str, ...]) -> tuple[str, ...]:
    """Names of loads divided by commas or spaces.

    Raises:
        JobFileError: a name that is none of those known.
    """
    names = tuple(dict.fromkeys((text or "").replace(",", " ").split()))
    for name in names:
        if name not in known:
            raise JobFileError(
                f"there is no load {name}",
                expected=listed(known),
                hint=did_you_mean(name, known),
            )
    return names


def run(request: Request) -> bool:
    """Print what every single fault does; returns whether no open fault turns on a load of
    `fail_off`.

    Raises:
        InputError: the job or the design file cannot be used.
    """
    from contactlogic.fault import study_faults
    from contactlogic.report.faults import fault_text, faults_json, faults_text
    from contactlogic.report.panels import panel_of_design, wanted_of
    from contactlogic.report.text import one_line

    seen = subject(request.source)
    loads = tuple(load.name for load in seen.job.loads)
    named = split_loads(" ".join(request.fail_off), loads)
    entries = []
    safe = True
    for design in seen.designs:
        panel = panel_of_design(design, seen.job, seen.repeaters)
        study = study_faults(panel, wanted_of(panel, seen.job, seen.repeaters))
        guilty = {load: study.open_faults_that_turn_on(load) for load in named}
        safe = safe and not any(guilty.values())
        if request.json:
            entries.append(
                {"form": design.form, "fingerprint": design.fingerprint, **faults_json(study)}
            )
        elif not request.source.quiet:
            print(f"{design.form} {design.fingerprint}, {len(design.network.poles)} poles")
            sys.stdout.write(faults_text(study))
            for load, found in guilty.items():
                if not found:
                    print(one_line(f"no single open fault turns {load} on"))
                for effect in found:
                    print(one_line(f"open fault turns {load} on: {fault_text(effect.fault)}"))
    if request.json:
        document = {"schema": "contactlogic/faults/1", "designs": entries}
        sys.stdout.write(json.dumps(document, indent=1) + "\n")
    return safe
