"""Speed of coupled operating points of modules, each kind of load, beside that of their legs alone; one thread.

python tests/benchmarks/module.py [--quick]
"""

from __future__ import annotations

import os

os.environ["OMP_NUM_THREADS"] = os.environ["OPENBLAS_NUM_THREADS"] = "1"  # before numpy is imported

import argparse
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tegdesign.leg.exact import solve_leg
from tegdesign.material.library import find
from tegdesign.module.module import Modules
from tegdesign.system.boundary import Film
from tegdesign.system.law import Law
from tegdesign.system.load import AnyLoad, BestEfficiency, GivenCurrent, Matched, Resistance
from tegdesign.system.operating_point import operating_point

PAIRS = (  # pair, source [K]: 5 to 6, 11 to 12 and 13 points
    ("bismuth-telluride-n-se0.3", "bismuth-telluride-p-sb1.58", "540 K"),
    ("skutterudite-n", "skutterudite-p", "780 K"),
    ("lead-telluride-n", "lead-telluride-p", "860 K"),
)
LOADS: tuple[AnyLoad, ...] = (
    Matched(),
    BestEfficiency(),
    Resistance(resistance="2e-5 ohm"),  # type: ignore[arg-type]  # times couples, leg length over area
    GivenCurrent(current="0 A"),  # type: ignore[arg-type]
)


def random_modules(n: str, p: str, size: int) -> Modules:
    """Return different modules of one pair with every loss on."""
    r = np.random.default_rng(1)
    index = np.zeros(size, dtype=np.intp)
    side_n, gap = r.uniform(1e-3, 3e-3, size), r.uniform(1e-3, 2e-3, size)
    side_p = side_n * r.uniform(0.8, 1.25, size)
    pitch = np.maximum(side_n, side_p) + gap
    couples = r.integers(10, 200, size).astype(float)
    return Modules(
        [find(n), find(p)], index, index + 1, r.uniform(1e-3, 6e-3, size), side_n, side_p, pitch, couples,
        2.1 * couples * pitch**2, contact_resistivity_n=2e-9, contact_resistivity_p=2e-9, electrode_thickness=0.3e-3,
        electrode_resistivity=1.7241e-8, electrode_coefficient=0.00393, substrate_thickness_hot=0.8e-3,
        substrate_conductivity_hot=24.0, substrate_thickness_cold=0.8e-3, substrate_conductivity_cold=24.0,
        interface_hot=3e-5, interface_cold=3e-5, filler_conductivity=0.0267, filler_exponent=0.78, emittance_hot=0.8,
        emittance_cold=0.8,
    )  # fmt: skip


def seconds(job: Callable[[], object], repeats: int) -> float:
    """Return the shortest CPU time of a job; on a shared machine the others measure the neighbours."""
    times = []
    for _ in range(repeats):
        start = time.process_time()
        job()
        times.append(time.process_time() - start)
    return min(times)


def sides(modules: Modules, source: str) -> tuple[Law, Law]:
    """Return the films on both sides."""
    ones = np.ones(modules.size)
    hot, cold = (Film.model_validate({"temperature": t, "coefficient": "2000 W/m2/K"}) for t in (source, "315 K"))
    return hot.law(modules.footprint, ones), cold.law(modules.footprint, ones)  # type: ignore[arg-type]


def one_pair(n: str, p: str, source: str, size: int, repeats: int) -> list[list[str]]:
    """Return the rows of one pair."""
    modules = random_modules(n, p, size)
    boundaries, ones = sides(modules, source), np.ones(size)
    rows = []
    for load in LOADS:
        share = modules.couples * modules.leg_length / modules.area_p if load.kind == "resistance" else ones
        law = load.law(ones, np.asarray(share))
        point = operating_point(modules, *boundaries, law)
        rate = size / seconds(lambda law=law: operating_point(modules, *boundaries, law), repeats)  # type: ignore[misc]
        j = point.current * modules.leg_length / modules.area_p

        def legs(hot=point.hot_junction, cold=point.cold_junction, j=j):  # type: ignore[no-untyped-def]
            return solve_leg(modules.materials[1], hot, cold, j, slopes=True)

        alone = size / seconds(legs, repeats)
        rows.append(
            [
                n.removesuffix("-n"),
                load.kind,
                f"{rate / 1e3:.1f}",
                f"{point.iterations.mean():.1f}",
                f"{alone / 1e3:.0f}",
                f"{alone / rate:.1f}",
                f"{alone / rate / (2 * point.iterations.mean()):.2f}",
            ]
        )
    return rows


def small_batches(repeats: int) -> list[list[str]]:
    """Return milliseconds a call for few designs, as a search asks for them."""
    n, p, source = PAIRS[0]
    rows = []
    for size in (1, 10, 30, 100, 300):
        modules, ones = random_modules(n, p, size), np.ones(size)
        boundaries, law = sides(modules, source), Matched().law(ones, ones)
        rounds = operating_point(modules, *boundaries, law).iterations.max()
        taken = seconds(lambda m=modules, b=boundaries, w=law: operating_point(m, *b, w), repeats)  # type: ignore[misc]
        rows.append([str(size), f"{taken * 1e3:.1f}", str(rounds), f"{taken * 1e3 / rounds:.2f}"])
    return rows


def show(head: list[str], rows: list[list[str]]) -> None:
    """Print a table with aligned columns."""
    width = [max(len(r[k]) for r in [head, *rows]) for k in range(len(head))]
    for row in [head, *rows]:
        print(
            "  ".join(
                cell.rjust(w) if k > 1 else cell.ljust(w) for k, (cell, w) in enumerate(zip(row, width, strict=True))
            )
        )


def main() -> None:
    """Print both tables."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="few designs, one repeat: only to see that it runs")
    quick = parser.parse_args().quick
    size, repeats = (200, 1) if quick else (10000, 5)
    print(f"{size} different modules behind films, all losses, junctions and current to 1e-11")
    head = "pair,load,kpoints/s,iterations,klegs/s,legs over points,per leg solve"
    show(head.split(","), [row for pair in PAIRS for row in one_pair(*pair, size, repeats)])
    print(f"\nmatched load, few designs of {PAIRS[0][0].removesuffix('-n-se0.3')}")
    show(["designs", "ms a call", "iterations", "ms an iteration"], small_batches(1 if quick else 40))


if __name__ == "__main__":
    main()
