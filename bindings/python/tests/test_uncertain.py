"""Worst cases and shares, against brute force and closed forms."""

import math

import numpy as np
import pytest
from scipy.stats import chi2

import tauwright as tw
from conftest import refusal

G, SETTINGS = tw.first_order_plus_dead_time(2, 10, 3), tw.PidSettings(10 / 12, integral_time=10)
W = np.geomspace(1e-3, 3, 4001)


def peak(gain, lag, dead_time):
    """Independent computation: Ms of one member on a grid of frequencies."""
    s = 1j * W
    return (1 / abs(1 + gain * np.exp(-dead_time * s) / (lag * s + 1) * SETTINGS(s))).max()


def test_box_against_brute_force():
    worst = tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=0.3, lags=0.3, dead_time=0.3))
    assert worst.verdict == "stable" and worst.certified and not worst.cancelled and worst.at_model is None
    print("seed 9")
    members = np.random.default_rng(9).uniform(0.7, 1.3, (300, 3)) * (2, 10, 3)
    corners = np.array(np.meshgrid((1.4, 2.6), (7, 13), (2.1, 3.9))).reshape(3, 8).T
    peaks = [peak(*m) for m in (*members, *corners)]
    assert max(peaks) <= worst.max_sensitivity_bound * (1 + 1e-12)
    assert worst.max_sensitivity == pytest.approx(max(peaks), rel=1e-3)
    at = tw.robustness(worst.at, SETTINGS)
    assert at.max_sensitivity == pytest.approx(worst.max_sensitivity, rel=1e-12)
    for member in corners:
        r = tw.robustness(tw.first_order_plus_dead_time(*member), SETTINGS)
        assert r.gain_margin >= worst.gain_margin_bound * (1 - 1e-12) and r.delay_margin >= worst.delay_margin_bound - 1e-12
        assert r.phase_margin_deg >= worst.phase_margin_deg_bound - 1e-9
    for reached, bound in ((worst.gain_margin, worst.gain_margin_bound), (worst.phase_margin_deg, worst.phase_margin_deg_bound),
                           (worst.delay_margin, worst.delay_margin_bound), (worst.max_sensitivity, worst.max_sensitivity_bound)):
        assert reached == pytest.approx(bound, rel=1.1e-6)
    assert worst.members_tried > 0 and worst.boxes_used > 0 and "certified=True" in repr(worst)
    assert (worst.process, worst.settings, worst.extra_delay) == (G, SETTINGS, 0)


def test_gain_alone():
    # closed form: the margin of a member is the nominal one over its gain factor
    nominal = tw.robustness(G, SETTINGS, extra_delay=0.5).gain_margin
    box = tw.Uncertainty.box(gain=0.25)
    worst = tw.worst_case(G, SETTINGS, box, extra_delay=0.5, tolerance=1e-3)
    assert worst.gain_margin == pytest.approx(nominal / 1.25, rel=1e-9)
    absolute = tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=0.5, absolute=True), extra_delay=0.5)
    assert absolute.gain_margin == pytest.approx(nominal / 1.25, rel=1e-9)
    limit = nominal / 1.1
    share = tw.violating_share(G, SETTINGS, box, gain_margin=limit, extra_delay=0.5, members=4000, seed=3)
    expected = (1.25 - nominal / limit) / 0.5
    assert share.share == pytest.approx(expected, abs=5 * share.standard_error) and share.members == 4000 and share.unstable == 0
    assert share.standard_error == pytest.approx(math.sqrt(share.share * (1 - share.share) / 4000))
    again = tw.violating_share(G, SETTINGS, box, gain_margin=limit, extra_delay=0.5, members=4000, seed=3)
    assert again.share == share.share and "members=4000" in repr(share)
    wide = tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=0.9), extra_delay=8)
    assert wide.verdict == "unstable" and wide.max_sensitivity is None and tw.robustness(wide.at, SETTINGS, extra_delay=8).stable is False
    assert tw.violating_share(G, SETTINGS, tw.Uncertainty.box(gain=0.9), extra_delay=8).unstable > 0


def test_models():
    models = [G.with_gain(k) for k in (1, 2.5, 1.7)]
    uncertainty = tw.Uncertainty.of_models(models)
    worst = tw.worst_case(G, SETTINGS, uncertainty)
    assert worst.at_model == 1 and worst.at == models[1] and worst.certified
    assert worst.max_sensitivity == tw.robustness(models[1], SETTINGS).max_sensitivity
    limit = tw.robustness(models[2], SETTINGS).max_sensitivity * 1.001
    share = tw.violating_share(G, SETTINGS, uncertainty, max_sensitivity=limit)
    assert (share.share, share.members, share.standard_error) == (pytest.approx(1 / 3), 3, 0)
    assert (uncertainty.kind, uncertainty.models, uncertainty.confidence) == ("models", tuple(models), None)
    assert repr(uncertainty) == "Uncertainty.of_models(3 models)"


