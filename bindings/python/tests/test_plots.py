"""The pictures of results: what is drawn is what was computed, and labels keep out of each other's way."""

import warnings

import numpy as np
import pytest

import tauwright as tw
from conftest import bump_test, first_order_step
from tauwright.plot import figure_of, open_loop_figure, sensitivity_figure, trend_figure, worst_case_figure

G, SETTINGS = tw.first_order_plus_dead_time(2, 10, 3), tw.PidSettings(10 / 12, integral_time=10)
RINGING = tw.TransferFunction.from_factors(1, lags=[20], lag_pairs=[(2, 0.15)], dead_time=2)


def words_of(figure):
    return [t.get_text() for axes in figure.axes for t in axes.texts] + [t.get_text() for t in figure.texts]


def overlaps(figure):
    """Pairs of texts whose boxes, as drawn, cover each other."""
    renderer = figure.canvas.get_renderer()
    figure.canvas.draw()
    texts = [t for t in (*figure.texts, *(t for axes in figure.axes for t in axes.texts)) if t.get_text()]
    # The text alone: an annotation's extent would hold its arrow too.
    boxes = [(t.get_text(), super(type(t), t).get_window_extent(renderer) if hasattr(t, "arrow_patch") else
              t.get_window_extent(renderer)) for t in texts]
    return [(a, b) for i, (a, x) in enumerate(boxes) for b, y in boxes[:i] if x.shrunk(0.9, 0.8).overlaps(y.shrunk(0.9, 0.8))]


def curves(axes):
    return [np.column_stack(line.get_data()) for line in axes.lines]


def through(axes, point, tolerance):
    return any(np.hypot(*(c - point).T).min() < tolerance for c in curves(axes) if len(c) > 500)


LOOPS = [
    (G, SETTINGS, {}), (G, SETTINGS, {"scan_time": 1, "extra_delay": 1}), (RINGING, tw.PidSettings(2, integral_time=20), {}),
    (tw.integrating_plus_dead_time(0.02, 3), tw.PidSettings(6, integral_time=30, derivative_time=2, filter_time=0.3), {"scan_time": 1}),
    (G, tw.PidSettings(9, integral_time=10), {}), (G, tw.synthesize(G, tw.DesiredResponse(3.0)).controller, {}),
    (tw.first_order_plus_dead_time(0.2, 10, 0), None, {}), (G, tw.PidSettings(0.1), {}),
    (tw.TransferFunction.from_factors(1, leads=[1], lags=[0.5]), None, {})]


@pytest.mark.parametrize("process, settings, options", LOOPS, ids=str)
def test_loops(tmp_path, process, settings, options):
    margins = tw.robustness(process, settings, **options)
    for figure in (margins.plot(), margins.plot_sensitivity()):
        assert overlaps(figure) == []
        assert (margins.verdict in " ".join(words_of(figure)))
        for suffix in ("png", "pdf"):
            with warnings.catch_warnings():
                warnings.filterwarnings("ignore", category=DeprecationWarning)
                figure.savefig(tmp_path / f"loop.{suffix}")
            assert (tmp_path / f"loop.{suffix}").stat().st_size > 3000


@pytest.mark.parametrize("scan_time", [None, 1.0])
def test_the_curves_are_the_loop(scan_time):
    # independent computation: L of held process and backward PI, or of process and settings, in NumPy
    margins = tw.robustness(G, SETTINGS, scan_time=scan_time)

    def L(w):
        if scan_time is None:
            return 2 * np.exp(-3j * w) / (10j * w + 1) * 10 / 12 * (1 + 1 / (10j * w))
        z = np.exp(1j * w)
        return 2 * (1 - np.exp(-0.1)) / (z - np.exp(-0.1)) * z**-3.0 * 10 / 12 * (1 + 0.1 / (1 - 1 / z))

    plane = open_loop_figure(margins).axes[0]
    at = margins.max_sensitivity_frequency
    closest = L(at)
    assert abs(1 + closest) == pytest.approx(1 / margins.max_sensitivity, rel=1e-9)
    for w in (0.1, 0.2, at, 0.6, 1.0):
        assert through(plane, (L(w).real, L(w).imag), 5e-3)
    circle = min(curves(plane), key=lambda c: np.ptp(np.hypot(c[:, 0] + 1, c[:, 1])) if len(c) > 100 else 9)
    np.testing.assert_allclose(np.hypot(circle[:, 0] + 1, circle[:, 1]), 1 / margins.max_sensitivity, rtol=1e-9)
    lines = {len(c) and line.get_linestyle() for line, c in zip(plane.lines, curves(plane)) if len(c) > 500}
    assert lines == {"-"}
    text = " ".join(words_of(plane.figure))
    assert f"1/Ms = {1 / margins.max_sensitivity:.3g}" in text and f"gain 1 at {margins.gain_crossovers[0].frequency_rad_s:.3g}" in text

    bode = sensitivity_figure(margins).axes[0]
    for w in (0.05, 0.3, 1.0):
        S = abs(1 / (1 + L(w)))
        assert through(bode, (w, S), 5e-3) and through(bode, (w, abs(L(w)) * S), 5e-3)
    text = " ".join(words_of(bode.figure))
    for value in (margins.max_sensitivity, margins.sensitivity_bandwidth, margins.complementary_bandwidth):
        assert f"{value:.3g}" in text


