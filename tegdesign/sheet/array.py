"""Report and drawing of an array of unequal modules."""

from __future__ import annotations

import os
from typing import Any

from tegdesign.design.array import ArrayRating, Fault
from tegdesign.design.wording import ZERO_CELSIUS, amount, celsius, number, percent
from tegdesign.sheet import description, performance
from tegdesign.sheet.drawing import check_ending, plain, save_drawing
from tegdesign.sheet.figures import GRID
from tegdesign.sheet.section import Section, facts, section, table, words
from tegdesign.sheet.text import fold, section_text

HEADS = (
    "module",
    "string",
    "state",
    "source",
    "sink",
    "hot j",
    "open",
    "cold j",
    "I [A]",
    "V [V]",
    "P [W]",
    "own P [W]",
)
KINDS = ("open", "shorted", "cold")


def array_report(result: ArrayRating) -> str:
    """Return the report of an array: verdict, totals, each module, connections, faults, cautions, notes."""
    told: Any = result  # these sections ask for checks, cautions and notes only
    sections = (
        performance.verdict(told),
        _totals(result),
        _each(result),
        _connections(result),
        _faults(result),
        description.cautions(told),
        description.notes(told),
    )
    title = fold(f"{result.design.title}, revision {result.design.revision}", 100)
    return "\n\n".join([title, *(section_text(part) for part in sections if part)]) + "\n"


def _totals(r: ArrayRating) -> Section:
    order = "dealt to the strings in turn" if r.in_turn else "counted string after string"
    diodes = [
        f"{name} {amount(drop, 'V')}"
        for name, drop in (("bypass", r.bypass_drop_V), ("blocking", r.blocking_drop_V))
        if drop is not None
    ]
    return section(
        "Array",
        facts(
            ("connection", f"{r.parallel} in parallel of {r.series} in series, modules {order}"),
            ("diodes", ", ".join(diodes) or "none"),
            ("temperatures", r.temperatures),
            ("load", r.design.load.words()),
            ("power", f"{amount(r.power_W, 'W')} at {amount(r.voltage_V, 'V')}, {amount(r.current_A, 'A')}"),
            ("open circuit", amount(r.open_circuit_voltage_V, "V")),
            ("currents of the strings", ", ".join(amount(i, "A") for i in r.string_current_A)),
            ("most power of the array", amount(r.most_power_W, "W")),
            ("each whole module by itself", f"{amount(r.independent_power_W, 'W')}, with matched loads of their own"),
            ("lost by joining them", percent(r.mismatch_loss, 2)),
            ("heat drawn, efficiency", f"{amount(r.heat_in_W, 'W')}, {percent(r.efficiency, 2)}"),
        ),
    )


def _each(r: ArrayRating) -> Section:
    rows = [
        (
            f"{m.module}{'' if m.exact else ' ~'}",
            str(m.string),
            "backwards" if m.driven_backwards else m.state,
            "-" if m.T_source_K is None else _degrees(m.T_source_K),
            *(_degrees(t) for t in (m.T_sink_K, m.T_hot_junction_K, m.T_hot_junction_open_K, m.T_cold_junction_K)),
            *(number(0.0 if abs(v) < 1e-12 else v) for v in (m.current_A, m.voltage_V, m.power_W, m.own_power_W)),
        )
        for m in r.modules
    ]
    note = "degC; open: hot junction without current; I through the legs; own P with a matched load of its own."
    return section("Module by module", words(note), table(HEADS, rows, (2,)))


def _degrees(temperature: float) -> str:
    return celsius(temperature).removesuffix(" degC")


def _connections(r: ArrayRating) -> Section:
    window = any(c.keeps_window is not None for c in r.connections)
    rows = []
    for c in r.connections:
        told = ("-" if v is None else number(v) for v in (c.power_W, c.voltage_V, c.open_circuit_voltage_V))
        verdict = "keeps it" if c.keeps_window else f"misses: {c.words}" if window else c.words or "not asked for"
        rows.append((f"{c.series}", f"{c.parallel}", *told, verdict))
    heads = ("series", "parallel", "P [W]", "V [V]", "open [V]", "voltage window")
    return section("Other connections of the same modules", table(heads, rows, (5,)))


