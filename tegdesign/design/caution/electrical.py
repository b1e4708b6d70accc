"""Voltage and current: touch voltage, short circuit, current densities."""

from __future__ import annotations

from collections.abc import Iterator

from tegdesign.design.caution.common import PRACTICE, caution
from tegdesign.design.rating import Caution, Rating
from tegdesign.design.wording import amount, number

DIRECT_VOLTAGE = (
    (35.0, "wet places (IEC 61201)"),
    (60.0, "parts that may be touched in dry places (PELV clause of IEC 60204-1)"),
    (120.0, "separated extra-low voltage, SELV (IEC 61558-1:2005, 3.7.16)"),
)
LARGE_CURRENT = 10.0
ELECTRODE_DENSITY = 20e6
LEG_DENSITY = 5e6


def open_circuit_voltage(rating: Rating) -> Iterator[Caution]:
    """Warn of an open-circuit voltage above the d.c. limits of touch voltage."""
    state = max(rating.states, key=lambda s: s.open_circuit_voltage_V)
    voltage = state.open_circuit_voltage_V
    passed = [(limit, words) for limit, words in DIRECT_VOLTAGE if voltage > limit]
    if passed:
        listed = "; ".join(
            f"{limit:g} V for {words} by {number(voltage - limit)} V" for limit, words in passed
        )
        yield caution(
            "open-circuit-voltage",
            "Open-circuit voltage above extra-low voltage limits",
            f"{amount(voltage, 'V')} ({state.name})",
            f"{passed[0][0]:g} V d.c. for {passed[0][1]}",
            f"The voltage without load exceeds {listed}. A generator cannot be switched off while it is "
            "hot: insulate, guard and mark the leads, and rate converter and capacitors for it.",
            "IEC 61201; IEC 60204-1 (PELV); IEC 61558-1:2005, 3.7.16; figures from secondary pages",
        )


def short_circuit(rating: Rating) -> Iterator[Caution]:
    """Warn of a large current at short circuit."""
    state = max(rating.states, key=lambda s: s.current_A)
    if state.current_A > LARGE_CURRENT:
        yield caution(
            "short-circuit-current",
            "Large current when shorted",
            f"{amount(state.current_A, 'A')} ({state.name})",
            f"{LARGE_CURRENT:g} A",
            "The leads must carry this current without end, a switch or a loose plug that opens it draws an "
            "arc, and a fuse sized for more never blows: size wires, terminals and switches for direct "
            "current of this strength.",
            PRACTICE,
        )


def electrode_current(rating: Rating) -> Iterator[Caution]:
    """Warn of a high current density in the electrodes, in the state of the largest current."""
    g, thickness = rating.design.module, rating.design.stack.electrode_thickness
    state = max(rating.states, key=lambda s: s.current_A)
    section = min(g.leg_side_n, g.leg_side_p) * thickness
    if section == 0:
        return
    density = state.current_A / g.modules_in_parallel / section
    if density > ELECTRODE_DENSITY:
        yield caution(
            "electrode-current-density",
            "High current density in the electrodes",
            f"{number(density / 1e6)} A/mm2 ({state.name})",
            f"{ELECTRODE_DENSITY / 1e6:g} A/mm2",
            f"Electrodes of {1e3 * thickness:.4g} mm carry "
            f"{amount(state.current_A / g.modules_in_parallel, 'A')}: take thicker metal or more, thinner "
            "couples.",
            PRACTICE,
        )


def leg_current(rating: Rating) -> Iterator[Caution]:
    """Warn of a high steady current density in the legs in a state that is asked for."""
    densities = [(max(s.current_density_n_A_per_m2, s.current_density_p_A_per_m2), s.name) for s in rating.asked]
    density, state = max(densities, key=lambda pair: pair[0])
    if density > LEG_DENSITY:
        yield caution(
            "leg-current-density",
            "High steady current density in the legs",
            f"{number(density / 1e6)} A/mm2 ({state})",
            f"{LEG_DENSITY / 1e6:g} A/mm2",
            "Joints and metal films drift under such a current, and leads and straps lose much: look again "
            "at the leg length, the joints and the metal.",
            PRACTICE,
        )
