import numpy as np
import pytest

import tauwright as tw
from conftest import refusal

S = 1j * np.geomspace(1e-4, 3, 200)
FIRST = tw.first_order_plus_dead_time(2, 30, 6)


def test_first_order():
    # published: direct synthesis, Kc = lag / (gain (tc + dead time)), Ti = lag (Seborg et al., Process Dynamics and Control)
    answer = tw.synthesize(FIRST, tw.DesiredResponse(time_constant=9))
    assert answer.buildable and answer.settings.gain == pytest.approx(30 / (2 * 15), rel=1e-13)
    assert answer.settings.integral_time == pytest.approx(30, rel=1e-13) and answer.settings.derivative_time == 0
    assert answer.attained == tw.TransferFunction.from_factors(1, lags=[9], dead_time=6)
    assert answer.process == FIRST and "buildable=True" in repr(answer)


def test_second_order():
    # published: Kc = (lag_1 + lag_2) / (gain (tc + dead time)), Ti = lag_1 + lag_2, Td = lag_1 lag_2 / (lag_1 + lag_2)
    s = tw.synthesize(tw.second_order_plus_dead_time(2, 30, 10, 6), tw.DesiredResponse(9)).settings
    assert (s.gain, s.integral_time, s.derivative_time) == pytest.approx((40 / (2 * 15), 40, 7.5), rel=1e-12)


def test_integrating():
    # published: Kc = (2 tc + dead time) / (slope (tc + dead time)^2), Ti = 2 tc + dead time (the table of internal model control)
    s = tw.synthesize(tw.integrating_plus_dead_time(0.02, 6), tw.DesiredResponse(9)).settings
    assert (s.gain, s.integral_time) == pytest.approx((24 / (0.02 * 15**2), 24), rel=1e-12)


@pytest.mark.parametrize("G, desired", [
    (FIRST, tw.DesiredResponse(9)), (tw.second_order_plus_dead_time(2, 30, 10, 6), tw.DesiredResponse(9, order=2)),
    (tw.integrating_plus_dead_time(0.02, 6), tw.DesiredResponse(9)),
    (FIRST, tw.DesiredResponse(transfer_function=tw.TransferFunction.from_factors(1, lags=[5, 5], dead_time=6)))], ids=repr)
def test_the_controller_solves_the_loop(G, desired):
    # closed form: C = T / (G (1 - T)), in NumPy's complex arithmetic
    answer = tw.synthesize(G, desired)
    T = answer.attained(S)
    np.testing.assert_allclose(answer.controller(S), T / (G(S) * (1 - T)), rtol=1e-9)
    np.testing.assert_allclose(answer.controller(S.reshape(4, 50)).ravel(), answer.controller(S), rtol=0)
    assert type(answer.controller(0.1j)) is complex and answer.controller.integrators >= 1
    loop = G(S) * answer.settings(S)
    np.testing.assert_allclose(answer.attained_with_settings(S), loop / (1 + loop), rtol=1e-12)
    assert type(answer.attained_with_settings(0.1j)) is complex
    assert answer.controller.response == answer.attained and "Q / (1 - T)" in repr(answer.controller)


@pytest.mark.parametrize("G, T, code, severity", [
    (FIRST, tw.TransferFunction.from_factors(1), "infinite_controller", "impossible"),
    (FIRST, tw.TransferFunction.from_factors(1, lags=[9]), "prediction_needed", "impossible"),
    (FIRST, tw.TransferFunction.from_factors(1, dead_time=6), "improper", "needs_filter"),
    (FIRST, tw.TransferFunction.from_factors(0.9, lags=[9], dead_time=6), "no_integral_action", "caution"),
    (tw.TransferFunction.from_factors(2, leads=[-4], lags=[30, 10]), tw.TransferFunction.from_factors(1, lags=[9]),
     "right_half_plane_zero_cancelled", "impossible"),
    (FIRST, 4.0, "faster_than_dead_time", "caution"),
    (tw.first_order_plus_dead_time(2, 300, 6), 9.0, "slow_pole_cancelled", "caution")])
def test_obstacles(G, T, code, severity):
    # definitions of the plan: what each means, and that only the impossible keeps a controller from being built
    desired = tw.DesiredResponse(T) if isinstance(T, float) else tw.DesiredResponse(transfer_function=T)
    answer = tw.synthesize(G, desired)
    found = {o.code: o for o in answer.obstacles}
    assert code in found, found
    obstacle = found[code]
    assert obstacle.severity == severity and obstacle.message and obstacle.repair and np.isscalar(obstacle.value)
    assert answer.buildable == all(o.severity != "impossible" for o in answer.obstacles)
    assert (answer.controller is not None) == answer.buildable
    assert code in repr(obstacle) and code in repr(answer)


def test_without_settings_there_is_no_response_of_them():
    answer = tw.synthesize(FIRST, tw.DesiredResponse(transfer_function=tw.TransferFunction.from_factors(1)))
    assert answer.settings is None and answer.controller is None
    for s in (0.1j, S, []):
        with refusal("missing_argument"):
            answer.attained_with_settings(s)


@pytest.mark.parametrize("arguments, code", [
    ({}, "missing_argument"), ({"time_constant": 5, "transfer_function": FIRST}, "conflicting_arguments"),
    ({"order": 2, "transfer_function": FIRST}, "conflicting_arguments"), ({"time_constant": 0}, "out_of_domain"),
    ({"time_constant": -3}, "out_of_domain"), ({"time_constant": float("nan")}, "not_finite"),
    ({"time_constant": 5, "order": 0}, "out_of_domain"), ({"time_constant": 5, "order": 21}, "out_of_domain")])
def test_desired_responses_are_checked_when_made(arguments, code):
    with refusal(code):
        tw.DesiredResponse(**arguments)
    assert repr(tw.DesiredResponse(5, order=2)) == "DesiredResponse(time_constant=5 s, order=2)"
