"""A finished network made to fit the columns of a sequence, or refused with what does not fit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from contactlogic.errors import DesignFileError, Place
from contactlogic.naming import did_you_mean
from contactlogic.network import Network

__all__ = ["fitted"]


def fitted(
    network: Network, columns: Sequence[str], inputs: Sequence[str], place: Place
) -> Network:
    """The network with its relays in column order.

    Args:
        network: without repeaters (`network.folded`).
        columns: relays and inputs of the sequence, those added to it included.
        inputs: the columns without a coil.
        place: the design file, for messages.

    Raises:
        DesignFileError: other relays than those of the sequence, a coil missing, or a coil for
            an input.
    """
    for name in columns:
        if name not in network.relays:
            raise DesignFileError(
                f"the design has no relay {name}, which the sequence has",
                place=place,
                expected="the relays " + " ".join(columns),
                hint=did_you_mean(name, network.relays),
            )
    for name in network.relays:
        if name not in columns:
            raise DesignFileError(
                f"the design has a relay {name}, which the sequence has not",
                place=place,
                expected="the relays " + " ".join(columns),
                hint=did_you_mean(name, columns),
            )
    for name in columns:
        if name in inputs and name in network.loads:
            raise DesignFileError(
                f"the design feeds a coil of {name}, which is moved from outside",
                place=place,
                expected="no load of that name",
            )
        if name not in inputs and name not in network.loads:
            raise DesignFileError(
                f"the design feeds no coil of {name}",
                place=place,
                expected=f"{name} among the loads, for its coil",
            )
    order = {name: i for i, name in enumerate(columns)}
    poles = sorted(network.poles, key=lambda pole: (order[pole.relay], pole.number))
    return replace(network, relays=tuple(columns), poles=tuple(poles))
