"""Shared by the tests: invented records, the folders of the checkout, seeds that are printed."""

from pathlib import Path

import numpy as np
import pytest

import tauwright as tw

ROOT = Path(__file__).resolve().parents[3]


@pytest.fixture
def root():
    return ROOT


@pytest.fixture
def washer():
    """The invented record that ships with the C example, and its request."""
    folder = ROOT / "capi/examples"
    return folder / "bottle_washer.csv", folder / "bottle_washer_request.json"


def first_order_step(t, gain, lag, dead_time):
    """Closed form, written here and not taken from the library."""
    return np.where(t >= dead_time, -gain * np.expm1(-np.maximum(t - dead_time, 0.0) / lag), 0.0)


def integrating_step(t, slope, dead_time):
    return slope * np.maximum(t - dead_time, 0.0)


def response(time_s, output, step, offset=0.0):
    """Superposition of closed-form steps: exact for an output that is held between its samples."""
    value = np.full(time_s.size, offset)
    for i in np.flatnonzero(np.diff(output)) + 1:
        value = value + (output[i] - output[i - 1]) * step(time_s - time_s[i])
    return value


def bump_test(seed, step, *, samples=400, period=2.0, rest=40.0, offset=50.0, noise=0.1, sizes=(10, -15, 11, -6),
              jitter=0.2):
    """Time, output and process value of an invented test with irregular stamps."""
    print(f"seed {seed}")
    random = np.random.default_rng(seed)
    time_s = period * (np.arange(samples) + jitter * (random.random(samples) - 0.5))
    output = np.full(samples, rest)
    for k, size in enumerate(sizes):
        output[samples * (k + 1) // (len(sizes) + 1):] += size
    value = response(time_s, output, step, offset) + noise * random.standard_normal(samples)
    return time_s, output, value


@pytest.fixture
def record():
    """A first-order record with both ranges: gain 0.8, lag 30 s, dead time 7.3 s."""
    arrays = bump_test(11, lambda t: first_order_step(t, 0.8, 30.0, 7.3))
    return tw.Record(*arrays, output_range=(0, 100, "%"), process_value_range=(0, 200, "degC"))


def refusal(code):
    """The context in which a call is refused with this code, and says more than the code."""

    class Refusal:
        def __enter__(self):
            self.raises = pytest.raises(tw.Error)
            self.info = self.raises.__enter__()
            return self

        def __exit__(self, kind, error, trace):
            caught = self.raises.__exit__(kind, error, trace)
            assert error.code == code, f"{error.code} instead of {code}: {error}"
            assert error.value == tw.error_codes[code]
            self.message = str(error)
            assert len(self.message) > 20
            return caught

    return Refusal()
