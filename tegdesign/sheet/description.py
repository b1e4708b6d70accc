"""Sections on what the generator is: design, materials, assumptions, cautions, how sure it all is."""

from __future__ import annotations

from typing import Any

from tegdesign import __version__
from tegdesign.design.caution.data import SPREAD_EFFICIENCY, SPREAD_HEAT, SPREAD_POWER, SPREAD_SOURCE
from tegdesign.design.rating import Rating
from tegdesign.design.wording import both, millimetres, number, percent
from tegdesign.material.material import Material, Stated
from tegdesign.sheet.legs import known, order
from tegdesign.sheet.section import Entry, Section, facts, section, table, words

NO_CLAIM = "no conformity with any standard is claimed"
SCALES = {"m3": 1e6, "kg": 1e3}


def connection(rating: Rating) -> str:
    """Say how couples and modules are joined."""
    g = rating.design.module
    inside = f"{g.couples} couples in series in each module" if g.couples > 1 else "one couple in each module"
    if g.modules == 1:
        return inside.replace("in each", "in the one")
    if g.modules_in_parallel == 1:
        return f"{inside}; {g.modules} modules in series"
    if g.modules_in_series == 1:
        return f"{inside}; {g.modules} modules in parallel"
    strings = f"{g.modules_in_parallel} strings in parallel"
    return f"{inside}; {strings} of {g.modules_in_series} modules in series each"


def identification(rating: Rating) -> Section:
    """Say what the sheet is about and which program wrote it."""
    g = rating.design.module
    n, p = rating.materials
    return section(
        "Identification",
        facts(
            ("revision", rating.design.revision),
            (
                "what it is",
                f"thermoelectric generator, computed from {_data(rating)}; not a measurement",
            ),
            (
                "module",
                f"{g.modules} x {g.couples} couples, plates {1e3 * g.width:.4g} mm x {1e3 * g.depth:.4g} mm, "
                f"height {millimetres(rating.module_height_m)}",
            ),
            ("legs", f"n {n.name}, p {p.name}"),
            ("aim of the design", rating.design.aim),
            ("program", f"tegdesign {__version__}; {NO_CLAIM}"),
        ),
    )


def _data(rating: Rating) -> str:
    """Say whether the material data are measured."""
    computed = [leg for leg, m in zip("np", rating.materials, strict=True) if known(m) == "computed"]
    if not computed:
        return "measured material data"
    return f"material data that are themselves computed from bands ({' and '.join(computed)} leg)"


def geometry(rating: Rating) -> Section:
    """Give the dimensions that a workshop needs."""
    g, n, p = rating.design.module, *rating.materials
    size = f"{millimetres(g.leg_length)} long"
    return section(
        "Design",
        facts(
            ("couples", f"{g.couples} in a module, {g.couples * g.modules} in all"),
            ("modules", str(g.modules)),
            ("connection", connection(rating)),
            ("grid", f"{g.columns} columns x {g.rows} rows of legs, n and p in turn"),
            (
                "plates",
                f"{1e3 * g.width:.4g} mm x {1e3 * g.depth:.4g} mm, edge of {millimetres(g.edge_margin)} "
                "round the legs",
            ),
            ("module height", f"{millimetres(rating.module_height_m)} without interfaces"),
            ("n leg", f"{n.name}, {millimetres(g.leg_side_n)} square, {size}"),
            ("p leg", f"{p.name}, {millimetres(g.leg_side_p)} square, {size}"),
            ("pitch and gap", f"{millimetres(g.pitch)} and {millimetres(g.gap)}"),
            ("fill factor", percent(g.fill_factor)),
        ),
    )


def masses(rating: Rating) -> Section:
    """Bill the leg material."""
    g = rating.design.module
    rows, basis = [], []
    for mass, side in zip(rating.masses, (g.leg_side_n, g.leg_side_p), strict=True):
        size = f"{1e3 * side:.4g} x {1e3 * side:.4g} x {1e3 * g.leg_length:.4g} mm"
        volume, weight = mass.volume_m3 * SCALES["m3"], mass.mass_kg * SCALES["kg"]
        rows.append(
            (mass.leg, mass.material, str(mass.legs), size, f"{number(volume)} cm3", f"{number(weight)} g")
        )
        basis.append(
            f"Density of {mass.material}: {number(mass.mass_kg / mass.volume_m3)} kg/m3, basis: "
            f"{mass.density_basis or 'not stated'}."
        )
    basis += [f"Order {m.name} with {made}." for m in rating.materials if (made := order(m)) is not None]
    total = number(sum(mass.mass_kg for mass in rating.masses) * SCALES["kg"])
    rows.append(("", "all legs", str(sum(mass.legs for mass in rating.masses)), "", "", f"{total} g"))
    heads = ("leg", "material", "pieces", "size", "volume", "mass")
    return section("Leg material", table(heads, rows, (0, 1)), words(*basis, "Without waste of cutting."))


