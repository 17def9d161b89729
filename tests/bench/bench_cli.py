"""How long the command line takes from start to end: the figures in DEVELOPERS.md.

    python tests/bench/bench_cli.py [--runs 5]

Printed: median and worst wall-clock seconds of `contactlogic --help`, of a job with 4 inputs with
everything written and drawn, and of a job with 8 inputs and 4 loads.
"""

from __future__ import annotations

import argparse
import os
import random
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).parents[2]


def eight_inputs(seed: int) -> str:
    """A job of 8 inputs and 4 loads: random rows, an eighth of the cells free."""
    rng = random.Random(seed)
    relays = " ".join(f"K{i}" for i in range(1, 9))
    rows = []
    for row in range(256):
        inputs = " ".join(str(row >> i & 1) for i in range(8))
        cells = " ".join(rng.choice("0001111-") for _ in range(4))
        rows.append(f"{inputs} | {cells}")
    table = "\n".join(rows)
    return f'[table]\ncolumns = "{relays} | L1 L2 L3 L4"\nrows = """\n{table}\n"""\n'


STRUCTURED = """\
[formulas]
ANY2 = "2oo8(K1, K2, K3, K4, K5, K6, K7, K8)"
SAME = "K1 K5 + K1' K5' + K2 K6 K3' + K4 (K7 + K8')"
WARN = "K1 K2' (K3 + K4 K5) + K6 K7' K8"
GO = "K1 K2 K3 + K4' (K5 + K6) K7 K8"
"""


def timed(arguments: list[str], runs: int) -> list[float]:
    """Wall-clock seconds of each run of the command, in a folder of its own."""
    tool = Path(sys.executable).with_name("contactlogic")
    taken = []
    for _ in range(runs):
        with tempfile.TemporaryDirectory() as folder:
            start = time.perf_counter()
            subprocess.run(
                [str(tool), *arguments], cwd=folder, check=True, stdout=subprocess.DEVNULL
            )
            taken.append(time.perf_counter() - start)
    return taken


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--runs", type=int, default=5)
    runs = parser.parse_args().runs
    print(f"{os.cpu_count()} cores, Python {sys.version.split()[0]}")
    with tempfile.TemporaryDirectory() as folder:
        jobs = {"structured": STRUCTURED, "random": eight_inputs(1)}
        paths = {}
        for name, text in jobs.items():
            paths[name] = Path(folder) / f"{name}.toml"
            paths[name].write_text(text)
        cases = {
            "--help": (["--help"], runs),
            "4 inputs, 7 loads (examples/tide.toml)": (
                ["wire", str(ROOT / "examples" / "tide.toml")],
                runs,
            ),
            "4 inputs, 2 loads (examples/ferry.toml)": (
                ["wire", str(ROOT / "examples" / "ferry.toml")],
                runs,
            ),
            "8 inputs, 4 loads, formulas": (["wire", str(paths["structured"])], 1),
            "8 inputs, 4 loads, random rows": (["wire", str(paths["random"])], 1),
        }
        for name, (arguments, times) in cases.items():
            taken = timed(arguments, times)
            print(f"{name:42} median {statistics.median(taken):6.2f} s, worst {max(taken):6.2f} s")


if __name__ == "__main__":
    main()
