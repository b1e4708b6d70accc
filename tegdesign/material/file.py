"""Material files: what every kind of them says about a material, and the register of kinds."""

from __future__ import annotations

import os
from abc import abstractmethod
from collections.abc import Mapping
from importlib import import_module
from pathlib import Path
from typing import Annotated, Any, Union

from pydantic import BaseModel, ConfigDict, Field, TypeAdapter

from tegdesign import document
from tegdesign.document import Finding
from tegdesign.errors import InputError
from tegdesign.material.curve import Curve
from tegdesign.material.material import Material, Polarity, Stated
from tegdesign.quantity import Measure

# One line a kind: word in the file -> where its model is. A new kind is a new file and a line here.
KINDS = {"table": "tegdesign.material.table:TableFile", "bands": "tegdesign.material.bands.file:BandsFile"}

Temperature = Annotated[float, Measure("K"), Field(gt=0, le=3500)]
Share = Annotated[float, Field(gt=0, lt=1)]
Word = Annotated[str, Field(min_length=1)]


class Strict(BaseModel):
    """Base of the typed models: unknown keys are refused, nothing changes after reading."""

    model_config = ConfigDict(extra="forbid", frozen=True)


class Source(Strict):
    """Where the values come from."""

    citation: str = Field("", description="authors, year, title, journal, volume, pages")
    doi: str = Field(
        "", pattern=r"^(10\.\d{4,9}/\S+)?$", description="digital object identifier, 10.xxxx/..."
    )
    verification: str = Field("", description="what of the paper was seen, for example 'DOI only'")
    compilation: str = Field("", description="data set through which the values came, with its licence")
    obtained: str = Field(
        "", description="tabulated, digitised, smoothed, rounded: what was done to the values"
    )


class Uncertainty(Strict):
    """Relative standard uncertainty (1 sigma) of the three properties."""

    seebeck_coefficient: Share = 0.06
    resistivity: Share = 0.08
    thermal_conductivity: Share = 0.11
    basis: str = (
        "default: skutterudite round robin, 300 K to 700 K, Alleno et al. 2015, Rev. Sci. Instrum. 86, "
        "011301 (volume from memory)"
    )


class MaterialFile(Strict):
    """What every kind of material file holds; a kind adds the properties and how to get curves from them."""

    kind: str
    name: Word = Field(
        pattern=r"^[a-z0-9][a-z0-9.+-]*$", description="name in the library, as in the file name"
    )
    composition: Word
    polarity: Polarity
    caution: str = Field("", description="what to mind before use; printed wherever the material is used")
    service_limit: Temperature = Field(description="highest temperature of continuous use")
    service_limit_basis: str = ""
    air_limit: Temperature | None = Field(
        None, description="above it air or vacuum attacks the bare material"
    )
    air_limit_basis: str = ""
    density: Annotated[float, Measure("kg/m^3"), Field(ge=100, le=25000)]
    density_basis: str = ""
    hazards: str = ""
    hazard_tags: tuple[Word, ...] = ()
    notes: tuple[Word, ...] = ()
    source: Source = Source()
    uncertainty: Uncertainty = Uncertainty()

    @abstractmethod
    def curves(self) -> tuple[Curve, Curve, Curve]:
        """Return Seebeck coefficient [V/K], resistivity [ohm m] and thermal conductivity [W/m/K]."""

    def point_lines(self) -> Mapping[str, list[int]]:
        """Return the lines of each property's points, from the first line of ``points``; {} when computed."""
        return {}

    def to_material(self, path: str = "") -> Material:
        """Return what the rest of the program knows of the material; ``path`` is the file it came from."""
        seebeck_coefficient, resistivity, thermal_conductivity = self.curves()
        share = self.uncertainty
        return Material(
            name=self.name,
            composition=self.composition,
            polarity=self.polarity,
            seebeck_coefficient=seebeck_coefficient,
            resistivity=resistivity,
            thermal_conductivity=thermal_conductivity,
            service_limit=Stated(self.service_limit, self.service_limit_basis),
            density=Stated(self.density, self.density_basis),
            source=self.source.citation,
            doi=self.source.doi,
            verification=self.source.verification,
            compilation=self.source.compilation,
            obtained=self.source.obtained,
            air_limit=None if self.air_limit is None else Stated(self.air_limit, self.air_limit_basis),
            hazards=self.hazards,
            hazard_tags=self.hazard_tags,
            notes=self.notes,
            uncertainty=(share.seebeck_coefficient, share.resistivity, share.thermal_conductivity),
            uncertainty_basis=share.basis,
            warnings=(f"{self.name}: {self.caution}",) if self.caution else (),
            path=path,
        )

    def write(self, path: str | os.PathLike[str]) -> None:
        """Write a file that reads back equal; keys left at their default are left out."""
        document.write_whole(path, document.to_toml(self.model_dump(exclude_defaults=True)))


def model_of(data: Mapping[str, Any]) -> type[MaterialFile]:
    """Return the model of the kind of file the data says it is.

    Raises
    ------
    InputError
        The key ``kind`` is missing or names no known kind.
    """
    kind = data.get("kind")
    if not isinstance(kind, str) or kind not in KINDS:
        said = (
            f"kind = {kind!r} is not a known kind of material file" if "kind" in data else "missing key kind"
        )
        raise InputError(f"{said}; write kind = {' or '.join(repr(known) for known in KINDS)}")
    module, name = KINDS[kind].split(":")
    model: type[MaterialFile] = getattr(import_module(module), name)
    return model


def validate(path: str | os.PathLike[str]) -> tuple[MaterialFile | None, list[Finding], str]:
    """Return the typed file (None when it has errors), its errors and its text.

    Raises
    ------
    InputError
        The file cannot be read or is not TOML.
    """
    text = document.read_text(path)
    data = document.parse_toml(text, str(path))
    try:
        model = model_of(data)
    except InputError as error:
        return None, [Finding(document.line_numbers(text).get(("kind",), 1), "error", str(error))], text
    read, findings = document.validate(data, text, model)
    return read, findings, text


def read(path: str | os.PathLike[str]) -> MaterialFile:
    """Return the typed content of a material file.

    Raises
    ------
    InputError
        The file cannot be used; the message gives file, line and the first thing wrong.
    """
    content, findings, _ = validate(Path(path))
    if content is None:
        raise InputError(document.message(path, findings))
    return content


def schema() -> dict[str, Any]:
    """Return the JSON Schema of material files, for editors."""
    models = tuple(model_of({"kind": kind}) for kind in KINDS)
    every: Any = Annotated[Union[models], Field(discriminator="kind")]  # noqa: UP007
    return TypeAdapter(every).json_schema()
