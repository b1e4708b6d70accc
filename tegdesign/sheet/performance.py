"""Sections on what the generator does: verdict, states, temperatures, losses, limits."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

from tegdesign.design.rating import Check, Rating, State
from tegdesign.design.wording import amount, both, celsius, kelvin, number, percent
from tegdesign.sheet.legs import known
from tegdesign.sheet.margin import mending
from tegdesign.sheet.section import Entry, Section, facts, section, table, words
from tegdesign.sheet.states import named


def measured(check: Check, value: float, temperature: Callable[[float], str] = celsius) -> str:
    """Return a number in the unit of a check."""
    if check.unit == "K":
        return temperature(value)
    return percent(value, 2) if check.unit == "1" else amount(value, check.unit)


def room(check: Check) -> str:
    """Return how much room a check leaves, or by how much it is missed."""
    value = abs(check.margin)
    if check.unit == "K":
        return kelvin(value)
    return percent(value, 2) if check.unit == "1" else amount(value, check.unit)


def _row(check: Check, temperature: Callable[[float], str] = celsius) -> tuple[str, ...]:
    bound = f"at {check.sense} {measured(check, check.limit, temperature)}"
    return check.name, check.state, measured(check, check.value, temperature), bound, room(check)


def verdict(rating: Rating) -> Section:
    """Say whether all limits and requirements hold, which are missed, and where the least room is."""
    total = len(rating.checks)
    if rating.met:
        said = Entry(f"MET: all {total} limits and requirements hold.", ())
        nearest = []
        for unit in dict.fromkeys(c.unit for c in rating.checks):
            nearest.append(min((c for c in rating.checks if c.unit == unit), key=lambda c: c.margin))
        rows = [_row(c) for c in nearest]
        return section(
            "Verdict", said, table(("least room", "state", "value", "limit", "room"), rows, (0, 1))
        )
    said = Entry(f"NOT MET: {len(rating.failed)} of {total} limits and requirements are missed.", ())
    rows = [_row(c) for c in rating.failed]
    missed = table(("missed", "state", "value", "limit", "missed by"), rows, (0, 1))
    mends = tuple(mending(rating)) if isinstance(rating, Rating) else ()  # rows and arrays pass here without margins
    return section("Verdict", said, missed, *([words(*mends)] if mends else []))


def limits(rating: Rating) -> Section:
    """List every limit and requirement, in every state; with named states each in that of least room."""
    shown = nearest(rating.checks) if named(rating) else rating.checks
    rows = [(*_row(c, both), "holds" if c.passed else "MISSED") for c in shown]
    heads = ("limit or requirement", "state", "value", "limit", "room or miss", "")
    title = "Limits and requirements"
    if len(shown) < len(rating.checks):
        title += f", each where least room is left (of {len(rating.checks)} in all states), all that are missed"
    return section(title, table(heads, rows, (0, 1, 5)))


def nearest(checks: Sequence[Check]) -> list[Check]:
    """Return of each limit the states in which it is missed, else the one in which least room is left."""
    kinds: dict[tuple[str, str], list[Check]] = {}
    for c in checks:
        kinds.setdefault((c.name, c.sense), []).append(c)
    shown = []
    for own in kinds.values():
        missed = sorted((c for c in own if not c.passed), key=lambda c: c.margin)
        shown += missed or [min(own, key=lambda c: c.margin)]
    return shown


def ceiling(rating: Rating) -> Section:
    """Say what the surroundings of the legs would allow, and how much of it is reached."""
    c = rating.ceiling
    if c.power_W is None:
        return section("Ceiling", words(f"No ceiling: {c.words}."))
    return section(
        "Ceiling",
        words(
            f"{amount(rating.rated.power_W, 'W')} of {amount(c.power_W, 'W')}: {percent(c.share_reached)} "
            f"reached. {c.words[:1].upper()}{c.words[1:]}."
        ),
    )


def conditions(rating: Rating) -> Section:
    """Say under which source, sink and load the rated state holds."""
    design = rating.design
    return section(
        "Conditions",
        facts(
            ("source", design.source.words()),
            ("sink", design.sink.words()),
            ("load", design.load.words()),
            ("state", "steady; voltage, current, power and heat are totals of all modules"),
            ("temperatures", "junctions are the ends of the legs, faces the outer faces of the plates"),
        ),
    )


def _negligible(value: float, scale: float) -> float:
    """Return 0 for what is left of a zero after solving."""
    return 0.0 if abs(value) < 1e-8 * abs(scale) else value


def _electrical(rating: Rating, s: State) -> list[tuple[str, str]]:
    top = rating.state("most power")
    power, voltage = _negligible(s.power_W, top.power_W), _negligible(s.voltage_V, top.open_circuit_voltage_V)
    load = "-" if s.load_resistance_ohm is None or voltage == 0 else amount(s.load_resistance_ohm, "ohm")
    ratio = "-" if s.load_ratio is None or voltage == 0 else number(s.load_ratio)
    return [
        ("power", amount(power, "W")),
        ("voltage", amount(voltage, "V")),
        ("current", amount(s.current_A, "A")),
        ("load resistance", load),
        ("internal resistance", amount(s.internal_resistance_ohm, "ohm")),
        ("load over internal resistance", ratio),
        ("voltage right after opening", amount(s.open_circuit_voltage_V, "V")),
        ("efficiency", percent(0.0 if power == 0 else s.efficiency, 2)),
        ("heat drawn", amount(s.heat_in_W, "W")),
        ("heat past the legs", amount(s.bypass_heat_W, "W")),
        ("its share of the heat drawn", percent(s.bypass_heat_W / s.heat_in_W)),
        ("heat rejected", amount(s.heat_out_W, "W")),
        ("heat flux, hot face", f"{number(s.heat_flux_hot_W_per_m2 / 1e4)} W/cm2"),
        *_of_given_heat(rating, s),
    ]


def _of_given_heat(rating: Rating, s: State) -> list[tuple[str, str]]:
    """Say what of a given heat never reaches the module, and the efficiency on all of it."""
    given = rating.design.source.given_heat
    if given is None or s.efficiency_of_given_heat is None:
        return []
    return [
        ("heat lost before the module", amount(given - s.heat_in_W, "W")),
        ("efficiency on all heat given", percent(max(s.efficiency_of_given_heat, 0.0), 2)),
    ]


def _thermal(s: State) -> list[tuple[str, str]]:
    resistance = s.face_thermal_resistance_K_per_W
    return [
        ("hot face", celsius(s.T_hot_face_K)),
        ("hot junction", celsius(s.T_hot_junction_K)),
        ("cold junction", celsius(s.T_cold_junction_K)),
        ("cold face", celsius(s.T_cold_face_K)),
        ("over the legs", kelvin(s.junction_difference_K)),
        ("face-to-face resistance", "-" if resistance is None else f"{number(resistance)} K/W"),
        ("current density, n leg", f"{number(s.current_density_n_A_per_m2 / 1e6)} A/mm2"),
        ("current density, p leg", f"{number(s.current_density_p_A_per_m2 / 1e6)} A/mm2"),
    ]


def nominal(rating: Rating) -> Section:
    """Put the usual states of the nominal case side by side."""
    columns = [_electrical(rating, s) + _thermal(s) for s in rating.nominal]
    rows = [(pairs[0][0], *(value for _, value in pairs)) for pairs in zip(*columns, strict=True)]
    title = "States of the nominal case" if named(rating) else "States"
    return section(title, table(("", *(s.name for s in rating.nominal)), rows))


def rated(rating: Rating) -> Section:
    """Give the electrical result of the rated state."""
    s = rating.rated
    parts = [
        ("  n legs", s.leg_resistance_n_ohm),
        ("  p legs", s.leg_resistance_p_ohm),
        ("  joints", s.contact_resistance_ohm),
        ("  electrodes", s.electrode_resistance_ohm),
        ("  leads", s.lead_resistance_ohm),
    ]
    shares = [
        (name, f"{amount(value, 'ohm')} ({percent(value / s.internal_resistance_ohm)})")
        for name, value in parts
    ]
    lines = _electrical(rating, s)
    density = [pair for pair in _thermal(s) if pair[0].startswith("current density")]
    after = next(k for k, pair in enumerate(lines) if pair[0] == "internal resistance") + 1
    balance = f"{amount(abs(s.heat_balance_residual_W), 'W', 2)} left over in the balance of heat and power"
    return section(
        "Rated state",
        facts(*lines[:after], *shares, *lines[after:], *density, *_load_lines(rating), ("check", balance)),
    )


def _load_lines(rating: Rating) -> Iterator[tuple[str, str]]:
    """Yield what of the power reaches the user, and what the load needs and bears against what it gets."""
    s, load = rating.rated, rating.design.load
    taken = s.power_W - s.delivered_power_W
    if abs(taken) > 1e-9 * abs(s.power_W):
        share = percent(s.delivered_power_W / s.power_W) if s.power_W > 0 else "-"
        yield (
            "power to the user",
            f"{amount(s.delivered_power_W, 'W')}, {share} of the power; the load takes {amount(taken, 'W')}",
        )
    around = {state.name for state in rating.around(rating.loaded[0])}
    for name in dict.fromkeys(limit.name for limit in load.limits()):
        for c in (c for c in rating.checks if c.name == name and c.state in around):
            verdict = f"holds, {room(c)} of room" if c.passed else f"MISSED by {room(c)}"
            yield name, f"{measured(c, c.value)} ({c.state}), at {c.sense} {measured(c, c.limit)}: {verdict}"


def ladder(rating: Rating) -> Section:
    """List the temperatures from the source to the sink with each drop and its share."""
    rungs = rating.rated.ladder
    top = max(
        range(len(rungs)), key=lambda k: rungs[k].T_K
    )  # the ambient of a fixed heat lies before, and colder
    whole = rungs[top].T_K - rungs[-1].T_K
    rows = []
    for k, rung in enumerate(rungs):
        falls = k > top
        share = percent(rung.drop_K / whole) if falls and whole > 0 else ""
        rows.append(
            (rung.place, celsius(rung.T_K), kelvin(rung.T_K), kelvin(rung.drop_K) if falls else "", share)
        )
    return section(
        "Temperatures from source to sink, rated", table(("place", "degC", "K", "drop before", "share"), rows)
    )


def losses(rating: Rating) -> Section:
    """Say what each loss takes, and what the load leaves on the table."""
    rows = [
        (
            item.name,
            percent(item.share_of_internal_resistance),
            percent(item.share_of_heat),
            amount(item.power_without_it_W, "W"),
            amount(_negligible(item.power_gained_without_it_W, rating.rated.power_W), "W"),
        )
        for item in rating.losses
    ]
    heads = ("loss", "of internal resistance", "of heat", "power without it", "gain without it")
    off = rating.design.losses.off
    said = [f"Switched off and so not counted: {', '.join(off)}."] if off else []
    return section(
        "Where heat and power are lost",
        table(heads, rows),
        words("Each line leaves out one loss alone; they do not add up. Bypass includes radiation.", *said),
    )


def optima(rating: Rating) -> Section:
    """Put the state of most power beside that of best efficiency."""
    power, efficient = rating.state("most power"), rating.state("best efficiency")
    shown = (rating.rated, power, efficient)
    columns = [_electrical(rating, s)[:9] + _thermal(s)[1:3] for s in shown]
    rows = [(pairs[0][0], *(value for _, value in pairs)) for pairs in zip(*columns, strict=True)]
    return section(
        "Most power and best efficiency",
        table(("", *(s.name for s in shown)), rows),
        words(
            f"Loaded for best efficiency the generator gives {percent(efficient.power_W / power.power_W)} "
            "of the most power; loaded for most power it has "
            f"{percent(power.efficiency / efficient.efficiency)} of the best efficiency."
        ),
    )


def sanity(rating: Rating) -> Section:
    """Hold the exact answer against closed forms of constant properties."""
    s, exact = rating.sanity, rating.rated
    compared = (
        ("power", amount(s.power_W, "W"), amount(exact.power_W, "W"), f"{100 * s.power_deviation:+.1f} %"),
        (
            "efficiency",
            percent(s.efficiency, 2),
            percent(exact.efficiency, 2),
            f"{100 * s.efficiency_deviation:+.1f} %",
        ),
        (
            "voltage right after opening",
            amount(s.open_circuit_voltage_V, "V"),
            amount(exact.open_circuit_voltage_V, "V"),
            f"{100 * (s.open_circuit_voltage_V / exact.open_circuit_voltage_V - 1):+.1f} %",
        ),
    )
    return section(
        "Closed-form check",
        table(("at the rated junctions", "closed form", "full model", "difference"), compared),
        words(
            "Closed form: constant properties at the mean junction temperature. ZT of the module there, joints and "
            "bypass included, "
            f"{number(s.module_figure_of_merit, 3)}, Carnot efficiency between the junctions "
            f"{percent(s.carnot_efficiency)}."
        ),
    )


def opened(rating: Rating) -> Section:
    """Give the open circuit with both junctions against service limits and data range."""
    s, loaded = rating.state("open circuit"), rating.rated
    rows = []
    for leg, m in zip("np", rating.materials, strict=True):
        first, last = m.range
        service, hot, cold = m.service_limit, s.T_hot_junction_K, s.T_cold_junction_K
        memory = " (memory)" if "memory" in service.basis else ""
        rows += [
            (
                f"hot junction, {leg} leg",
                f"service limit{memory}",
                celsius(service.value),
                kelvin(service.value - hot),
            ),
            (f"hot junction, {leg} leg", "last data point", celsius(last), kelvin(last - hot)),
            (f"cold junction, {leg} leg", "first data point", celsius(first), kelvin(cold - first)),
        ]
    rise = s.T_hot_junction_K - loaded.T_hot_junction_K
    return section(
        "Open circuit",
        facts(
            ("voltage", amount(s.open_circuit_voltage_V, "V")),
            ("heat drawn", amount(s.heat_in_W, "W")),
            (
                "hot junction",
                f"{both(s.T_hot_junction_K)}, {kelvin(rise)} {'above' if rise >= 0 else 'below'} the rated "
                "state",
            ),
            ("cold junction", both(s.T_cold_junction_K)),
        ),
        table(("place", "against", "limit", "room"), rows, (0, 1)),
    )


def shorted(rating: Rating) -> Section:
    """Give the short circuit, or say that it has no steady state in this model."""
    if "short circuit" not in rating:
        return section("Short circuit", words("Not found; see the notes."))
    s = rating.state("short circuit")
    return section(
        "Short circuit",
        facts(
            ("current", amount(s.current_A, "A")),
            ("heat drawn", amount(s.heat_in_W, "W")),
            ("hot junction", both(s.T_hot_junction_K)),
            ("cold junction", both(s.T_cold_junction_K)),
        ),
    )


def data_range(rating: Rating) -> Section:
    """Say whether the states stay inside the measured temperatures."""
    ranges = [
        (f"{leg} leg", f"{m.name}: {known(m)} from {both(m.range[0])} to {both(m.range[1])}")
        for leg, m in zip("np", rating.materials, strict=True)
    ]
    kinds = " and ".join(dict.fromkeys(known(m) for m in rating.materials))
    if not rating.held:
        return section("Data range", facts(*ranges), words(f"All states lie inside the {kinds} range."))
    rows = [(d.leg, d.state, kelvin(d.below_K), kelvin(d.above_K)) for d in rating.held]
    heads = ("leg", "state", "held below", "held above")
    return section("Data range", facts(*ranges), table(heads, rows, (0, 1)))
