"""The materials as they are made for the job: doping, grade, grain size, and what conducts the heat in the legs."""

from __future__ import annotations

from typing import TYPE_CHECKING, cast

from tegdesign.design.rating import Rating
from tegdesign.design.wording import amount, celsius, number, percent
from tegdesign.material.material import Material
from tegdesign.quantity import write
from tegdesign.sheet.section import Section, section, table, words

if TYPE_CHECKING:
    from tegdesign.design.making import Making
    from tegdesign.material.bands.material import BandMaterial


def order(m: Material) -> str | None:
    """Return with what doping and grains a material must be ordered; None for a measured sample, which has its own."""
    if m.kind != "bands":  # asked without loading what tables do not need
        return None
    from tegdesign.sheet.material_text import doping_words

    made = cast("BandMaterial", m)
    carriers = "electrons" if m.polarity == "n" else "holes"
    span = made.doping.span
    grade = f", straight between {celsius(span[0])} and {celsius(span[1])}" if span else ""
    return f"{carriers} {doping_words(made)}{grade}"


def known(m: Material) -> str:
    """Return ``measured`` or ``computed``, as the values of a material are."""
    return "computed" if m.kind == "bands" else "measured"


def conduction(rating: Rating) -> Section:
    """Tell apart what carriers and lattice conduct in each leg."""
    rows = [
        (
            c.leg,
            number(c.thermal_conductivity_W_per_m_K),
            number(c.electronic_thermal_conductivity_W_per_m_K),
            number(c.lattice_thermal_conductivity_W_per_m_K),
            percent(c.lattice_thermal_conductivity_W_per_m_K / c.thermal_conductivity_W_per_m_K, 0),
        )
        for c in rating.conduction
    ]
    first = rating.conduction[0]
    bases = dict.fromkeys(c.basis for c in rating.conduction)
    legs = {basis: " and ".join(c.leg for c in rating.conduction if c.basis == basis) for basis in bases}
    said = "; ".join(f"{leg} leg: {basis}" for basis, leg in legs.items())
    return section(
        "Heat conduction of the legs",
        table(("leg", "kappa [W/m/K]", "by carriers [W/m/K]", "by lattice [W/m/K]", "share of lattice"), rows),
        words(
            f"Means over the rated legs, {celsius(first.T_cold_K)} to {celsius(first.T_hot_K)}. Part of the carriers: "
            f"{said}."
        ),
    )


def making(made: Making) -> Section:
    """Say how the materials were made for the brief, and what that gains."""
    rows = [
        (
            c.leg,
            c.material,
            _doping(c.doping_per_m3),
            "even" if c.doping_hot_per_m3 is None else _doping(c.doping_hot_per_m3),
            "-" if c.doping_for_figure_of_merit_per_m3 is None else _doping(c.doping_for_figure_of_merit_per_m3),
            _grains(c.grain_size_m),
        )
        for c in made.choices
    ]
    asked = any(c.doping_for_figure_of_merit_per_m3 is not None for c in made.choices)
    base = "doped for the best mean zT" if asked else "as in their files"
    plain = amount(made.power_with_best_figure_of_merit_W, "W")
    said = [
        f"Made so, the legs give {amount(made.power_W, 'W')} at the leads, {base} {plain}: this choice gains "
        f"{amount(made.power_gained_W, 'W')} ({percent(made.share_gained, 2)}), before rounding."
    ]
    grade = made.power_gained_by_grade_W
    if grade is not None:
        share = percent(grade / (made.power_W - grade), 2)
        said.append(
            f"The grade along the legs gains {amount(grade, 'W')} ({share}) of it." if grade > 0
            else "A grade along the legs gains nothing (0 W): even legs are as good, so they are even."
        )  # fmt: skip
    for c in made.choices:
        if (g := c.grains) is not None:
            lattice, filed = g.lattice_thermal_conductivity_W_per_m_K, g.lattice_thermal_conductivity_as_filed_W_per_m_K
            said.append(
                f"Grains of the {c.leg} leg at {celsius(g.T_K)}: lattice conductivity {number(lattice)} W/m/K (as "
                f"filed {number(filed)}), mobility {number(1e4 * g.mobility_m2_per_V_s)} cm2/V/s (as filed "
                f"{number(1e4 * g.mobility_as_filed_m2_per_V_s)})."
            )
    heads = ("leg", "material", "doping, cold end", "hot end", "for best mean zT", "grain size")
    return section("Materials made for this brief", table(heads, rows, (0, 1)), words(*said))


def _grains(size: float | None) -> str:
    return "as filed" if size is None else write(size, "m", "nm" if size < 1e-6 else "um")


def _doping(value: float | None) -> str:
    return "as filed" if value is None else f"{value * 1e-6:.3g} 1/cm3"
