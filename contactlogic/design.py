"""A finished, proved design and the result of one run, as values.

The JSON form of these (schema `contactlogic/design/1`, design.md section 6) is written and read by
`contactlogic.report.designfile`.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from contactlogic.job.model import Job
from contactlogic.network import Network

__all__ = ["Bound", "Design", "Form", "LoadStatus", "Result", "fingerprint"]

Form = Literal["ladder", "bridge"]


@dataclass(frozen=True)
class Bound:
    """What is proved of the least: at least so many poles; `proven_minimum` only if proved."""

    at_least: int
    proven_minimum: bool


@dataclass(frozen=True)
class LoadStatus:
    """How one load's two-level cover was found.

    `cover` is switching-algebra text of the least sum of products (or product of sums) found,
    `literals` and `terms` its size, `proved` whether it is proved least (by literals, then terms).
    """

    load: str
    cover: str
    literals: int
    terms: int
    proved: bool


@dataclass(frozen=True)
class Design:
    """One network of one form, with its proof."""

    form: Form
    network: Network
    bound: Bound
    verified_rows: int
    covers: tuple[LoadStatus, ...] = ()
    notes: tuple[str, ...] = ()

    @property
    def fingerprint(self) -> str:
        return fingerprint(self.form, self.network)


@dataclass(frozen=True)
class Result:
    """What one run found for a job: one design per form asked for.

    `interrupted` tells that the search was stopped early: the designs are proved all the same.
    """

    job: Job
    designs: tuple[Design, ...]
    relays: tuple[str, ...]
    repeaters: Mapping[str, str] = field(default_factory=dict)
    interrupted: bool = False


def fingerprint(form: str, network: Network) -> str:
    """Six hex digits that tell two designs apart on paper: sha256 of form, poles and nets."""
    text = json.dumps(
        [
            form,
            network.relays,
            network.supply,
            list(network.loads.items()),
            [[p.relay, p.number, p.common, p.make, p.break_] for p in network.poles],
        ],
        separators=(",", ":"),
    )
    return hashlib.sha256(text.encode()).hexdigest()[:6]
