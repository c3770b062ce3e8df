import pickle
import re

import pytest

import tauwright as tw
from conftest import refusal


def test_version_is_the_headers(root):
    # independent computation: the header's text
    text = (root / "include/tauwright/core/version.hpp").read_text()
    parts = [re.search(rf"VERSION_{part} (\d+)", text)[1] for part in ("MAJOR", "MINOR", "PATCH")]
    assert tw.__version__ == ".".join(parts)


def test_error_codes_are_the_one_list(root):
    # independent computation: the list read as text
    text = (root / "include/tauwright/core/errors.def").read_text()
    assert tw.error_codes == {word: int(value) for word, value in re.findall(r"^TAUWRIGHT_ERROR\((\w+), (\d+),", text, re.M)}


def test_error_carries_code_and_number():
    with pytest.raises(tw.Error) as caught:
        tw.first_order_plus_dead_time(2, -10, 3)
    error = caught.value
    assert isinstance(error, Exception) and type(error).__mro__[1] is Exception
    assert (error.code, error.value) == ("out_of_domain", 11)
    assert "lag" in str(error) and "-10" in str(error)
    again = pickle.loads(pickle.dumps(error))
    assert (again.code, again.value, str(again)) == (error.code, error.value, str(error))


def test_range():
    span = tw.Range(-20, 180, "degC")
    assert (span.low, span.high, span.unit, span.span) == (-20, 180, "degC", 200)
    assert span.to_percent(30) == 25 and span.from_percent(25) == 30  # closed form
    assert span == tw.Range(-20, 180, "degC") != tw.Range(-20, 180, "K")
    assert repr(span) == "Range(-20 to 180 degC)"
    for low, high in ((0, 0), (10, 0)):
        with refusal("out_of_domain"):
            tw.Range(low, high)
    with refusal("not_finite"):
        tw.Range(0, float("inf"))


def test_every_name_is_there_and_documented():
    for name in tw.__all__:
        item = getattr(tw, name)
        if callable(item):
            assert item.__doc__ and "\n" not in repr(item), name
            assert item.__module__ in ("tauwright", "tauwright._tauwright"), name
