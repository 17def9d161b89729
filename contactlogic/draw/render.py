"""Drawings in the DOT language to pictures: the one module that runs a renderer.

The `graphviz-pure` command is installed with contactlogic; a system `dot` is used only if it is
missing.  Both are run as a child process with a time limit, so that a crash or a hang of native
code stays there.
"""

from __future__ import annotations

import shutil
import subprocess
import sys
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

from contactlogic.errors import RendererMissing, RenderError

__all__ = ["find_renderer", "render"]

PNG_DPI = 110
_INCHES = 60  # a larger sheet is scaled down: pixels beyond that are of no use and take long


def find_renderer() -> str | None:
    """Path of the renderer, None if there is none: the environment's own first, then PATH."""
    beside = Path(sys.executable).parent
    for name in ("graphviz-pure", "neato", "dot"):
        if name == "graphviz-pure":
            own = shutil.which(name, path=str(beside))
            if own:
                return own
        found = shutil.which(name)
        if found:
            return found
    return None


def render(
    dot_text: str, formats: Sequence[str] = ("svg", "png"), *, seconds: float = 60
) -> dict[str, bytes]:
    """Pictures of a drawing by format, made side by side.

    Args:
        dot_text: a drawing with all positions fixed.
        formats: "svg", "png" or another format of the renderer.
        seconds: time limit for each picture.

    Raises:
        RendererMissing: no renderer is installed.
        RenderError: the renderer failed or took too long.
    """
    command = find_renderer()
    if command is None:
        raise RendererMissing(
            "no renderer found: install the Python package graphviz-pure "
            "(pip install graphviz-pure), or Graphviz with its command dot"
        )

    def picture(wanted: str) -> bytes:
        return _picture(command, dot_text, wanted, seconds)

    with ThreadPoolExecutor() as pool:
        return dict(zip(formats, pool.map(picture, formats), strict=True))


def _picture(command: str, dot_text: str, wanted: str, seconds: float) -> bytes:
    arguments = [command, "-Kneato", "-n2", f"-T{wanted}"]
    if wanted == "png":
        arguments += [f"-Gdpi={PNG_DPI}", f"-Gsize={_INCHES},{_INCHES}"]
    try:
        done = subprocess.run(
            arguments,
            input=dot_text.encode(),
            capture_output=True,  # warnings about widths of letters are of no use to anyone
            timeout=seconds,
            check=False,
        )
    except subprocess.TimeoutExpired:
        raise RenderError(
            f"the renderer {command} made no {wanted} within {seconds:g} s; allow it more time"
        ) from None
    except OSError as error:
        raise RenderError(
            f"the renderer {command} could not be started: {error.strerror}; "
            "install the Python package graphviz-pure again"
        ) from None
    if done.returncode != 0 or not done.stdout:
        said = done.stderr.decode(errors="replace").strip().splitlines()
        why = next((line for line in said if not line.startswith("Warning")), "it gave no reason")
        raise RenderError(
            f"the renderer {command} made no {wanted} (exit status {done.returncode}): {why[:200]}"
        )
    return done.stdout
