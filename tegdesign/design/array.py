"""Modules of a design joined in strings at unequal temperatures: operating point, mismatch, faults, connections."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from dataclasses import asdict, dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from tegdesign.design import members
from tegdesign.design.condition import OPEN
from tegdesign.design.design import Design, as_design
from tegdesign.design.rate import insist_on_data
from tegdesign.design.rating import Caution, Check
from tegdesign.design.wiring import Case, Failed, Solved, Wiring
from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.system.load import Matched

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class Member:
    """One module of the array; ``current_A`` is that through its legs, ``power_W`` negative where it is driven.

    ``own_power_W`` is what it would give with a matched load of its own. ``voltage_V`` is between its leads, where the
    bypass diode sits. ``T_hot_junction_open_K`` is without current, ``T_source_K`` None where the heat is given.
    """

    module: int
    string: int
    state: str
    T_source_K: float | None
    T_sink_K: float
    T_hot_junction_K: float
    T_cold_junction_K: float
    T_hot_junction_open_K: float
    current_A: float
    voltage_V: float
    bypass_current_A: float
    power_W: float
    own_power_W: float
    heat_in_W: float
    room_to_service_limit_K: float
    outside_data_K: float
    driven_backwards: bool
    exact: bool


@dataclass(frozen=True)
class Fault:
    """What is left of the power when one module fails: open, shorted, or cold (its source no warmer than its sink)."""

    module: int
    fault: str
    power_W: float | None
    change: float | None
    driven_backwards: int | None
    words: str


@dataclass(frozen=True)
class Connection:
    """Another way to join the same modules, all of them, with the load of the design."""

    series: int
    parallel: int
    power_W: float | None
    voltage_V: float | None
    open_circuit_voltage_V: float | None
    keeps_window: bool | None
    words: str


@dataclass(frozen=True)
class ArrayRating:
    """A design as an array of unequal modules with the load of the design; steady, SI units.

    ``most_power_W`` is that of the array with a matched load, ``independent_power_W`` the sum of what the whole modules
    would give with matched loads of their own; ``mismatch_loss`` = 1 - most / independent.
    """

    design: Design
    series: int
    parallel: int
    in_turn: bool
    bypass_drop_V: float | None
    blocking_drop_V: float | None
    temperatures: str
    power_W: float
    voltage_V: float
    current_A: float
    open_circuit_voltage_V: float
    most_power_W: float
    independent_power_W: float
    mismatch_loss: float
    heat_in_W: float
    efficiency: float
    string_current_A: tuple[float, ...]
    modules: tuple[Member, ...]
    connections: tuple[Connection, ...]
    faults: tuple[Fault, ...]
    checks: tuple[Check, ...]
    cautions: tuple[Caution, ...]
    notes: tuple[str, ...]

    @property
    def failed(self) -> tuple[Check, ...]:
        """Checks that are not passed."""
        return tuple(c for c in self.checks if not c.passed)

    @property
    def met(self) -> bool:
        """Whether every limit and requirement holds."""
        return not self.failed

    def to_frame(self) -> pd.DataFrame:
        """Return the modules as a table, column names with units."""
        import pandas as pd

        return pd.DataFrame([asdict(m) for m in self.modules]).set_index("module")

    def faults_frame(self) -> pd.DataFrame:
        """Return the faults as a table; empty where none were asked for."""
        import pandas as pd

        return pd.DataFrame([asdict(f) for f in self.faults], columns=list(Fault.__dataclass_fields__))

    def to_dict(self) -> dict[str, Any]:
        """Return everything as plain values for JSON; keys end in their unit."""
        data = {name: value for name, value in self.__dict__.items() if name != "design"}
        for name in ("modules", "connections", "faults", "checks", "cautions"):
            data[name] = [asdict(item) for item in data[name]]
        return {"met": self.met, "title": self.design.title, **data}


def array(
    design: Design | str | os.PathLike[str],
    *,
    series: int | None = None,
    parallel: int | None = None,
    in_turn: bool = False,
    hot: Sequence[float] = (),
    cold: Sequence[float] = (),
    broken: Sequence[int] = (),
    shorted: Sequence[int] = (),
    bypass_drop: float | None = None,
    blocking_drop: float | None = None,
    faults: bool = False,
) -> ArrayRating:
    """Return what modules of a design do that are joined in strings and stand at temperatures of their own.

    Modules are counted from 1, string after string, or dealt to the strings in turn. Source and sink of each hold
    their temperatures: the given ones; else, along a stream, those before each row of ``rows`` with a module each and
    matched loads; else those of the design. On a stream the modules share the exchanger, and each sees the whole flow.

    Parameters
    ----------
    series, parallel : int, optional
        Modules in a string and strings; those of the design if not given.
    hot, cold : sequence of float
        Reference temperature of the source and of the sink of each module [K], or one for all.
    broken, shorted : sequence of int
        Modules with an open joint, and shorted ones.
    bypass_drop, blocking_drop : float, optional
        Drop [V] of a diode across each module, and in each string; 10 mohm above it.
    faults : bool
        Look at each single fault as well.

    Raises
    ------
    InputError
        A number, temperature or diode is impossible, or no current can flow.
    DataRangeError
        A leg would be used farther outside its data than the design allows, loaded or open.
    ConvergenceError
        The array has no operating point.
    """
    design = as_design(design)
    s, p = _connection(design, series, parallel)
    job = Wiring(design, s * p, hot, cold, bypass_drop, blocking_drop)
    failed = Failed(_places("broken", broken, s * p), _places("shorted", shorted, s * p))
    both = [k + 1 for k in failed.broken if k in failed.shorted]
    if both:
        raise InputError(f"modules {both} are both broken and shorted; choose one")
    joined = _strings(s, p, in_turn)
    dead = job.dead(joined, failed)
    if dead:
        raise InputError(f"{dead}; mend or bypass a module, or take another connection")
    base = Case(joined, failed, design.load)
    run, best, opened = job.solve([base, replace(base, load=Matched()), replace(base, load=OPEN)])
    pair = (job.one.materials[0], job.one.materials[1])
    junctions = {
        "loaded": (run.value("hot_junction"), run.value("cold_junction")),
        "without current": job.without_current(),  # what an open string brings; strings side by side share some
    }
    own = job.own_power()
    independent = float(own[failed.whole(s * p)].sum())
    told = tuple(
        _members(
            job,
            base,
            run,
            junctions["without current"][0],
            own,
            members.service_room(pair, junctions),
            members.outside_data(pair, junctions),
        )
    )
    checks = [*members.junction_checks("module", pair, design.materials.hold_outside_data, design.require, junctions)]
    insist_on_data(checks, pair, design.materials.hold_outside_data)
    checks += _requirements(design, run, opened)
    heat = float(run.value("heat_in").sum())
    notes = [] if s * p == design.module.modules else [f"{s * p} modules here, {design.module.modules} in the design"]
    return ArrayRating(
        design=design,
        series=s,
        parallel=p,
        in_turn=in_turn,
        bypass_drop_V=bypass_drop,
        blocking_drop_V=blocking_drop,
        temperatures=job.words,
        power_W=run.power,
        voltage_V=run.voltage,
        current_A=run.current,
        open_circuit_voltage_V=opened.voltage,
        most_power_W=best.power,
        independent_power_W=independent,
        mismatch_loss=1 - best.power / independent if independent else 0.0,
        heat_in_W=heat,
        efficiency=run.power / heat,
        string_current_A=tuple(float(i) for i in run.string_current),
        modules=told,
        connections=tuple(_connections(job, base, in_turn)),
        faults=tuple(_faults(job, base, run.power if run.power > members.ROUNDING * independent else 0.0))
        if faults
        else (),
        checks=tuple(checks),
        cautions=(
            *members.overheated("module", pair, np.array([m.room_to_service_limit_K for m in told])),
            *members.driven_backwards("module", run.backwards, run.value("power")),
            *members.by_mean_properties("module", run.exact),
        ),
        notes=(*notes, *members.left_out(design)),
    )


def _connection(design: Design, series: int | None, parallel: int | None) -> tuple[int, int]:
    """Return modules in a string and strings; one that is not given follows from the modules of the design."""
    g = design.module
    for name, value in (("series", series), ("parallel", parallel)):
        if value is not None and value < 1:
            raise InputError(f"{name} = {value}, but at least 1 is needed; mend it")
    if series is not None and parallel is not None:
        return series, parallel
    if series is None and parallel is None:
        return g.modules_in_series, g.modules_in_parallel
    name, given, other = ("series", series, "parallel") if series else ("parallel", parallel, "series")
    assert given is not None
    if g.modules % given:
        raise InputError(
            f"{name} = {given} does not divide the {g.modules} modules of the design; choose a divisor, or give "
            f"{other} as well"
        )
    return (given, g.modules // given) if series else (g.modules // given, given)


def _strings(series: int, parallel: int, in_turn: bool) -> tuple[int, ...]:
    """Return the string of each module, counted from 0."""
    return tuple(k % parallel if in_turn else k // series for k in range(series * parallel))


def _places(name: str, given: Sequence[int], count: int) -> tuple[int, ...]:
    for k in given:
        if not 1 <= k <= count:
            raise InputError(f"{name}: there is no module {k}, they are 1 to {count}; mend the number")
    return tuple(sorted({k - 1 for k in given}))


def _members(
    job: Wiring, case: Case, run: Solved, idle: Array, own: Array, room: Array, outside: Array
) -> Iterator[Member]:
    given = job.design.source.given_heat is not None
    backwards = set(run.backwards)
    for k in range(job.count):
        state = "open" if k in case.failed.broken else "shorted" if k in case.failed.shorted else "whole"
        yield Member(
            module=k + 1,
            string=case.string[k] + 1,
            state=state,
            T_source_K=None if given else job.hot[k],
            T_sink_K=job.cold[k],
            T_hot_junction_K=float(run.value("hot_junction")[k]),
            T_cold_junction_K=float(run.value("cold_junction")[k]),
            T_hot_junction_open_K=float(idle[k]),
            current_A=float(run.value("current")[k]),
            voltage_V=float(run.point.module_voltage[run.modules][k]),
            bypass_current_A=float(run.point.bypass_current[run.modules][k]),
            power_W=float(run.value("power")[k]),
            own_power_W=float(own[k]),
            heat_in_W=float(run.value("heat_in")[k]),
            room_to_service_limit_K=float(room[k]),
            outside_data_K=float(outside[k]),
            driven_backwards=k in backwards,
            exact=bool(run.exact[k]),
        )


def _requirements(design: Design, run: Solved, opened: Solved) -> Iterator[Check]:
    """Yield what design and load ask of the whole array."""
    r = design.require
    low, high = r.voltage or (None, None)
    asked = [
        ("required power", "loaded", "W", "least", run.power, r.power),
        ("lower end of the voltage window", "loaded", "V", "least", run.voltage, low),
        ("upper end of the voltage window", "loaded", "V", "most", run.voltage, high),
        ("open-circuit voltage", "open circuit", "V", "most", opened.voltage, r.open_circuit_voltage),
    ]
    states = {"rated": run, "open circuit": opened}
    for limit in design.load.limits():
        if limit.state in states:
            value = getattr(states[limit.state], limit.quantity)
            name = "loaded" if limit.state == "rated" else limit.state
            asked.append((limit.name, name, limit.unit, limit.sense, value, limit.bound))
    for key, state, unit, sense, value, bound in asked:
        if bound is not None:
            yield members.checked(key, state, unit, sense, value, bound)


def _connections(job: Wiring, base: Case, in_turn: bool) -> Iterator[Connection]:
    """Yield every way to join all modules in equal strings."""
    design, n = job.design, job.count
    ways = [(k, n // k) for k in range(1, n + 1) if n % k == 0]
    loaded = [replace(base, string=_strings(s, p, in_turn)) for s, p in ways]
    found = job.solve_each([*loaded, *(replace(case, load=OPEN) for case in loaded)])
    window = design.require.voltage is not None or design.require.open_circuit_voltage is not None
    for (s, p), run, opened in zip(ways, found[: len(ways)], found[len(ways) :], strict=True):
        if isinstance(run, str) or isinstance(opened, str):
            yield Connection(
                s, p, None, None, None, False if window else None, run if isinstance(run, str) else str(opened)
            )
            continue
        missed = [c for c in _requirements(design, run, opened) if c.unit == "V" and not c.passed]
        keeps = not missed if window else None
        yield Connection(s, p, run.power, run.voltage, opened.voltage, keeps, "; ".join(c.name for c in missed))


def _faults(job: Wiring, base: Case, power: float) -> Iterator[Fault]:
    """Yield each single fault of each module that is whole, beside those that there are."""
    kinds = {"open": "broken", "shorted": "shorted", "cold": "cold"}
    asked = [(k, kind) for kind in kinds for k in base.failed.whole(job.count)]
    cases = [
        replace(base, failed=replace(base.failed, **{kinds[kind]: (*getattr(base.failed, kinds[kind]), k)}))
        for k, kind in asked
    ]
    dead = [job.dead(case.string, case.failed) for case in cases]
    for (k, kind), words, run in zip(asked, dead, job.solve_each(cases), strict=True):
        if words:
            yield Fault(k + 1, kind, 0.0, -1.0 if power > 0 else None, 0, words)
        elif isinstance(run, str):
            yield Fault(k + 1, kind, None, None, None, run)
        else:
            yield Fault(k + 1, kind, run.power, run.power / power - 1 if power > 0 else None, len(run.backwards), "")
