"""The live line of a long search, on standard error and only on a terminal."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from time import monotonic

from contactlogic.design import Form
from contactlogic.search.portfolio import Progress
from contactlogic.sequence import space

__all__ = ["line", "live", "watching"]

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


@contextmanager
def watching(wanted: bool) -> Iterator[space.Watch]:
    """A watch over a search that keeps one line up to date and ends it at Ctrl-C.

    The first Ctrl-C lets the search give what it knows so far; another one ends it at once.
    """
    import signal
    import threading

    stopped = False

    def stop(number: int, frame: object) -> None:
        nonlocal stopped
        del number, frame
        if stopped:
            raise KeyboardInterrupt
        stopped = True

    main = threading.current_thread() is threading.main_thread()
    before = signal.signal(signal.SIGINT, stop) if main else None
    try:
        with _phases(wanted) as progress:
            yield space.Watch(progress, lambda: stopped)
    finally:
        if before is not None:
            signal.signal(signal.SIGINT, before)


@contextmanager
def _phases(wanted: bool) -> Iterator[Callable[[str, int], None] | None]:
    """What shows `finding traps 3, 12 s` on one line; None where nobody looks."""
    if not wanted or not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.live import Live
    from rich.text import Text

    began = monotonic()
    shown = began - _EVERY
    with Live(console=Console(stderr=True), auto_refresh=False, transient=True) as screen:

        def show(phase: str, number: int) -> None:
            nonlocal shown
            now = monotonic()
            if now - shown >= _EVERY:
                shown = now
                screen.update(Text(f"{phase} {number}, {now - began:.0f} s"), refresh=True)

        yield show