@pytest.mark.parametrize("duty", [
    tw.Duty(5, load_step=8, load_time=80, scan_time=1, noise=0.3, valve=tw.ValveSettings(stick=1), rest_output=88),
    tw.Duty(5, load_step=8, load_time=80, load_ramp_time=20, scan_time=1), tw.Duty(scan_time=1),
    tw.Duty(disturbance=np.sin(np.arange(150) / 8), scan_time=1, valve=tw.ValveSettings(dead_band=1))], ids=str)
def test_trends(duty):
    trend, other = (tw.simulate(G, s, duty, horizon=200) for s in (SETTINGS, tw.PidSettings(0.3, integral_time=20)))
    for figure, names in ((trend.plot(), ("process value", "output")), (trend.plot(as_found=other), ("as found", "proposed")),
                          (trend.plot(as_found=other, labels=("sticking", "healthy")), ("sticking", "healthy"))):
        assert overlaps(figure) == []
        words = words_of(figure)
        assert all(name in words for name in names) and "set point" in words
        assert (any(w.strip().startswith("load +8") for w in words)) == (duty.load_step != 0)
        drawn = [line.get_ydata() for axes in figure.axes for line in axes.lines]
        for column in (trend.process_value, trend.output, trend.setpoint, trend.valve_position):
            assert any(np.array_equal(column, y) for y in drawn)
    assert any(np.array_equal(other.process_value, line.get_ydata()) for line in figure.axes[0].lines)
    styles = [(line.get_linestyle(), line.get_linewidth()) for line in figure.axes[0].lines if len(line.get_ydata()) == len(trend)]
    assert len(set(styles)) == len(styles) == 3  # told apart without colors
    assert len(figure.axes) == 2 + (not duty.valve.perfect) + (duty.disturbance.size > 0)


def test_continuous_trends_are_drawn():
    assert overlaps(tw.continuous_trend(G, SETTINGS, tw.Duty(5, load_step=2, load_time=50), horizon=100).plot()) == []


@pytest.mark.parametrize("gain", [0.3, 0.9])
def test_worst_cases(gain):
    worst = tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=gain, lags=0.3, dead_time=0.3))
    figure = worst.plot()
    assert overlaps(figure) == []
    words = " ".join(words_of(figure))
    assert "nominal" in words and "worst member" in words and worst.verdict in words and "proved" in words
    w = 0.4
    for process in (G, worst.at):
        L = complex(process(1j * w) * SETTINGS(1j * w))
        assert through(figure.axes[0], (L.real, L.imag), 5e-3)
    assert {line.get_linestyle() for line in figure.axes[0].lines if len(line.get_xdata()) > 500} == {"-", "--"}


def test_the_sheet_draws_the_sampled_loop():
    # the closest approach lies on the curve drawn, at the distance that the margins give
    arrays = bump_test(5, lambda t: first_order_step(t, 0.8, 30.0, 7.3))
    record = tw.Record(*arrays, output_range=(0, 100, "%"), process_value_range=(0, 200, "degC"))
    sheet = tw.tune(record, tw.TuningRequest(duty=tw.Duty(5, scan_time=5)))
    plane = figure_of(record, sheet).axes[4]
    dot = next(c[0] for c in curves(plane) if len(c) == 1 and c[0][0] != -1)
    assert np.hypot(dot[0] + 1, dot[1]) == pytest.approx(1 / sheet.margins.max_sensitivity, rel=1e-9)
    assert through(plane, dot, 5e-3)


@pytest.mark.parametrize("draw, argument", [
    (open_loop_figure, G), (sensitivity_figure, None), (trend_figure, "trend"), (worst_case_figure, SETTINGS)])
def test_other_things_are_not_drawn(draw, argument):
    with pytest.raises(TypeError, match="give what tauwright"):
        draw(argument)
    with pytest.raises(TypeError, match="as_found"):
        trend_figure(tw.simulate(G, SETTINGS, tw.Duty(scan_time=1), horizon=20), as_found=5)
