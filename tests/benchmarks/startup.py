"""Whole-process times as a user feels them, then solving alone: ``python tests/benchmarks/startup.py [--quick]``.

Every command runs in a process of its own, in turn with a bare ``import numpy, scipy.optimize``, so that a busy
machine slows both; the table gives medians and their ratio to the bare import of the same run. A second table gives
the processor time of ``size`` for every example, from the read brief with its materials at hand to the rated design,
in turn with 1000 single legs solved to the default accuracy. A third holds the same job with more asked of it against
the plain one: eight states, both dopings free, materials prepared anew.
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


def solving(repeats: int) -> None:
    """Print the time of search, rounding and rating of each shipped example, and its ratio to the reference."""
    sys.path.insert(0, str(HERE))
    import numpy as np

    from tegdesign.design.brief import read_brief
    from tegdesign.design.size import size
    from tegdesign.leg.exact import solve_leg
    from tegdesign.material import library

    material = library.find("bismuth-telluride-p-sb1.54")
    hot, cold, current = np.linspace(400.0, 480.0, 1000), np.full(1000, 320.0), np.linspace(0.0, 20.0, 1000)

    def legs() -> None:
        solve_leg(material, hot, cold, current, slopes=True)

    briefs = {path.stem: read_brief(path) for path in sorted(EXAMPLES.glob("*.toml"))}
    one_pair = {name: brief for name, brief in briefs.items() if len(brief.materials.n) == len(brief.materials.p) == 1}
    jobs = {"1000 legs": legs} | {name: lambda brief=brief: size(brief) for name, brief in one_pair.items()}
    times: dict[str, list[float]] = {name: [] for name in jobs}
    for number in range(repeats + 1):
        for name, job in jobs.items():
            start = time.process_time()
            job()
            if number:  # the first prepares the materials
                times[name].append(time.process_time() - start)
    reference = statistics.median(times["1000 legs"])
    print(f"\n{'solving, processor time':36}{'median [s]':>12}{'smallest [s]':>14}{'ratio':>8}   runs each: {repeats}")
    for name, found in times.items():
        median = statistics.median(found)
        print(f"{name:36}{median:12.4f}{min(found):14.4f}{median / reference:8.1f}")


FILMS = {
    "source": {"kind": "film", "temperature": "560 degC", "coefficient": "800 W/m^2/K"},
    "sink": {"kind": "film", "temperature": "40 degC", "coefficient": "3000 W/m^2/K"},
    "limits": {"footprint": ["60 mm", "60 mm"]},
    "require": {"hot_junction": "420 degC"},
}
PAIR = {"n": "lead-telluride-n-bands", "p": "lead-telluride-p-bands"}
OTHERS = ((480, 3000), (520, 1500), (600, 3000), (560, 700), (420, 500), (580, 2000), (500, 900))  # degC, W/m^2/K
STATES = [
    {"name": f"state {k}", "source": {"temperature": f"{hot} degC"}, "sink": {"coefficient": f"{film} W/m^2/K"}}
    for k, (hot, film) in enumerate(OTHERS)
]


def more_asked(repeats: int) -> None:
    """Print what eight states and free dopings cost beside one state and given dopings, and preparing materials."""
    from tegdesign.design.brief import Brief
    from tegdesign.design.size import size
    from tegdesign.material import library

    free = {"free": ["doping"]}
    briefs = {
        "one state, dopings given": Brief.model_validate(FILMS | {"materials": PAIR}),
        "eight states": Brief.model_validate(FILMS | {"materials": PAIR, "states": STATES}),
        "both dopings free": Brief.model_validate(FILMS | {"materials": PAIR | {"make_n": free, "make_p": free}}),
    }
    computed = library.find(PAIR["p"])
    jobs = {name: lambda brief=brief: size(brief) for name, brief in briefs.items()}
    jobs["preparing a computed material"] = lambda: computed.made(computed.doping)  # type: ignore[attr-defined]
    times: dict[str, list[float]] = {name: [] for name in jobs}
    for number in range(repeats + 1):
        for name, job in jobs.items():
            start = time.process_time()
            job()
            if number:
                times[name].append(time.process_time() - start)
    plain = min(times["one state, dopings given"])
    print(f"\n{'more asked, processor time':36}{'smallest [s]':>14}{'ratio':>8}   runs each: {repeats}")
    for name, found in times.items():
        print(f"{name:36}{min(found):14.4f}{min(found) / plain:8.2f}")


def main() -> None:
    """Print the tables."""
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
    solving(repeats)
    more_asked(repeats)


if __name__ == "__main__":
    main()
