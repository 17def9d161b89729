"""Runs a function in a process of its own, with a hard time limit.

Native engines can hang, crash the process they run in, or print.  In a child none of that can
take the caller's result with it: the child is killed when its time is up, an end by signal or
anything but a well-formed answer raises, and what it prints on standard output is dropped.

The child is a fresh interpreter rather than a fork: that is safe while the caller has threads,
is the same on every platform, does not run the caller's main script again, and starts in some
50 ms.  Function, arguments and answer travel as pickles between the two processes only.
"""

from __future__ import annotations

import os
import pickle
import subprocess
import sys
from collections.abc import Callable
from typing import BinaryIO, TypeVar

__all__ = ["ChildCrashed", "ChildTimedOut", "run"]

_T = TypeVar("_T")

_MARK = "contactlogic child 1"

# Standard output is kept for the answer: whatever the engine prints there goes to standard error.
_START = """
import os, pickle, sys
answer = os.fdopen(os.dup(1), "wb")
os.dup2(2, 1)
sys.path[:], seconds, work = pickle.load(sys.stdin.buffer)
from contactlogic.child import _serve
_serve(seconds, work, answer)
"""


class ChildTimedOut(Exception):
    """The child was killed because its time was up."""


class ChildCrashed(Exception):
    """The child ended without an answer: by a signal, an exception, or with garbage."""


def run(function: Callable[..., _T], *args: object, seconds: float) -> _T:
    """`function(*args)`, worked out in a child process within `seconds` (start-up included).

    `function` is one of a module's top level; it, its arguments and its answer can be pickled.

    Raises:
        ChildTimedOut: no answer in time; the child has been killed.
        ChildCrashed: the child ended without an answer; the message says how.
    """
    if seconds <= 0:
        raise ChildTimedOut("no time left to start")
    work = pickle.dumps((function, args))
    try:
        done = subprocess.run(
            [sys.executable, "-P", "-c", _START],
            input=pickle.dumps((sys.path, seconds, work)),
            capture_output=True,
            timeout=seconds,
            check=False,
        )
    except subprocess.TimeoutExpired as error:
        raise ChildTimedOut(f"no answer within {seconds:g} s") from error
    said = done.stderr.decode(errors="replace").strip()[-2000:]
    if done.returncode:
        how = f"signal {-done.returncode}" if done.returncode < 0 else f"status {done.returncode}"
        raise ChildCrashed(f"ended by {how}: {said}" if said else f"ended by {how}")
    try:
        mark, value = pickle.loads(done.stdout)
    except Exception as error:  # a pickle cut short or overwritten can raise nearly anything
        raise ChildCrashed(f"answer cannot be read: {error}") from error
    if mark != _MARK:
        raise ChildCrashed("answer is not the child's")
    answer: _T = value
    return answer


def _serve(seconds: float, work: bytes, answer: BinaryIO) -> None:
    """The child's side: work, answer, and end without the engine's own clean-up."""
    import signal

    if hasattr(signal, "setitimer"):  # should the caller be killed first, do not run on for ever
        signal.signal(signal.SIGALRM, signal.SIG_DFL)
        signal.setitimer(signal.ITIMER_REAL, seconds + 1.0)
    function, args = pickle.loads(work)
    value = function(*args)
    with answer as out:
        pickle.dump((_MARK, value), out)
    os._exit(0)