def _stated(limit: Stated | None) -> str:
    if limit is None:
        return "not stated"
    return both(limit.value) + f"; basis: {limit.basis or 'not stated'}"


def _about(leg: str, m: Material) -> list[tuple[str, str]]:
    s, rho, kappa = (percent(u, 0) for u in m.uncertainty)
    shares = f"S {s}, resistivity {rho}, thermal conductivity {kappa} (1 sigma)"
    tags = f"{', '.join(m.hazard_tags)}; see the cautions"
    return [
        (f"{leg} leg", m.name),
        ("composition", m.composition),
        (known(m), f"{both(m.range[0])} to {both(m.range[1])}"),
        *((("to be made with", made),) if (made := order(m)) is not None else ()),
        ("service limit", _stated(m.service_limit)),
        ("air limit", _stated(m.air_limit)),
        ("source", m.source or "not stated"),
        ("DOI", m.doi or "not stated"),
        ("verification", m.verification or "not stated"),
        ("compilation", m.compilation or "not stated"),
        ("obtained", m.obtained or "not stated"),
        ("uncertainty", f"{shares}; {m.uncertainty_basis or 'basis not stated'}"),
        ("hazards", tags if m.hazard_tags else m.hazards or "not stated"),
    ]


def materials(rating: Rating) -> Section:
    """Say what the legs are made of, and where their data come from."""
    return section(
        "Materials", *(facts(*_about(leg, m)) for leg, m in zip("np", rating.materials, strict=True))
    )


def assumptions(rating: Rating) -> Section:
    """List the keys that nobody wrote, with the values taken."""
    if not rating.assumptions:
        return section("Assumptions", words("None: every value of the design was given."))
    data = rating.design.model_dump()
    return section(
        "Assumptions (values taken from defaults)",
        facts(*((key, _value(data, key)) for key in rating.assumptions)),
    )


def _value(data: Any, key: str) -> str:
    for part in key.split("."):
        if not isinstance(data, dict) or part not in data:
            return "no such key in this design"
        data = data[part]
    return f"{data:g}" if isinstance(data, float) else str(data)


def cautions(rating: Rating) -> Section:
    """List every caution with value, limit, text and source."""
    if not rating.cautions:
        return section(
            "Cautions", words("None was triggered. Local codes and licensed practice decide all the same.")
        )
    blocks = [
        Entry(
            f"{k}. {c.title} [{c.id}]",
            (f"Value: {c.value}. Limit: {c.limit}.", f"{c.text} Source: {c.source}."),
        )
        for k, c in enumerate(rating.cautions, 1)
    ]
    return section(f"Cautions ({len(rating.cautions)})", *blocks)


def uncertainty(rating: Rating) -> Section:
    """Say how far a test may lie from these figures, and what they do not cover."""
    shares = [
        f"{m.name}: S {percent(m.uncertainty[0], 0)}, resistivity {percent(m.uncertainty[1], 0)}, thermal "
        f"conductivity {percent(m.uncertainty[2], 0)}"
        for m in rating.materials
    ]
    return section(
        "How sure this is",
        words(
            f"Relative standard uncertainty taken for the materials: {'; '.join(shares)}. Round robins: "
            "skutterudite, 300 K to 700 K, S 6 %, resistivity 8 %, thermal conductivity 11 %, figure of "
            "merit 19 % (Alleno et al. 2015, Rev. Sci. Instrum. 86, 011301, volume from memory); bismuth "
            "telluride, figure of merit 14 % at room temperature and 21 % at 475 K (Wang et al. 2013, J. "
            "Electron. Mater. 42, 654 and 1073).",
            "Laboratories differ: twelve that measured the same bismuth telluride modules up to 200 degC "
            f"had standard deviations of up to {percent(SPREAD_POWER)} in power, {percent(SPREAD_HEAT)} in "
            f"heat and {percent(SPREAD_EFFICIENCY)} in efficiency ({SPREAD_SOURCE}).",
            "Not covered: ageing, thermal cycling, mechanical stress, insulation voltage, transients.",
        ),
    )


def notes(rating: Rating) -> Section | None:
    """Pass on the notes of the rating, if there are any."""
    return section("Notes", words(*rating.notes)) if rating.notes else None
