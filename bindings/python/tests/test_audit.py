import threading

import pytest

import tauwright as tw
from conftest import refusal

DUTY = tw.Duty(5, load_step=4, load_time=150, scan_time=0.5)
FORM = tw.ControllerForm("ideal", gain_as="proportional_band", integral_as="repeats", integral_unit="minutes", gain_resolution=1)


def tank(gain=0.6, integral_time=60.0, **more):
    more = {"name": "TIC-101", "duty": DUTY, **more}
    return tw.AuditLoop(tw.first_order_plus_dead_time(1.2, 30, 5), tw.PidSettings(gain, integral_time=integral_time), **more)


def test_both_sides_under_one_duty():
    loop = tank(proposal=tw.PidSettings(2, integral_time=28), horizon=240)
    row = tw.audit(loop)[0]
    assert row.name == "TIC-101" and row.horizon == 240 and not row.proposal_made and row.form is None
    for side, settings in ((row.in_service, loop.settings), (row.proposal, loop.proposal)):
        assert side.settings == settings and side.entered is None
        assert side.margins == tw.robustness(loop.process, settings, scan_time=0.5)
        assert side.figures == tw.figures(tw.simulate(loop.process, settings, DUTY, horizon=240))
    assert row.outcome == "proposal_better" and row.change_worthwhile and row.code == "ok" and row.error == ""
    assert f"{row.proposal.figures.settling_time:.3g} s" in row.reason


def test_numbers_are_converted_from_their_form_and_the_proposal_back():
    # closed form: 100/80, 60/2; Kc = lag / (gain (tau + D)) with tau = D = 5 s + half a scan
    loop = tw.AuditLoop(tw.first_order_plus_dead_time(1.2, 30, 5), entered=tw.Entered(proportional_band=80, repeats=2.0), form=FORM,
                        duty=DUTY)
    row = tw.audit([loop])[0]
    assert row.in_service.settings == tw.PidSettings(1.25, integral_time=30) and row.in_service.entered == loop.entered
    assert row.proposal_made and row.form == FORM
    assert row.proposal.entered.proportional_band == round(100 * 1.2 * 10.5 / 30)
    assert row.proposal.settings == tw.settings_from(row.proposal.entered, FORM)


def test_engineering_units():
    form = tw.ControllerForm("ideal", gain_unit="engineering", process_value_range=(0, 200, "degC"), output_range=(0, 100))
    loop = tw.AuditLoop(tw.first_order_plus_dead_time(2.4, 30, 5), entered=tw.Entered(gain=0.3, integral_time=60), form=form,
                        duty=DUTY, process_gain_unit="engineering")
    # 100 % over 200 degC: 1.2 %/%, and twice the number for the gain.
    assert tw.audit(loop)[0].in_service.settings.gain == pytest.approx(0.6, rel=1e-15)
    with refusal("unknown_name"):
        tw.AuditLoop(None, process_gain_unit="volts")


def test_any_number_of_threads_gives_the_same():
    loops = [tank(0.1 * 1.07**i, 10 + i, name=f"loop {i}", duty=tw.Duty(5, noise=0.1, seed=i, scan_time=0.5)) for i in range(150)]
    loops[40] = tw.AuditLoop(None, tw.PidSettings(1), name="no process")
    one = tw.audit(loops)
    assert len(one) == 150 and [row.name for row in one][:3] == ["loop 0", "loop 1", "loop 2"]
    assert one[40].code == "missing_argument" and one[40].outcome == "failed" and "process" in one[40].error
    assert one[-1] == one[149] and one.summary.failed == 1 and one.summary.unstable_in_service > 0
    before = threading.active_count()
    rows = []
    for threads in (2, 5):
        assert tw.audit(iter(loops), threads=threads) == one
        rows.clear()
        assert tw.audit_stream((loop for loop in loops), rows.append, threads=threads) == one.summary
        assert rows == list(one)
    assert threading.active_count() == before
    with pytest.raises(IndexError):
        one[150]


def test_callbacks_run_here_and_can_end_it():
    here, seen, rows = threading.get_ident(), [], []

    def progress(done):
        assert threading.get_ident() == here
        seen.append(done)
        return done < 5

    part = tw.audit([tank()] * 20, progress=progress)
    assert len(part) == 5 and part.summary.cancelled and part.summary.rows == 5 and seen == [1, 2, 3, 4, 5]
    assert len(tw.audit([tank()] * 3, progress=lambda done: None)) == 3
    # What is held at most: 64 loops a thread.
    given = []

    def loops():
        for i in range(300):
            given.append(i)
            assert len(given) - len(rows) <= 64
            yield tank()

    assert tw.audit_stream(loops(), rows.append).rows == 300


class OwnError(Exception):
    pass


@pytest.mark.parametrize("threads", [1, 3])
def test_errors_of_the_caller_pass_through(threads):
    def fails(*_):
        raise OwnError

    def loops():
        yield tank()
        fails()

    for call in (lambda: tw.audit(loops(), threads=threads), lambda: tw.audit_stream([tank()], fails, threads=threads),
                 lambda: tw.audit([tank()] * 9, threads=threads, progress=fails)):
        with pytest.raises(OwnError):
            call()


def test_what_is_refused():
    with refusal("out_of_domain") as refused:
        tw.audit([], threads=0)
    assert "options.threads is 0" in refused.message
    with refusal("unknown_name") as refused:
        tw.audit(["TIC-101"])
    assert "AuditLoop" in refused.message
    with pytest.raises(TypeError):
        tw.audit(3)


def test_text_and_repr():
    audit = tw.audit([tank(), tank(5.2, 12, name="TIC-102"), tank(-1, name="TIC-103"), tw.AuditLoop(None, name="TIC-104")])
    texts = [audit.text(), *(row.text() for row in audit)]
    assert all(t.isascii() and max(map(len, t.splitlines())) <= 78 for t in texts)
    for word in ("Audit of 4 loops", "TIC-104", "weak_in_service", "acts the wrong way", "1 unstable and 1 weak in service, 1 failed"):
        assert word in texts[0]
    assert "proposed (made here)" in texts[1] and "settles in" in texts[1]
    for thing in (tank(form=FORM, horizon=200), audit, audit.summary, audit[0], audit[0].in_service, audit[3]):
        assert "\n" not in repr(thing) and repr(thing).startswith(type(thing).__name__ + "(")
    assert tank() == tank() and tank() != tank(2)
    assert len(tw.audit([])) == 0 and "Audit of 0 loops" in tw.audit([]).text()
