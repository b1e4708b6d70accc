"""How far a design is from failing, as values: break-evens, windows, and what would mend a limit that is missed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    import pandas as pd

NARROW = 1.5  # a window whose ends are less than this factor apart is told


@dataclass(frozen=True)
class BreakEven:
    """The value of a quantity at which limits of a state are just met, all else as it is.

    ``sense`` tells whether it is the least or the most that will do; ``key`` names the quantity with its unit. Where it
    was not ``reached``, ``value`` is as far as was looked, and ``limit`` what ended the search (nothing: its range).
    ``source_temperature_K`` is that of the source there, where a temperature is varied.
    """

    state: str
    quantity: str
    key: str
    unit: str
    sense: str
    now: float
    value: float
    purpose: str
    limit: str
    limit_state: str
    reached: bool
    source_temperature_K: float | None = None

    @property
    def room(self) -> float:
        """What may be lost or added as a share of the value now; negative where the limit is missed now."""
        return (self.now - self.value if self.sense == "least" else self.value - self.now) / abs(self.now)

    def to_dict(self) -> dict[str, Any]:
        """Return plain values; keys end in their unit."""
        return {
            "state": self.state,
            "quantity": self.quantity,
            "purpose": self.purpose,
            "sense": self.sense,
            f"now_{self.key}": self.now,
            f"break_even_{self.key}": self.value,
            "source_temperature_break_even_K": self.source_temperature_K,
            "reached": self.reached,
            "limit": self.limit,
            "limit_state": self.limit_state,
        }


@dataclass(frozen=True)
class End:
    """One end of a window: value, and the limit with its state that is broken beyond; no limit: looked no farther."""

    value: float
    limit: str
    state: str


@dataclass(frozen=True)
class Window:
    """Interval of a dimension in which all limits of all states hold, the rest of the design as it is."""

    variable: str
    key: str
    unit: str
    now: float
    low: End
    high: End

    @property
    def factor(self) -> float:
        """Upper over lower end."""
        return self.high.value / self.low.value

    @property
    def narrow(self) -> bool:
        """Whether it is worth telling: both ends known, and not far apart."""
        return bool(self.low.limit and self.high.limit) and self.factor < NARROW

    def to_dict(self) -> dict[str, Any]:
        """Return plain values; keys end in their unit."""
        return {
            "variable": self.variable,
            f"now_{self.key}": self.now,
            f"from_{self.key}": self.low.value,
            f"to_{self.key}": self.high.value,
            "below": {"limit": self.low.limit, "state": self.low.state},
            "above": {"limit": self.high.limit, "state": self.high.state},
        }


@dataclass(frozen=True)
class Mend:
    """What would mend a limit that is missed: a variable and the value it needs, and what breaks before that, if any.

    ``sense`` tells whether ``value`` is the least or the most that will do; ``still_missed`` names the other limits
    that are missed now and there as well.
    """

    limit: str
    state: str
    variable: str
    key: str
    unit: str
    now: float
    sense: str
    value: float
    against: End | None
    still_missed: tuple[str, ...]

    def to_dict(self) -> dict[str, Any]:
        """Return plain values; keys end in their unit."""
        other = self.against
        against = other and {"limit": other.limit, "state": other.state, f"just_met_at_{self.key}": other.value}
        return {
            "limit": self.limit,
            "state": self.state,
            "variable": self.variable,
            "sense": self.sense,
            f"now_{self.key}": self.now,
            f"just_met_at_{self.key}": self.value,
            "excluded_by": against,
            "still_missed": list(self.still_missed),
        }


@dataclass(frozen=True)
class Margins:
    """How far a design is from failing; ``windows`` where all limits hold, ``mends`` where some are missed."""

    break_even: tuple[BreakEven, ...]
    windows: tuple[Window, ...]
    mends: tuple[Mend, ...]

    def to_frame(self) -> pd.DataFrame:
        """Return the break-evens as a table, column names with units."""
        import pandas as pd

        return pd.DataFrame([b.to_dict() for b in self.break_even])

    def windows_frame(self) -> pd.DataFrame:
        """Return the windows as a table, column names with units."""
        import pandas as pd

        return pd.DataFrame([w.to_dict() for w in self.windows])

    def to_dict(self) -> dict[str, Any]:
        """Return plain values for JSON; keys end in their unit."""
        return {name: [one.to_dict() for one in getattr(self, name)] for name in ("break_even", "windows", "mends")}
