"""The commands as real processes: start-up, pipes, exit codes."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

EXAMPLES = Path(__file__).parents[1] / "examples"
STEADY = [
    "steady", "--resistance", "12 ohm", "--inductance", "33 mH", "--capacitance", "1u0",
    "--source-rms", "24 V", "--frequency", "880 Hz",
]  # fmt: skip


def rlc(*words: str, timeout: float = 120) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "rlc", *words], capture_output=True, text=True, timeout=timeout
    )


def loaded(*words: str) -> set[str]:
    """Top-level packages that a command has imported by its end."""
    code = (
        "import sys, atexit; sys.argv = ['rlc', *sys.argv[1:]];"
        "atexit.register(lambda: print(*{name.partition('.')[0] for name in sys.modules}));"
        "from rlc.__main__ import main; main()"
    )
    done = subprocess.run([sys.executable, "-c", code, *words], capture_output=True, text=True)
    assert done.returncode == 0, done.stderr
    return set(done.stdout.splitlines()[-1].split())


def test_help_loads_nothing_that_it_does_not_need() -> None:
    assert not loaded("--help") & {"numpy", "scipy", "matplotlib", "pint", "pydantic"}


def test_steady_from_flags_loads_no_library_for_other_jobs() -> None:
    assert not loaded(*STEADY) & {"scipy", "matplotlib", "pint", "pydantic"}


def test_check_as_a_process() -> None:
    done = rlc("check", str(EXAMPLES / "signal_lamp_inlet.toml"), "--json")
    assert done.returncode == 0
    assert done.stderr == ""
    assert json.loads(done.stdout)["title"].startswith("Crossing-lamp")


def test_bad_input_as_a_process() -> None:
    done = rlc("check", "none.toml")
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.count("\n") == 1


def test_no_argument_shows_the_help() -> None:
    done = rlc()
    assert done.returncode == 2
    assert "check" in done.stdout + done.stderr
    assert "Traceback" not in done.stderr


def test_a_closed_pipe_is_no_crash() -> None:
    process = subprocess.Popen(
        [sys.executable, "-m", "rlc", "sweep", *STEADY[1:], "--points", "20000"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.readline()
    process.stdout.close()
    assert "Traceback" not in process.stderr.read()
    process.stderr.close()
    process.wait(timeout=60)


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
def test_a_full_disk_is_one_message() -> None:
    with Path("/dev/full").open("w") as full:
        done = subprocess.run(
            [sys.executable, "-m", "rlc", *STEADY], stdout=full, stderr=subprocess.PIPE, text=True
        )
    assert done.returncode == 2
    assert done.stderr == "The answer cannot be written: No space left on device\n"


def test_output_in_an_encoding_without_our_signs() -> None:
    done = subprocess.run(
        [sys.executable, "-m", "rlc", "check", str(EXAMPLES / "signal_lamp_inlet.toml")],
        capture_output=True,
        env={"PYTHONIOENCODING": "ascii", "PYTHONPATH": str(EXAMPLES.parent)},
    )
    assert done.returncode == 0, done.stderr
