"""The shape of an answer: finite, ordered, immutable, and as the kept schema says."""

import json
import math

import jsonschema
import pytest
from pydantic import ValidationError

from filmfit.result import (
    Alternative,
    FitSummary,
    Layer,
    Nuisance,
    Provenance,
    Quantity,
    Reason,
    Result,
    Results,
    json_schema,
)


@pytest.fixture
def made_up():
    """A result in which every kind of field is filled once."""
    depth = Quantity.between(251.3, 250.1, 252.6)
    return Result(
        run="K2-0417", film="ITO", answer="check",
        reasons=(Reason(code="no-linear-part", text="a sentence", do="a step", quantity="gap_direct_eV"),),
        results=Results(thickness_nm=depth, gap_direct_eV=Quantity.at_least(3.66)),
        layers=(Layer(name="ITO", thickness_nm=depth, rate_nm_min=None, law="constant",
                      parameters={"constant.epsilon": Quantity.normal(2.1, 0.1)}),),
        instrument={"scale_R": Nuisance(value=1.002, sigma=0.001, low=1.0, high=1.004, expected=1.0)},
        alternatives=(Alternative(thickness_nm=398.0, delta_bic=54.2),),
        assumptions=("a smooth film",), limits={"thickness_nm": "within"},
        fit=FitSummary(model="constant", reduced_chi2=1.1, rms_R=None, rms_T=0.001, points=882, free=9, seconds=0.4),
        provenance=Provenance(filmfit="0", packages={"numpy": "2"}, run_file="sha256:0", files={"a.csv": "sha256:1"},
                              tmm_difference=None),
    )  # fmt: skip


@pytest.fixture(scope="module")
def kept(checkout):
    """The schema as the package ships it."""
    return json.loads((checkout / "filmfit" / "schema" / "result-1.json").read_text(encoding="utf-8"))


def test_the_kept_schema_is_the_one_of_the_models(kept):
    assert kept == json_schema()
    jsonschema.Draft202012Validator.check_schema(kept)


def test_a_dumped_result_fits_the_kept_schema_and_comes_back(kept, made_up):
    dumped = json.loads(json.dumps(made_up.as_dict(), allow_nan=False))
    jsonschema.validate(dumped, kept)
    assert dumped["schema"] == "filmfit.result/1"
    assert dumped["results"]["gap_direct_eV"] == {"value": None, "sigma": None, "low": 3.66, "high": None}
    assert Result.model_validate_json(json.dumps(dumped)) == made_up


@pytest.mark.parametrize(
    "spoil",
    [
        lambda it: it.pop("answer"),
        lambda it: it.update(answer="good"),
        lambda it: it.update(surprise=1),
        lambda it: it["results"].update(thickness_nm=251.3),
        lambda it: it["results"]["thickness_nm"].pop("low"),
        lambda it: it["fit"].update(points="many"),
    ],
)
def test_the_schema_refuses_what_is_no_result(kept, made_up, spoil):
    dumped = made_up.as_dict()
    spoil(dumped)
    with pytest.raises(jsonschema.ValidationError):
        jsonschema.validate(dumped, kept)


def test_a_normal_interval_is_1_960_sigma_wide_on_each_side():
    # coverage factor 1.960 of a normal distribution at 95 %: JCGM 100:2008, table G.1
    got = Quantity.normal(100.0, 2.0)
    assert got.high - got.value == pytest.approx(1.960 * 2.0, abs=2e-3)
    assert got.value - got.low == pytest.approx(got.high - got.value)


def test_an_asymmetric_interval_is_kept_with_the_sigma_of_its_width():
    got = Quantity.between(10.0, 9.0, 12.92)
    assert (got.low, got.value, got.high) == (9.0, 10.0, 12.92)
    assert got.sigma == pytest.approx(1.0, rel=1e-4)  # (high - low) / 3.92


@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf])
@pytest.mark.parametrize("field", ["value", "sigma", "low", "high"])
def test_no_number_of_a_quantity_may_be_infinite_or_nan(field, bad):
    numbers = {"value": 1.0, "sigma": 0.1, "low": 0.8, "high": 1.2, field: bad}
    with pytest.raises(ValidationError):
        Quantity(**numbers)


def test_an_interval_may_not_stand_on_its_head():
    with pytest.raises(ValidationError, match=r"low 2\.0 above high 1\.0"):
        Quantity(value=1.5, sigma=0.1, low=2.0, high=1.0)


def test_results_are_immutable_and_know_their_fields(made_up):
    with pytest.raises(ValidationError):
        made_up.answer = "usable"
    with pytest.raises(ValidationError):
        Results(thickness=Quantity.at_least(1.0))
