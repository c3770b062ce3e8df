"""A tuning request from plain data, as it stands in a JSON file."""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Mapping
from typing import Any, TypeVar

import tauwright as tw

__all__ = ["RequestError", "read_request", "request_from"]

_T = TypeVar("_T")

_NUMBER = "a number"
_TEXT = "text"
_YES_NO = "true or false"
_RANGE = "a list of low end, high end and unit"
_LIMITS = "a list of low and high limit, null for none"
_OBJECT = "an object"
_WHOLE = "a whole number"
_NUMBERS = "a list of numbers"

_FORM = {
    **dict.fromkeys(
        ("equation", "gain_as", "gain_unit", "integral_as", "integral_unit", "derivative_unit", "filter_as",
         "proportional_on", "derivative_on", "action_as"), _TEXT),
    **dict.fromkeys(("process_value_range", "output_range"), _RANGE),
    **dict.fromkeys(("gain_limits", "integral_limits", "derivative_limits", "filter_limits"), _LIMITS),
    **dict.fromkeys(
        ("integral_off", "gain_resolution", "integral_resolution", "derivative_resolution", "filter_resolution",
         "fixed_filter"), _NUMBER),
}
_DUTY = {
    **dict.fromkeys(
        ("setpoint_step", "setpoint_ramp_time", "load_step", "load_time", "load_ramp_time", "noise", "scan_time", "output_low",
         "output_high", "output_rate_limit", "rest_output", "rest_process_value"), _NUMBER),
    **dict.fromkeys(("valve", "transmitter"), _OBJECT),
    "disturbance": _NUMBERS,
    "seed": _WHOLE,
}
_VALVE = dict.fromkeys(("dead_band", "stick", "resolution", "travel_rate_per_s"), _NUMBER)
_TRANSMITTER = dict.fromkeys(("lag", "resolution"), _NUMBER)
_ENTERED = {
    **dict.fromkeys(
        ("gain", "proportional_band", "integral_time", "repeats", "integral_gain", "derivative_time",
         "derivative_gain", "filter_time", "filter_ratio", "measurement_filter_time", "setpoint_weight"), _NUMBER),
    "action": _TEXT,
}
_IDENTIFY = {"form": _TEXT, "drift": _YES_NO, "fixed": _OBJECT}
_FIXED = dict.fromkeys(("gain", "slope", "lag_1", "dead_time", "offset"), _NUMBER)
_REQUEST = {
    "time_constant": _NUMBER,
    "form": _OBJECT,
    "duty": _OBJECT,
    "as_found": _OBJECT,
    "safety_function": _YES_NO,
    "accept_weak_margins_by": _TEXT,
    "loop_name": _TEXT,
    "identify": _OBJECT,
}


class RequestError(tw.Error):
    """A request that is not what it should be; the message names the key, the value and the remedy."""

    code = "file_malformed"
    value = 31


def _is_number(value: object) -> bool:
    return isinstance(value, (int, float)) and not isinstance(value, bool)


def _fits(value: object, kind: str) -> bool:
    if kind == _NUMBER:
        return _is_number(value)
    if kind == _WHOLE:
        return isinstance(value, int) and not isinstance(value, bool) and 0 <= value < 2**64
    if kind == _TEXT:
        return isinstance(value, str)
    if kind == _YES_NO:
        return isinstance(value, bool)
    if kind == _OBJECT:
        return isinstance(value, Mapping)
    if not isinstance(value, (list, tuple)):
        return False
    if kind == _NUMBERS:
        return all(map(_is_number, value))
    if kind == _LIMITS:
        return len(value) == 2 and all(x is None or _is_number(x) for x in value)
    return len(value) in (2, 3) and all(map(_is_number, value[:2])) and all(isinstance(x, str) for x in value[2:])


def _checked(data: object, kinds: Mapping[str, str], place: str) -> dict[str, Any]:
    """The entries that are given (not null), each of its kind; anything else is refused by name."""
    if not isinstance(data, Mapping):
        raise RequestError(f"{place} is {data!r}; give an object with the keys {', '.join(kinds)}")
    for key, value in data.items():
        if key not in kinds:
            raise RequestError(f"{place} has the unknown key {key!r}; use {', '.join(kinds)}")
        if value is not None and not _fits(value, kinds[key]):
            raise RequestError(f"{place}.{key} is {value!r}; give {kinds[key]}")
    return {key: value for key, value in data.items() if value is not None}


def _made(make: Callable[..., _T], data: object, kinds: Mapping[str, str], place: str) -> _T:
    return make(**_checked(data, kinds, place))


def _duty_from(data: object) -> tw.Duty:
    entries = _checked(data, _DUTY, "request.duty")
    if "valve" in entries:
        entries["valve"] = _made(tw.ValveSettings, entries["valve"], _VALVE, "request.duty.valve")
    if "transmitter" in entries:
        entries["transmitter"] = _made(tw.TransmitterSettings, entries["transmitter"], _TRANSMITTER, "request.duty.transmitter")
    return tw.Duty(**entries)


def request_from(data: object) -> tw.TuningRequest:
    """A TuningRequest from a mapping whose keys are the keyword arguments of TuningRequest; the values of form,
    duty, as_found and identify are mappings in turn (ControllerForm, Duty, Entered, identify), and so are valve and
    transmitter of duty (ValveSettings, TransmitterSettings). null means not given.

    Raises RequestError for an unknown key or a value of the wrong kind, and tauwright.Error as the classes do.
    """
    entries = _checked(data, _REQUEST, "request")
    if "form" in entries:
        entries["form"] = _made(tw.ControllerForm, entries["form"], _FORM, "request.form")
    if "duty" in entries:
        entries["duty"] = _duty_from(entries["duty"])
    if "as_found" in entries:
        entries["as_found"] = _made(tw.Entered, entries["as_found"], _ENTERED, "request.as_found")
    if "identify" in entries:
        options = _checked(entries["identify"], _IDENTIFY, "request.identify")
        if "fixed" in options:
            options["fixed"] = _checked(options["fixed"], _FIXED, "request.identify.fixed")
        entries["identify"] = options
    return tw.TuningRequest(**entries)


def _once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    entries: dict[str, Any] = {}
    for key, value in pairs:
        if key in entries:
            raise RequestError(f"the key {key!r} stands twice; keep one of them")
        entries[key] = value
    return entries


def _no_constant(word: str) -> Any:
    raise RequestError(f"{word} is not a number of JSON; give a finite number, or null for none")


def read_request(path: str | os.PathLike[str]) -> tw.TuningRequest:
    """A TuningRequest from a JSON file. Raises RequestError naming the file and the place, and tauwright.Error."""
    name = os.fspath(path)
    try:
        with open(name, encoding="utf-8-sig") as file:
            data = json.load(file, object_pairs_hook=_once, parse_constant=_no_constant)
    except OSError as problem:
        raise RequestError(f"request is '{name}', which cannot be read ({problem.strerror}); check the path") from problem
    except (json.JSONDecodeError, UnicodeDecodeError, RecursionError) as problem:
        raise RequestError(f"{name} is not a JSON document ({problem}); correct it") from problem
    except RequestError as problem:
        raise RequestError(f"{name}: {problem}") from problem
    try:
        return request_from(data)
    except RequestError as problem:
        raise RequestError(f"{name}: {problem}") from problem
