"""Whole-process times as a user feels them: ``python tests/benchmarks/startup.py [--quick]``.

Every command runs in a process of its own, in turn with a bare ``import numpy, scipy.optimize``, so that a busy
machine slows both; the table gives medians and their ratio to the bare import of the same run.
"""

from __future__ import annotations

import argparse
import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

HERE = Path(__file__).resolve().parents[2]
EXAMPLES = HERE / "examples"
BARE = "import numpy, scipy.optimize"
JOBS = {
    "import of numpy and scipy.optimize": ["-c", BARE],
    "tegdesign --help": ["-m", "tegdesign", "--help"],
    "tegdesign size flue-gas-plate": ["-m", "tegdesign", "size", str(EXAMPLES / "flue-gas-plate.toml"), "-o", "d.toml"],
    "tegdesign compare pair-choice": ["-m", "tegdesign", "compare", str(EXAMPLES / "pair-choice.toml")],
}
REFERENCE = next(iter(JOBS))


def measure(command: list[str], folder: str) -> float:
    """Return the time of one process [s]."""
    start = time.perf_counter()
    subprocess.run([sys.executable, *command], cwd=folder, check=True, capture_output=True)
    return time.perf_counter() - start


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--quick", action="store_true", help="each job once, to see that it runs")
    quick = parser.parse_args().quick
    repeats = 1 if quick else 7
    # without an installation the program is taken from the checkout
    os.environ["PYTHONPATH"] = os.pathsep.join(filter(None, [os.environ.get("PYTHONPATH"), str(HERE)]))
    times: dict[str, list[float]] = {name: [] for name in JOBS}
    with tempfile.TemporaryDirectory() as folder:
        for command in [] if quick else JOBS.values():
            measure(command, folder)  # files into the cache of the system
        for _ in range(repeats):
            for name, command in JOBS.items():
                times[name].append(measure(command, folder))
    reference = statistics.median(times[REFERENCE])
    print(f"{'job':36}{'median [s]':>12}{'smallest [s]':>14}{'ratio':>8}   runs each: {repeats}")
    for name, found in times.items():
        median = statistics.median(found)
        print(f"{name:36}{median:12.3f}{min(found):14.3f}{median / reference:8.2f}")


if __name__ == "__main__":
    main()
