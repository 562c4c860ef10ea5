"""The record for scripts."""

import dataclasses
import json
import math

import jsonschema
import pytest

from edgeplan import reports, schemas


def _read(results):
    """Read strictly: NaN and Infinity are no JSON."""
    return json.loads(reports.render(results, "json"), parse_constant=int)


def test_schema_stands_first(results):
    record = _read(results)
    assert next(iter(record)) == "schema"
    assert record["schema"] == "edgeplan/results/1"


def test_names_are_those_of_the_record_all_the_way_down(results):
    record = _read(results)
    assert set(record) == {field.name for field in dataclasses.fields(results)}
    net = next(entry for entry in record["nets"] if entry["net"] == "EXP_CLK")
    assert net["at"] == {"file": "nets.csv", "row": 8}
    assert net["window_now"]["fastest_acceptable"]["why_none"].startswith("harmonics 1 and 3")
    assert net["checks"][0]["parts"][1]["error_db"] == {"low": -3.4, "high": 3.4}


def test_what_is_no_number_is_null(results):
    net = dataclasses.replace(
        results.nets[0], transition_now_s=math.nan, transition_after_s=math.inf
    )
    record = _read(dataclasses.replace(results, nets=[net]))
    assert record["nets"][0]["transition_now_s"] is None
    assert record["nets"][0]["transition_after_s"] is None


def test_a_number_has_nine_figures(results):
    net = dataclasses.replace(results.nets[0], transition_now_s=1.23456789012345e-9)
    text = reports.render(dataclasses.replace(results, nets=[net]), "json")
    assert '"transition_now_s": 1.23456789e-09' in text


def test_a_name_comes_back_as_it_was(results):
    name = "A\x1b\x7f\u202e数\ud800"
    net = dataclasses.replace(results.nets[0], net=name)
    assert _read(dataclasses.replace(results, nets=[net]))["nets"][0]["net"] == name


@pytest.mark.parametrize("record", ["record", "checked", "one_net"])
def test_a_record_follows_the_schema_that_is_printed(record, sample):
    validator = jsonschema.Draft202012Validator(schemas.results_schema())
    found = [error.message for error in validator.iter_errors(_read(getattr(sample, record)()))]
    assert found == []
