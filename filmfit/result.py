"""What every job says in the end: quantities with intervals, reasons, layers, one result per run.

Knows the shape of an answer (schema filmfit.result/1); computes nothing. Every number is finite or absent.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field, model_validator

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

Answer = Literal["usable", "check", "unusable"]
LimitState = Literal["within", "outside", "undecided"]
Finite = Annotated[float, Field(allow_inf_nan=False)]

COVERAGE_FACTOR = 1.959963984540054  # two-sided 95 % of a normal distribution (JCGM 100:2008, table G.1)
RESULT_SCHEMA: Literal["filmfit.result/1"] = "filmfit.result/1"


class Frozen(BaseModel):
    """Base of all results: immutable, no unknown fields, no NaN."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, ser_json_inf_nan="constants")


class Quantity(Frozen):
    """A measured quantity: best estimate, standard uncertainty, 95 % coverage interval (JCGM 100:2008, 101:2008).

    A lower bound alone has `low` set and all else null, an upper bound `high`.
    """

    value: Finite | None
    sigma: Finite | None
    low: Finite | None
    high: Finite | None

    @model_validator(mode="after")
    def _ordered(self) -> Quantity:
        if self.low is not None and self.high is not None and self.low > self.high:
            raise ValueError(f"low {self.low} above high {self.high}")
        return self

    @classmethod
    def normal(cls, value: float, sigma: float) -> Quantity:
        """Return a quantity with a symmetric 95 % interval from its standard uncertainty."""
        half = COVERAGE_FACTOR * sigma
        return cls(value=value, sigma=sigma, low=value - half, high=value + half)

    @classmethod
    def between(cls, value: float, low: float, high: float) -> Quantity:
        """Return a quantity with a given, possibly asymmetric, 95 % interval; sigma = (high - low)/3.92."""
        return cls(value=value, sigma=(high - low) / (2 * COVERAGE_FACTOR), low=low, high=high)

    @classmethod
    def at_least(cls, low: float) -> Quantity:
        """Return a lower bound: all that the data say is that the quantity is not below `low`."""
        return cls(value=None, sigma=None, low=low, high=None)


class Reason(Frozen):
    """Why an answer is not simply `usable`, or what to know about it: a code, a plain sentence, what to do."""

    code: str
    text: str
    do: str
    quantity: str | None = None


class Layer(Frozen):
    """One layer of the fitted stack, from the substrate up."""

    name: str
    thickness_nm: Quantity | None
    rate_nm_min: Quantity | None
    law: str
    parameters: dict[str, Quantity]


class Nuisance(Frozen):
    """An instrument's own error as the fit found it, beside what was expected."""

    value: Finite
    sigma: Finite
    low: Finite
    high: Finite
    expected: Finite


class Alternative(Frozen):
    """Another thickness that the data may mean, with what speaks against it."""

    thickness_nm: Finite
    delta_bic: Finite


class FitSummary(Frozen):
    """How the fit went."""

    model: str
    reduced_chi2: Finite | None
    rms_R: Finite | None
    rms_T: Finite | None
    points: int
    free: int
    seconds: Finite


class Provenance(Frozen):
    """What the numbers rest on."""

    filmfit: str
    packages: dict[str, str]
    run_file: str
    files: dict[str, str]
    tmm_difference: Finite | None


class Results(Frozen):
    """The quantities of the main layer and of the plate; null where the data do not determine one."""

    thickness_nm: Quantity | None = None
    top_nm: Quantity | None = None
    roughness_nm: Quantity | None = None
    gap_tauc_lorentz_eV: Quantity | None = None
    gap_direct_eV: Quantity | None = None
    energy_at_1e4_eV: Quantity | None = None
    plasma_energy_eV: Quantity | None = None
    carrier_density_cm3: Quantity | None = None
    mobility_cm2_Vs: Quantity | None = None
    resistivity_ohm_cm: Quantity | None = None
    sheet_resistance_ohm: Quantity | None = None
    index_550: Quantity | None = None
    transmittance_luminous: Quantity | None = None
    transmittance_solar: Quantity | None = None
    rate_nm_min: Quantity | None = None


@dataclass(frozen=True)
class Curve:
    """One spectrum as measured and as the fit has it, for pictures and tables; arrays (W,), fractions."""

    quantity: Literal["R", "T"]
    side: Literal["film", "substrate"]
    angle_deg: float
    coated: bool
    wavelength_nm: NDArray[np.float64]
    measured: NDArray[np.float64]
    fitted: NDArray[np.float64]
    sigma: NDArray[np.float64]


class Result(Frozen):
    """All that `filmfit fit` answers for one run file."""

    schema_: Literal["filmfit.result/1"] = Field(default=RESULT_SCHEMA, alias="schema")
    run: str
    film: str
    answer: Answer
    reasons: tuple[Reason, ...]
    results: Results
    layers: tuple[Layer, ...]
    instrument: dict[str, Nuisance]
    alternatives: tuple[Alternative, ...]
    assumptions: tuple[str, ...] = ()
    limits: dict[str, LimitState]
    fit: FitSummary
    provenance: Provenance

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, populate_by_name=True)

    def as_dict(self) -> dict[str, Any]:
        """Return the result as plain JSON types, keys as the schema names them."""
        return self.model_dump(mode="json", by_alias=True)


def json_schema() -> dict[str, Any]:
    """Return the JSON schema of a result, as kept in filmfit/schema/result-1.json."""
    return Result.model_json_schema(by_alias=True, mode="serialization")
