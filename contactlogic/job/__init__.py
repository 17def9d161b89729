"""Jobs: what to wire, read from files and checked."""

from contactlogic.job.assemble import load_job, load_table_job

__all__ = ["load_job", "load_table_job"]
