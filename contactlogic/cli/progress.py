"""The live line of a long search, on standard error and only on a terminal."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from time import monotonic

from contactlogic.design import Form
from contactlogic.search.portfolio import Progress

__all__ = ["line", "live"]

Watch = Callable[[Sequence[Form], Progress], None]

_EVERY = 0.2  # seconds between redraws


def line(forms: Sequence[Form], progress: Progress) -> str:
    """`ladder 13, bridge 10 poles, at least 7 proved, 12 s, 31 windows/s`."""
    best = [
        f"{form} {len(standing.best.poles) if standing.best else '-'}"
        for form, standing in zip(forms, progress.standings, strict=True)
    ]
    windows = sum(standing.windows for standing in progress.standings)
    rate = windows / progress.seconds if progress.seconds else 0.0
    return (
        f"{', '.join(best)} poles, at least {progress.at_least} proved, "
        f"{progress.seconds:.0f} s, {rate:.0f} windows/s"
    )


@contextmanager
def live(wanted: bool) -> Iterator[Watch | None]:
    """A watcher that keeps one line up to date; None where nobody looks."""
    if not wanted or not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.live import Live
    from rich.text import Text

    shown = -_EVERY
    with Live(console=Console(stderr=True), auto_refresh=False, transient=True) as screen:

        def watch(forms: Sequence[Form], progress: Progress) -> None:
            nonlocal shown
            if monotonic() - shown >= _EVERY:
                shown = monotonic()
                screen.update(Text(line(forms, progress)), refresh=True)

        yield watch
