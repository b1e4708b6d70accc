"""Report and drawing of a comparison of pairs."""

from __future__ import annotations

import os

from tegdesign.design.compare import Comparison, aimed
from tegdesign.sheet.drawing import check_ending, plain, save_drawing
from tegdesign.sheet.sizing import AIM_UNIT
from tegdesign.sheet.table import table_text

HEAD = (
    "", "n", "p", "P [W]", "eff [%]", "W/cm2", "kW/kg", "mass [g]", "L [mm]", "An/Ap", "V [V]", "Th open [K]",
    "equal areas", "s ratio",
)  # fmt: skip


def comparison_report(result: Comparison, top: int = 20) -> str:
    """Return the ranking as text, then notes on each pair shown, then who drops out and why."""
    aim = result.brief.aim
    lines = [f"{'PAIRS FOUND' if result.met else 'NO PAIR MEETS THE BRIEF'}: {result.brief.title}"]
    lines.append(
        f"{len(result.ranks)} pairs ranked by {aim}, {len(result.dropped)} drop out; free dimensions, not rounded\n"
    )
    rows, notes = [], []
    for k, r in enumerate(result.ranks[:top], 1):
        rows.append(
            [
                f"{k}" + ("" if r.met else " *"),
                r.n,
                r.p,
                f"{r.power_W:.4g}",
                f"{100 * r.efficiency:.2f}",
                f"{r.power_per_footprint_W_per_m2 / 1e4:.3g}",
                f"{r.power_per_material_mass_W_per_kg / 1e3:.3g}",
                f"{1e3 * r.material_mass_kg:.3g}",
                f"{1e3 * r.leg_length_m:.3g}",
                f"{r.area_ratio_n_to_p:.2f}",
                f"{r.voltage_V:.3g}",
                f"{r.T_hot_junction_open_K:.1f}",
                f"{-100 * r.penalty_of_equal_areas:.1f} %",
                f"{r.compatibility_spread:.2f}",
            ]
        )
        said = [f"binds: {r.limit}"] if r.limit else []
        said += [f"end values held by {r.outside_data_K:.1f} K"] if r.outside_data_K > 0 else []
        made = [
            f"{side} made with {doping * 1e-6:.3g} carriers/cm3"
            for side, doping in (("n", r.doping_n_per_m3), ("p", r.doping_p_per_m3))
            if doping is not None
        ]
        said += [*made, *([f"hazards: {r.hazards}"] if r.hazards else [])]
        notes.append(f"  {k}: " + "; ".join(said or ["nothing binds"]))
    lines += [table_text(HEAD, rows, range(3, len(HEAD))), ""]
    lines.append(
        "equal areas: change of the aim with A_n = A_p; s ratio: largest over smallest compatibility factor"
    )
    lines.append("* misses a requirement of the brief") if any("*" in row[0] for row in rows) else None
    lines += ["", "Notes", *notes]
    if len(result.ranks) > top:
        lines.append(f"  ... {len(result.ranks) - top} more pairs; --top, --csv or --json show them")
    if result.dropped:
        lines += ["", "Drop out", *_reasons(result)]
    return "\n".join(lines)


def _reasons(result: Comparison) -> list[str]:
    """Return one line for each material that makes pairs drop out, with the partner it comes nearest with."""
    lines = []
    for culprit in dict.fromkeys(d.culprit for d in result.dropped):  # in order of score, so the nearest comes first
        pairs = [d for d in result.dropped if d.culprit == culprit]
        first = pairs[0]
        partner = first.p if first.n == culprit else first.n
        who = f"{culprit} (with {len(pairs)} partners; nearest with {partner})" if culprit else f"{first.n} / {first.p}"
        lines.append(f"  {who}: {first.reason}")
    return lines


def draw_comparison(result: Comparison, path: str | os.PathLike[str], most: int = 25) -> None:
    """Draw the best pairs as bars of the aim with their efficiency beside them."""
    from matplotlib.figure import Figure

    check_ending(path)
    ranks = result.ranks[:most]
    drawing = Figure(figsize=(9.0, 1.6 + 0.3 * max(len(ranks), 3)), layout="constrained")
    bars, dots = drawing.subplots(1, 2, sharey=True, width_ratios=[2, 1])
    unit = AIM_UNIT[result.brief.aim]
    factor = 100.0 if unit == "%" else 1.0
    places = range(len(ranks))
    bars.barh(
        places,
        [factor * aimed(r, result.brief.aim) for r in ranks],
        color=["0.45" if r.met else "0.85" for r in ranks],
        edgecolor="black",
        linewidth=0.6,
    )
    bars.set_yticks(places, [f"{r.n} / {r.p}" for r in ranks], fontsize=7.5)
    bars.set_ylim(len(ranks) - 0.4, -0.6)
    bars.set_xlabel(f"{result.brief.aim} [{unit}]")
    dots.plot([1e3 * r.leg_length_m for r in ranks], places, "o", color="black", markersize=4)
    dots.set(xlabel="best leg length [mm]", xlim=(0, None))
    for axes in (bars, dots):
        axes.grid(axis="x", color="0.88", linewidth=0.6)
        axes.set_axisbelow(True)
    pale = "" if all(r.met for r in ranks) else " (pale: misses a requirement)"
    drawing.suptitle(f"{plain(result.brief.title)}: pairs at their own best geometry{pale}", fontsize=10)
    save_drawing(drawing, path)
