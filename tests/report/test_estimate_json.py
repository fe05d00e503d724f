"""JSON as other programs build on it."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from pathlib import Path

import jsonschema
import pytest

from ridercda.drag.estimate import Estimate
from ridercda.drag.prepare import prepare_day
from ridercda.drag.solve import solve
from ridercda.report.estimate_json import estimate_json
from ridercda.report.schemas import schema
from ridercda.report.sentences import answer, difference_sentence
from ridercda.session.document import Session
from ridercda.synthetic.day import simulate_day
from ridercda.synthetic.spec import REFERENCE_DAY


@pytest.fixture(scope="module")
def solved() -> tuple[Session, Estimate]:
    day = simulate_day(replace(REFERENCE_DAY, order="ABCCBA"), 2)
    return day.session, solve(prepare_day(day.session, day.rides))


@pytest.fixture(scope="module")
def unsolved() -> tuple[Session, Estimate]:
    day = simulate_day(replace(REFERENCE_DAY, order="AB", laps=1), 2)
    return day.session, solve(prepare_day(day.session, {}))


@pytest.mark.parametrize("which", ["solved", "unsolved"])
def test_it_keeps_its_schema_and_holds_no_nan(which: str, request: pytest.FixtureRequest) -> None:
    session, estimate = request.getfixturevalue(which)
    content = json.loads(json.dumps(estimate_json(estimate, session.name), allow_nan=False))
    jsonschema.Draft202012Validator(schema("estimate")).validate(content)


def test_the_schema_can_refuse(solved: tuple[Session, Estimate]) -> None:
    content = estimate_json(solved[1], "x")
    del content["setups"]
    with pytest.raises(jsonschema.ValidationError, match="'setups' is a required property"):
        jsonschema.Draft202012Validator(schema("estimate")).validate(content)


def test_schemas_are_schemas() -> None:
    for kind in ("estimate", "ranking"):
        jsonschema.Draft202012Validator.check_schema(schema(kind))


def test_angles_are_degrees_and_figures_are_those_of_the_estimate(solved: tuple[Session, Estimate]) -> None:
    _, estimate = solved
    content = json.loads(json.dumps(estimate_json(estimate, "x")))
    first = content["runs"][0]
    assert first["wind_from"] == pytest.approx(math.degrees(estimate.runs[0].wind_from or 0.0))
    assert content["setups"][0]["cda"]["value"] == estimate.setups[0].cda.value  # type: ignore[union-attr]
    assert len(content["covariance"]) == len(content["parameters"])


def test_nothing_answered_is_nulls_with_reasons(unsolved: tuple[Session, Estimate]) -> None:
    session, estimate = unsolved
    content = json.loads(json.dumps(estimate_json(estimate, session.name)))
    assert content["setups"][0]["cda"] == {"value": None, "standard_error": None, "interval": [None, None]}
    assert content["setups"][0]["reason"]
    assert content["gust"] == {"sd": None, "time": None}
    assert answer(estimate, session).startswith("This day cannot answer")


def test_a_sentence_carries_the_digits_its_interval_allows(solved: tuple[Session, Estimate]) -> None:
    session, estimate = solved
    for difference in estimate.differences:
        sentence = difference_sentence(difference, session)
        assert sentence.endswith(".")
        assert "0.00000" not in sentence
        decimals = [
            len(word.split(".")[1]) for word in sentence.replace(",", "").split() if word.startswith("0.")
        ]
        assert decimals
        assert max(decimals) <= 4


def test_schema_files_ship_with_the_package() -> None:
    folder = Path(__import__("ridercda.report", fromlist=["x"]).__file__).parent / "schema"
    assert {path.name for path in folder.iterdir()} == {"estimate.json", "ranking.json"}
