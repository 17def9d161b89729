"""Runs a function in a process of its own: `run` once with a time limit, `Stream` as it goes.

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
from collections.abc import Callable, Iterator, Sequence
from contextlib import suppress
from dataclasses import dataclass
from queue import Queue
from threading import Thread
from typing import BinaryIO, Self, TypeVar

__all__ = ["ChildCrashed", "ChildTimedOut", "Event", "Spares", "Stream", "run"]

_T = TypeVar("_T")

Inbox = Queue["Event"]
"""Where the events of streams arrive."""

_MARK = "contactlogic child 1"

# Standard output is kept for the answer: whatever the engine prints there goes to standard error.
# Modules named beforehand are loaded while the work is still awaited.
_START = """
import os, pickle, signal, sys
if {patient}:
    signal.signal(signal.SIGINT, signal.SIG_IGN)
answer = os.fdopen(os.dup(1), "wb")
os.dup2(2, 1)
sys.path[:], modules = pickle.load(sys.stdin.buffer)
import importlib
for module in modules:
    importlib.import_module(module)
from contactlogic.child import {serve}
seconds, work = pickle.load(sys.stdin.buffer)
{serve}(seconds, work, answer)
"""


class ChildTimedOut(Exception):
    """The child was killed because its time was up."""


class ChildCrashed(Exception):
    """The child ended without an answer: by a signal, an exception, or with garbage."""


def _command(serve: str) -> list[str]:
    patient = serve == "_serve_stream"  # such a child ignores Ctrl-C: its caller decides
    script = _START.replace("{serve}", serve).replace("{patient}", str(patient))
    return [sys.executable, "-P", "-c", script]


def _first(modules: Sequence[str] = ()) -> bytes:
    """What a child must know before it can be given work."""
    return pickle.dumps((sys.path, tuple(modules)))


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
            _command("_serve"),
            input=_first() + pickle.dumps((seconds, work)),
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


@dataclass(frozen=True)
class Event:
    """Something a `Stream` has to say: a value, or its end and, if it failed, how."""

    name: int
    value: object = None
    ended: bool = False
    failure: str | None = None


def _waiting(modules: Sequence[str]) -> subprocess.Popen[bytes]:
    """A child that loads `modules`, then waits for a stream's work."""
    process = subprocess.Popen(
        _command("_serve_stream"),
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
    )
    assert process.stdin is not None
    process.stdin.write(_first(modules))
    process.stdin.flush()
    return process


class Spares:
    """Children for streams that start while the caller is still busy; a context.

    Those that are not taken are ended with the context.

    Args:
        count: how many.
        modules: what they load beforehand.
    """

    def __init__(self, count: int, modules: Sequence[str]) -> None:
        self._idle = [_waiting(modules) for _ in range(count)]

    def take(self) -> subprocess.Popen[bytes] | None:
        """One of them, None if all are taken or lost."""
        while self._idle:
            process = self._idle.pop(0)
            if process.poll() is None:
                return process
            _end(process)
        return None

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        while self._idle:
            _end(self._idle.pop())


def _end(process: subprocess.Popen[bytes]) -> None:
    process.kill()
    process.wait()
    for pipe in (process.stdin, process.stdout):
        if pipe is not None:
            with suppress(OSError):  # what was not sent yet is lost with its reader
                pipe.close()


class Stream:
    """A generator function worked through in a child; its values arrive in `inbox` as `Event`s.

    The child ignores Ctrl-C, so that the caller decides what becomes of it; `close` ends it at
    once.  A child that crashes ends its stream with a failure and touches nothing else.

    Args:
        function: a module's top-level generator function; arguments and values can be pickled.
        inbox: queue that the events of any number of streams go to.
        name: number that tells this stream's events apart.
        spares: children that are starting already, to take one from.
    """

    def __init__(
        self,
        function: Callable[..., Iterator[object]],
        *args: object,
        inbox: Inbox,
        name: int,
        spares: Spares | None = None,
    ) -> None:
        waiting = None if spares is None else spares.take()
        self._process = _waiting(()) if waiting is None else waiting
        assert self._process.stdin is not None
        pickle.dump((0.0, pickle.dumps((function, args))), self._process.stdin)
        self._process.stdin.close()
        self._reader = Thread(target=self._read, args=(inbox, name), daemon=True)
        self._reader.start()

    def _read(self, inbox: Inbox, name: int) -> None:
        assert self._process.stdout is not None
        failure: str | None = None
        try:
            while True:
                mark, value = pickle.load(self._process.stdout)
                if mark != _MARK:
                    failure = "an answer is not the child's"
                    break
                inbox.put(Event(name, value))
        except EOFError:
            pass
        except Exception as error:  # a pickle cut short or overwritten can raise nearly anything
            failure = f"an answer cannot be read: {error}"
        status = self._process.wait() if failure is None else None
        if status:
            failure = f"ended by signal {-status}" if status < 0 else f"ended by status {status}"
        inbox.put(Event(name, ended=True, failure=failure))

    def close(self) -> None:
        """End the child at once; events under way may still arrive."""
        self._process.kill()
        self._process.wait()
        self._reader.join(timeout=1.0)
        if self._process.stdout is not None:
            self._process.stdout.close()


def _serve_stream(_seconds: float, work: bytes, answer: BinaryIO) -> None:
    """The child's side of a stream: send each value as it comes."""
    function, args = pickle.loads(work)
    with answer as out:
        for value in function(*args):
            pickle.dump((_MARK, value), out)
            out.flush()
    os._exit(0)
