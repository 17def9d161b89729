"""What `contactlogic testplan` does: the fewest rows that show every fault, and a sheet of them."""

from __future__ import annotations

import json
import sys
from dataclasses import dataclass
from pathlib import Path

from contactlogic.cli.subject import Source, subject
from contactlogic.errors import OutputError

__all__ = ["Request", "run"]


@dataclass(frozen=True)
class Request:
    """The options of one run; `sheet` is the file to write the commissioning sheet to."""

    source: Source
    sheet: Path | None = None
    force: bool = False
    json: bool = False


def run(request: Request) -> None:
    """Plan the test of every design, print it, and write the sheet.

    Raises:
        InputError: the job or the design file cannot be used, or the sheet cannot be written.
    """
    from contactlogic.commission import plan_test
    from contactlogic.report.commissioning import commissioning_sheet, plan_json, plan_text
    from contactlogic.report.panels import panel_of_design
    from contactlogic.report.wiring import design_name

    if request.sheet is not None and request.sheet.exists() and not request.force:
        raise OutputError(f"{request.sheet} is there already", hint="--force writes over it")
    seen = subject(request.source)
    entries, sheets, lines = [], [], []
    for design in seen.designs:
        panel = panel_of_design(design, seen.job, seen.repeaters)
        plan = plan_test(panel, seen.job.listed)
        entries.append({"form": design.form, "fingerprint": design.fingerprint, **plan_json(plan)})
        lines.append(f"{design.form} {design.fingerprint}, {len(design.network.poles)} poles\n")
        lines.append(plan_text(plan))
        sheets.append(commissioning_sheet(plan, panel, seen.job, design_name(design, seen.job)))
    if request.sheet is not None:
        try:
            request.sheet.write_text("\n".join(sheets), encoding="utf-8")
        except OSError as error:
            reason = error.strerror or "cannot be written"
            raise OutputError(f"{request.sheet}: {reason}") from error
    if request.json:
        document = {"schema": "contactlogic/testplan/1", "designs": entries}
        sys.stdout.write(json.dumps(document, indent=1) + "\n")
    elif not request.source.quiet:
        sys.stdout.write("".join(lines))
        if request.sheet is not None:
            print(f"written to {request.sheet}")