def _faults(r: ArrayRating) -> Section | None:
    if not r.faults:
        return None
    by_module: dict[int, dict[str, Fault]] = {}
    for f in r.faults:
        by_module.setdefault(f.module, {})[f.fault] = f
    driven = sum(m.driven_backwards for m in r.modules)
    rows = []
    for module, found in sorted(by_module.items()):
        cells = [cell for kind in KINDS for cell in _fault(found[kind])]
        rows.append(
            (str(module), *cells, ", ".join(kind for kind in KINDS if (found[kind].driven_backwards or 0) > driven))
        )
    heads = ("module", *(text for kind in KINDS for text in (f"{kind} [W]", "change")), "drives backwards")
    meaning = "One at a time. open: no current passes; shorted: no voltage; cold: source no warmer than the sink."
    why = dict.fromkeys(f"Module {f.module} {f.fault}: {f.words}." for f in r.faults if f.words)
    return section("Faults", words(meaning), table(heads, rows, (7,)), *([words(*why)] if why else []))


def _fault(f: Fault) -> tuple[str, str]:
    return ("-" if f.power_W is None else number(f.power_W), percent(f.change))


def draw_array(result: ArrayRating, path: str | os.PathLike[str]) -> None:
    """Draw temperatures, currents and powers module by module, and what each fault leaves, into a file."""
    from matplotlib.figure import Figure
    from matplotlib.ticker import MaxNLocator

    check_ending(path)
    modules = result.modules
    x = [m.module for m in modules]
    panels = 4 if result.faults else 3
    drawing = Figure(figsize=(max(6.4, 2.4 + 0.28 * len(x)), 1.2 + 1.9 * panels), layout="constrained")
    axes = drawing.subplots(panels, 1, sharex=True)
    for name, mark, face, label in (
        ("T_source_K", "_", "black", "source"),
        ("T_hot_junction_K", "o", "black", "hot junction"),
        ("T_cold_junction_K", "s", "white", "cold junction"),
        ("T_sink_K", "x", "black", "sink"),
    ):
        values = [getattr(m, name) for m in modules]
        if None not in values:
            shown = [v - ZERO_CELSIUS for v in values]
            axes[0].plot(x, shown, mark, color="black", markerfacecolor=face, markersize=6, label=label)
    axes[0].set(ylabel="temperature [degC]")
    axes[1].bar(x, [m.current_A for m in modules], color="0.8", edgecolor="black", linewidth=0.6)
    axes[1].set(ylabel="current [A]")
    shades = ["white" if m.driven_backwards else "0.55" for m in modules]
    hatches = ["////" if m.driven_backwards else "" for m in modules]
    axes[2].bar(x, [m.power_W for m in modules], color=shades, hatch=hatches, edgecolor="black", linewidth=0.6)
    axes[2].plot(x, [m.own_power_W for m in modules], "_", color="black", markersize=10, label="with a load of its own")
    axes[2].set(ylabel="power [W]")
    if result.faults:
        for kind, mark, face in (("open", "o", "black"), ("shorted", "s", "white"), ("cold", "^", "0.6")):
            told = [f for f in result.faults if f.fault == kind and f.power_W is not None]
            axes[3].plot(
                [f.module for f in told], [f.power_W for f in told], mark, color="black", markerfacecolor=face,
                markersize=5, label=kind,
            )  # fmt: skip
        axes[3].axhline(result.power_W, color="0.4", linestyle="--", linewidth=1.0, label="no further fault")
        axes[3].set(ylabel="power of all\nwith a fault [W]", ylim=(0, None))
    for each in axes:
        each.grid(**GRID)
        each.set_axisbelow(True)
        each.axhline(0, color="black", linewidth=0.6) if each is not axes[0] else None
        if each.get_legend_handles_labels()[0]:
            each.legend(fontsize=7, ncols=5, loc="lower right", bbox_to_anchor=(1.0, 1.0), frameon=False)
    axes[0].set(xlim=(0.4, len(x) + 0.6))
    axes[0].xaxis.set_major_locator(MaxNLocator(integer=True))
    axes[-1].set(
        xlabel=f"module ({result.parallel} strings of {result.series}" + (", dealt in turn)" if result.in_turn else ")")
    )
    drawing.suptitle(plain(result.design.title), fontsize=10)
    save_drawing(drawing, path)
