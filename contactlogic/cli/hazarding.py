"""What `contactlogic hazards` does: name what loads may do while one relay moves."""

from __future__ import annotations

import json
import sys
from dataclasses import dataclass

from contactlogic.cli.subject import Source, subject

__all__ = ["Request", "run"]


@dataclass(frozen=True)
class Request:
    """The options of one run."""

    source: Source
    json: bool = False


def run(request: Request) -> bool:
    """Print the hazards of every design; returns whether there are none.

    Raises:
        InputError: the job or the design file cannot be used.
    """
    from contactlogic.hazard import study_hazards
    from contactlogic.report.hazards import hazards_json, hazards_text

    seen = subject(request.source)
    entries = []
    clean = True
    for design in seen.designs:
        study = study_hazards(design.network, seen.job, seen.moves, seen.repeaters)
        clean = clean and not study.hazards
        if request.json:
            entries.append(
                {"form": design.form, "fingerprint": design.fingerprint, **hazards_json(study)}
            )
        elif not request.source.quiet:
            poles = len(design.network.poles)
            print(f"{design.form} {design.fingerprint}, {poles} poles")
            sys.stdout.write(hazards_text(study))
    if request.json:
        document = {"schema": "contactlogic/hazards/1", "designs": entries}
        sys.stdout.write(json.dumps(document, indent=1) + "\n")
    return clean
