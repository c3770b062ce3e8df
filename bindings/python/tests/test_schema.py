import json
from pathlib import Path

import jsonschema
import pytest

import tauwright as tw
from conftest import bump_test, first_order_step, integrating_step

SCHEMA = json.loads((Path(__file__).parents[3] / "src/tune/tuning_sheet.schema.json").read_text())
RANGES = {"output_range": (0, 100, "%"), "process_value_range": (0, 200, "degC")}
FORM = tw.ControllerForm(equation="parallel", integral_as="gain", filter_as="ratio", gain_limits=(0.01, 50))


def sheets():
    first = tw.Record(*bump_test(3, lambda t: first_order_step(t, 0.8, 30.0, 7.3)), **RANGES)
    level = tw.Record(*bump_test(4, lambda t: integrating_step(t, 0.01, 9.4), sizes=(10, -20, 10)), **RANGES)
    duty = tw.Duty(setpoint_step=4, load_step=2, load_time=100, scan_time=1)
    still = tw.Record([0, 1, 2], [5, 5, 5], [1, 1, 1])
    return {
        "full": tw.tune(first, tw.TuningRequest(form=FORM, duty=duty, as_found=tw.Entered(gain=1, integral_gain=0.02))),
        "plain": tw.tune(first),
        "integrating": tw.tune(level, tw.TuningRequest(duty=duty)),
        "withheld": tw.tune(still),
        "weak": tw.tune(first, tw.TuningRequest(time_constant=0.5)),
    }


# published: JSON Schema draft 2020-12, as the jsonschema library checks it
@pytest.mark.parametrize("name, sheet", sheets().items())
def test_every_sheet_keeps_the_schema(name, sheet):
    jsonschema.Draft202012Validator.check_schema(SCHEMA)
    jsonschema.Draft202012Validator(SCHEMA).validate(json.loads(sheet.json()))


def test_the_schema_notices_what_does_not_belong():
    document = json.loads(tw.tune(tw.Record([0, 1, 2], [5, 5, 5], [1, 1, 1])).json())
    for change in ({"advice": "tune"}, {"schema_version": 3}, {"input_sha256": "0"}, {"gain_unit": 1}):
        with pytest.raises(jsonschema.ValidationError):
            jsonschema.Draft202012Validator(SCHEMA).validate(document | change)
