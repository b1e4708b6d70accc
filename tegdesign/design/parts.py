"""Typed tables shared by a brief and a design: each key, its unit, its limits and its default stand here once."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, model_validator

from tegdesign.module.electrode import COPPER_COEFFICIENT, COPPER_RESISTIVITY
from tegdesign.module.gap import FILLERS
from tegdesign.quantity import Measure
from tegdesign.system.model import Part

Length = Annotated[float, Measure("m", "mm"), Field(gt=0, lt=10)]
Thickness = Annotated[float, Measure("m", "mm"), Field(ge=0, lt=1)]
Fraction = Annotated[float, Measure(""), Field(gt=0, le=1)]
Kelvin = Annotated[float, Measure("K", "degC"), Field(gt=0, lt=4000)]
Difference = Annotated[float, Measure("K", "K", True), Field(ge=0, lt=2000)]
Conductivity = Annotated[float, Measure("W/m/K"), Field(gt=0, lt=5000)]
AreaResistance = Annotated[float, Measure("m^2*K/W"), Field(ge=0, lt=1)]
ContactResistivity = Annotated[float, Measure("ohm*m^2"), Field(ge=0, lt=1e-4)]
Ohm = Annotated[float, Measure("ohm"), Field(ge=0)]
Volt = Annotated[float, Measure("V"), Field(gt=0)]
Watt = Annotated[float, Measure("W"), Field(gt=0)]
Count = Annotated[int, Field(strict=True, ge=1, le=10000)]
Gap = Annotated[float, Measure("m", "mm"), Field(ge=1e-5, lt=10)]


class Plate(Part):
    """Substrate and interface of one side, from the outer face inward."""

    interface: AreaResistance = 3e-5
    substrate_thickness: Thickness = 0.8e-3
    substrate_conductivity: Conductivity = 24.0


class Stack(Part):
    """Parts of the module beside the legs. Defaults are typical figures of trade tables, none of any one maker.

    Interface 3e-5 m2 K/W (thin graphite foil or a thick grease line), alumina 24 W/m/K, copper 0.3 mm with the
    resistivity of IEC 60028, joints 2e-9 ohm m2 (laboratory value; bought modules about 3e-9).
    """

    hot: Plate = Plate()
    cold: Plate = Plate()
    contact_resistivity_n: ContactResistivity = 2e-9
    contact_resistivity_p: ContactResistivity = 2e-9
    contact_thermal_resistance: AreaResistance = 0.0
    electrode_thickness: Thickness = 0.3e-3
    electrode_resistivity: Annotated[float, Measure("ohm*m"), Field(ge=0, lt=1e-5)] = COPPER_RESISTIVITY
    electrode_temperature_coefficient: Annotated[float, Measure("1/K"), Field(ge=0, lt=0.02)] = (
        COPPER_COEFFICIENT
    )
    electrode_conductivity: Conductivity = 390.0
    filler: str = "air"
    filler_conductivity: Annotated[float, Measure("W/m/K"), Field(ge=0, lt=100)] | None = None
    emittance_hot: Fraction = 0.8
    emittance_cold: Fraction = 0.8
    edge_conductance: Annotated[float, Measure("W/K"), Field(ge=0)] = 0.0
    lead_resistance: Ohm = 0.0

    @model_validator(mode="after")
    def _known_filler(self) -> Stack:
        if self.filler_conductivity is None and self.filler not in FILLERS:
            raise ValueError(
                f"filler '{self.filler}' is not one of {', '.join(FILLERS)}; give filler_conductivity for another one"
            )
        return self

    @property
    def filler_law(self) -> tuple[float, float, bool]:
        """Conductivity at 300 K [W/m/K], its power of temperature, and whether thermal radiation passes."""
        if self.filler_conductivity is not None:
            return self.filler_conductivity, 0.0, False
        return FILLERS[self.filler]


class Losses(Part):
    """Switches that leave a loss out, to hold a result against a simpler model; all are on unless switched off."""

    spreading: bool = True
    radiation: bool = True
    bypass: bool = True
    contacts: bool = True
    electrodes: bool = True
    leads: bool = True
    substrates: bool = True
    interfaces: bool = True

    @property
    def off(self) -> list[str]:
        """Names of the losses that are left out."""
        return [name for name, on in self.model_dump().items() if not on]


class Require(Part):
    """What the answer must reach; a requirement that is missed makes the verdict."""

    power: Watt | None = None
    voltage: tuple[Volt, Volt] | None = None
    open_circuit_voltage: Volt | None = None
    efficiency: Fraction | None = None
    hot_junction: Kelvin | None = None
    cold_junction: Kelvin | None = None

    @model_validator(mode="after")
    def _window(self) -> Require:
        if self.voltage and self.voltage[0] > self.voltage[1]:
            raise ValueError(
                f"voltage window is upside down: {self.voltage[0]:g} V is above {self.voltage[1]:g} V"
            )
        return self


class MaterialUse(Part):
    """How far outside their data the materials may be used, and where else to look for them."""

    hold_outside_data: Difference = 0.0
    folder: str | None = None


Aim = Literal["power", "efficiency", "power per footprint", "power per material mass"]
