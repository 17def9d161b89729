"""Writes what the README's main command prints and draws into the README and `examples/`.

    python tests/readme/refresh.py

To be run after a change that lets the search find other networks, or that changes summary or
drawings; the tests of the README tell when.
"""

from __future__ import annotations

import re
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).parents[2]


def _said(*arguments: str, folder: Path) -> str:
    tool = Path(sys.executable).with_name("contactlogic")
    done = subprocess.run(
        [str(tool), *arguments], cwd=folder, capture_output=True, text=True, check=True
    )
    return done.stdout


def main() -> None:
    readme = ROOT / "README.md"
    text = readme.read_text(encoding="utf-8")
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        shutil.copytree(ROOT / "examples", folder / "examples")
        summary = _said("wire", "examples/ferry.toml", "--out", "ferry", folder=folder)
        verified = _said("verify", "ferry/design.json", "examples/ferry.toml", folder=folder)
        for form in ("ladder", "bridge"):
            picture = folder / "ferry" / form / "drawing.svg"
            shutil.copy(picture, ROOT / "examples" / f"ferry-{form}.svg")
    text = re.sub(
        r"(?<=^On the screen:\n\n```text\n).*?(?=^```$)",
        lambda _: summary,
        text,
        flags=re.MULTILINE | re.DOTALL,
    )
    text = re.sub(
        r"(?<=^\$ contactlogic verify ferry/design.json examples/ferry.toml\n).*?(?=^```$)",
        lambda _: verified,
        text,
        flags=re.MULTILINE | re.DOTALL,
    )
    readme.write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
