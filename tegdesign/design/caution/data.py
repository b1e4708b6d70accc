"""How far the numbers can be believed: data range, losses left out, plausibility, laboratories."""

from __future__ import annotations

from collections.abc import Iterator

from tegdesign.design.caution.common import PRACTICE, caution
from tegdesign.design.condition import RATED
from tegdesign.design.rating import Caution, Rating
from tegdesign.design.wording import amount, kelvin, percent

CEILING_SHARE = 1.05
EFFICIENCY = 0.15
# Largest standard deviations of 12 laboratories with one type of bismuth telluride module.
SPREAD_POWER, SPREAD_HEAT, SPREAD_EFFICIENCY = 0.272, 0.592, 0.259
SPREAD_SOURCE = "Ziolkowski et al. 2022, Materials 15, 1627, doi 10.3390/ma15051627"


def held(rating: Rating) -> Iterator[Caution]:
    """Warn of material data held at their end values, for each leg with its states and kelvins."""
    for leg in "np":
        uses = [use for use in rating.held if use.leg == leg]
        if uses:
            listed = [
                f"{use.state} {kelvin(excess)} {side}"
                for use in uses
                for excess, side in ((use.above_K, "above"), (use.below_K, "below"))
                if excess > 0
            ]
            first = uses[0]
            yield caution(
                f"data-held-{leg}",
                f"Data of the {leg} leg held outside their range",
                "; ".join(listed),
                f"{first.material} is known from {kelvin(first.T_first_K)} to {kelvin(first.T_last_K)}",
                "Outside its data a material was taken to keep its end values; where it really changes, "
                "power and heat are off. Take a material whose data cover the states, or measure it.",
                f"material file of {first.material}",
            )


def losses_off(rating: Rating) -> Iterator[Caution]:
    """Warn of losses that are switched off."""
    off = rating.design.losses.off
    if off:
        yield caution(
            "losses-off",
            "Losses are left out: the result is an idealisation",
            ", ".join(off),
            "all losses on",
            "The figures show what would be had without these losses; do not build or promise by them.",
            "switches [losses] of this design",
        )


def implausible(rating: Rating) -> Iterator[Caution]:
    """Warn of results better than modules have been seen to be, or than the exchangers allow."""
    efficiency = max(s.efficiency for s in rating.states)
    if efficiency > EFFICIENCY:
        yield caution(
            "efficiency-implausible",
            "Efficiency above what modules have reached",
            percent(efficiency),
            percent(EFFICIENCY),
            "Look again at the material data, the joints and the losses before believing it.",
            PRACTICE,
        )
    share = rating.ceiling.share_reached
    if share is not None and share > CEILING_SHARE:
        yield caution(
            "ceiling-passed",
            "Power above the ceiling of exchangers and plates",
            percent(share),
            percent(CEILING_SHARE),
            "The ceiling takes constant properties at the mean junction temperature, which may be a few "
            "percent off. More than that points to material data that change steeply, or to wrong input.",
            f"closed form of constant properties; the {percent(CEILING_SHARE - 1, 0)} of room: {PRACTICE}",
        )


def measured_spread(rating: Rating) -> Iterator[Caution]:
    """Warn when what is asked for leaves less room than laboratories differ in measuring one module."""
    require = rating.design.require
    held = [(c, rating.state(c.name)) for c in rating.loaded]
    powers = [(s.delivered_power_W, s.name) for c, s in held if "power" in c.held]
    efficiencies = [(s.efficiency, s.name) for c, s in held if "efficiency" in c.held]
    asked = (
        ("power", powers, require.power, amount(require.power, "W"), SPREAD_POWER),
        ("efficiency", efficiencies, require.efficiency, percent(require.efficiency), SPREAD_EFFICIENCY),
    )
    rooms = []
    for name, values, needed, shown, spread in asked:
        if needed is None:
            continue
        value, state = min(values)  # the rated state is always held
        room = value / needed - 1
        if room < spread:
            where = "" if state == RATED else f" ({state})"
            side = "above" if room >= 0 else "below"
            rooms.append(f"{name} {percent(abs(room))} {side} the required {shown}{where}")
    if not rooms and (require.power or require.efficiency):
        return
    yield caution(
        "measured-spread",
        "A test of the module may differ much from these figures",
        "; ".join(rooms) or "no required power or efficiency, so no room is set aside",
        f"{percent(SPREAD_POWER)} of power, {percent(SPREAD_EFFICIENCY)} of efficiency",
        "Twelve laboratories that measured the same bismuth telluride modules up to 200 degC differed by "
        f"standard deviations of up to {percent(SPREAD_POWER)} in power, {percent(SPREAD_HEAT)} in heat and "
        f"{percent(SPREAD_EFFICIENCY)} in efficiency. Leave room, and agree on the test before buying or "
        "selling by a figure.",
        SPREAD_SOURCE,
    )