def test_confidence_region(record):
    # closed form: the region is an ellipsoid of the covariance, as large as a chi-square quantile of three parameters
    fit = tw.identify(record, form="first_order_plus_dead_time")
    region = tw.Uncertainty.from_fit(fit, confidence=0.9)
    assert region.kind == "confidence_region" and region.confidence == 0.9
    assert region.parameter_names == ("gain", "lag_1", "dead_time") and region.models == (fit.model,)
    np.testing.assert_allclose(region.estimates, [fit.gain, fit.lags[0], fit.dead_time])
    names = list(fit.standard_errors)
    pick = [names.index(n) for n in region.parameter_names]
    covariance = np.asarray(fit.covariance)[np.ix_(pick, pick)]
    np.testing.assert_allclose(region.half_axes @ region.half_axes.T, chi2.ppf(0.9, 3) * covariance, rtol=1e-9)
    settings = tw.PidSettings(1.0, integral_time=30)
    worst = tw.worst_case(fit.model, settings, region)
    nominal = tw.robustness(fit.model, settings)
    assert worst.certified and worst.max_sensitivity > nominal.max_sensitivity
    point = np.array([worst.at.gain, worst.at.lags[0], worst.at.dead_time]) - region.estimates
    assert point @ np.linalg.solve(covariance, point) <= chi2.ppf(0.9, 3) * (1 + 1e-6)
    assert tw.worst_case(fit.model, settings, tw.Uncertainty.from_fit(fit)).max_sensitivity > worst.max_sensitivity
    assert "confidence=0.9" in repr(region)


def test_progress_and_cancelling():
    box = tw.Uncertainty.box(gain=0.3, lags=0.3, dead_time=0.3)
    shares = []
    share = tw.violating_share(G, SETTINGS, box, max_sensitivity=1.7, members=3000, progress=shares.append)
    assert shares and shares == sorted(shares) and 0 <= shares[0] and shares[-1] <= 1 and not share.cancelled
    stopped = tw.violating_share(G, SETTINGS, box, max_sensitivity=1.7, members=100000, progress=lambda done: False)
    assert stopped.cancelled and stopped.members < 100000
    assert tw.worst_case(G, SETTINGS, box, progress=lambda done: False).cancelled

    class Stop(Exception):
        pass

    def failing(done):
        raise Stop

    for call in (lambda: tw.worst_case(G, SETTINGS, box, progress=failing),
                 lambda: tw.violating_share(G, SETTINGS, box, members=100000, progress=failing)):
        with pytest.raises(Stop):
            call()


def test_a_short_proof_says_so():
    worst = tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=0.3, lags=0.3, dead_time=0.3), most_boxes=3)
    assert not worst.certified and (worst.max_sensitivity_bound is None or worst.max_sensitivity_bound >= worst.max_sensitivity)


@pytest.mark.parametrize("make, code", [
    (lambda: tw.Uncertainty.box(gain=-0.1), "out_of_domain"), (lambda: tw.Uncertainty.box(lags=1.0), "out_of_domain"),
    (lambda: tw.Uncertainty.box(dead_time=math.nan), "not_finite"), (lambda: tw.Uncertainty.of_models([]), "missing_argument"),
    (lambda: tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=5, absolute=True)), "out_of_domain"),
    (lambda: tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=0.1), extra_delay=-1), "out_of_domain"),
    (lambda: tw.worst_case(G, SETTINGS, tw.Uncertainty.box(gain=0.1), tolerance=0), "out_of_domain"),
    (lambda: tw.violating_share(G, SETTINGS, tw.Uncertainty.box(gain=0.1), members=0), "out_of_domain"),
    (lambda: tw.violating_share(G, SETTINGS, tw.Uncertainty.box(gain=0.1), max_sensitivity=0.5), "out_of_domain"),
    (lambda: tw.violating_share(G, SETTINGS, tw.Uncertainty.box(gain=0.1), phase_margin_deg=math.nan), "not_finite")])
def test_bad_input(make, code):
    with refusal(code):
        make()


def test_fits_that_make_no_region(record):
    fit = tw.identify(record, form="first_order_plus_dead_time")
    for confidence in (0, 1, -0.1):
        with refusal("out_of_domain"):
            tw.Uncertainty.from_fit(fit, confidence=confidence)
    with refusal("conflicting_arguments"):
        tw.worst_case(fit.model.with_dead_time(99), SETTINGS, tw.Uncertainty.from_fit(fit))
    assert repr(tw.Uncertainty.box(lags=2, absolute=True)) == "Uncertainty.box(lags=2 s, absolute=True)"
