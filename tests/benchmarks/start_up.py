"""Start-up as a ratio to importing the command-line libraries, in one run.

    python tests/benchmarks/start_up.py

Commands take turns, so that a busy moment hits all of them; the fastest of each counts. All run
from compiled files, as they do once installed.
"""

from __future__ import annotations

import os
import subprocess
import sys
import time

ROUNDS = 15
RLC = [sys.executable, "-m", "rlc"]
BASE = [sys.executable, "-c", "import typer, rich"]
COMMANDS = {
    "import typer, rich": BASE,
    "rlc --help": [*RLC, "--help"],
    "rlc steady, from flags": [
        *RLC, "steady", "--resistance", "12 ohm", "--inductance", "33 mH",
        "--capacitance", "1u0", "--source-rms", "24 V", "--frequency", "880 Hz",
    ],
}  # fmt: skip


def main() -> None:
    """Print the fastest of several runs of each command and its ratio to the first."""
    best = dict.fromkeys(COMMANDS, float("inf"))
    settings = {name: value for name, value in os.environ.items() if "BYTECODE" not in name}
    for count in range(ROUNDS + 1):
        for name, command in COMMANDS.items():
            start = time.perf_counter()
            subprocess.run(command, check=True, capture_output=True, env=settings)
            # The first round compiles.
            if count:
                best[name] = min(best[name], time.perf_counter() - start)
    base = best["import typer, rich"]
    for name, seconds in best.items():
        print(f"{name:24} {1e3 * seconds:6.0f} ms   {seconds / base:.2f} x")


if __name__ == "__main__":
    main()
