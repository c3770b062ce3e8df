"""What a user with a strict type checker writes; checked by test_stubs.py and run as it stands."""

import numpy as np
import numpy.typing as npt

import tauwright as tw
from tauwright.plot import figure_of, trend_figure
from tauwright.request import request_from


def tuned(time_s: npt.NDArray[np.float64], output: list[float], value: npt.NDArray[np.float32]) -> tw.TuningSheet:
    record = tw.Record(time_s, output, value, np.isfinite(value), output_range=(0, 100, "%"),
                       process_value_range=tw.Range(0, 120, "degC"))
    fit: tw.FittedModel = tw.identify(record, form="first_order_plus_dead_time", fixed={"dead_time": 2.0})
    errors: dict[str, float] = fit.standard_errors
    assert set(errors) <= {"gain", "lag_1", "offset"}
    form = tw.ControllerForm("series", gain_as="proportional_band", integral_as="repeats", integral_unit="minutes")
    request = tw.TuningRequest(form=form, duty=tw.Duty(scan_time=1.0, setpoint_step=2.0), loop_name="TIC-7")
    sheet = tw.tune(record, request)
    assert request_from({"loop_name": "TIC-7"}).loop_name == sheet.loop_name
    figure_of(record, sheet)
    return sheet


def assessed(G: tw.TransferFunction, settings: tw.PidSettings) -> float:
    margins = tw.robustness(G, settings, scan_time=1.0)
    ranges: list[tuple[float, float]] = margins.stable_dead_times
    assert ranges == [] and tw.delay_budget(G, settings, scan_time=1.0).total > 2
    margins.plot()
    worst = tw.worst_case(G, settings, tw.Uncertainty.box(gain=0.1), progress=lambda done: done >= 0)
    share = tw.violating_share(G, settings, tw.Uncertainty.of_models([G]), gain_margin=1.2)
    duty = tw.Duty(2, scan_time=1.0, valve=tw.ValveSettings(stick=0.5), disturbance=[0.1, 0.2])
    trend = tw.simulate(G, settings, duty, horizon=200)
    trend_figure(trend, as_found=trend)
    positions: npt.NDArray[np.float64] = trend.valve_position
    h = tw.held(G, 1.0, between="linear")
    values: npt.NDArray[np.complex128] = h.at_frequency(positions / 100)
    one: complex = h(1.5)
    assert abs(one) > 0 and values.size == len(trend) and share.share <= 1
    period: float | None = tw.valve_cycle(G, settings, duty.valve).period
    return (worst.max_sensitivity or 0.0) + (period or 0.0)


def main() -> None:
    time_s = np.arange(0.0, 400.0, 2.0)
    output = [40.0 if t < 40 else 50.0 for t in time_s]
    G: tw.TransferFunction = tw.first_order_plus_dead_time(0.8, 30, 2)
    rise = np.where(time_s >= 40, tw.step_response(G, np.maximum(time_s - 40, 0)), 0.0)
    value = (50 + 10 * rise + 0.01 * np.sin(17 * time_s)).astype(np.float32)
    sheet = tuned(time_s, output, value)
    if sheet.settings is not None and sheet.margins is not None and sheet.margins.gain_margin is not None:
        headroom: float = sheet.margins.gain_margin - 1.7
        assert headroom > 0 and assessed(G, sheet.settings) > 1
        block = tw.PidBlock(sheet.settings, scan_time=1.0, initial_output=40.0)
        block.mode = "manual"
        block.manual_output = 41.5
        held: float = block.step(50.0, 49.0)
        assert held == 41.5
    one: complex = G(0.1j)
    many: npt.NDArray[np.complex128] = G(1j * time_s)
    assert abs(one) > 0 and many.size == time_s.size
    answer = tw.synthesize(G, tw.DesiredResponse(10.0))
    if answer.controller is not None:
        assert abs(answer.controller(0.1j)) > 0
    codes: list[str] = [obstacle.code for obstacle in answer.obstacles]
    assert codes == []
    try:
        tw.PidSettings(gain=0)
    except tw.Error as error:
        word: str = error.code
        assert word == "out_of_domain"


if __name__ == "__main__":
    main()
