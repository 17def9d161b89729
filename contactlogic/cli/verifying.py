"""What `contactlogic verify` does: judge a design file, from anywhere, against a job."""

from __future__ import annotations

from pathlib import Path

from contactlogic.errors import DesignFileError, Place
from contactlogic.job.model import Job

__all__ = ["run"]


def run(design: Path, job: Path, *, loads: str | None, unlisted: str | None) -> bool:
    """Prove every design of the file against the job and print what was found.

    Returns whether all of them are right.

    Raises:
        InputError: the job or the design file cannot be used.
    """
    from contactlogic.check import verify
    from contactlogic.cli.jobs import wirable_job
    from contactlogic.report.designfile import read_design

    wanted = wirable_job(job, loads, unlisted)
    if not isinstance(wanted, Job):  # of a sequence: its coils and loads, row by row
        from contactlogic.sequencer import as_table_job

        wanted = as_table_job(wanted)
    file = read_design(design)
    if not file.designs:
        raise DesignFileError("the file holds no design", place=Place(file=str(design)))
    right = True
    for each in file.designs:
        proof = verify(each, wanted, repeaters=file.repeaters)
        right = right and proof.ok
        print(f"{each.form} {each.fingerprint}, {len(each.network.poles)} poles: ", end="")
        print(f"right in all {proof.rows} rows" if proof.ok else "wrong")
        for note in each.notes:
            print(f"  note: {note}")
        if not proof.ok:
            print("\n".join(f"  {said}" for said in proof.explain().splitlines()))
    return right
