#include <algorithm>
#include <cmath>
#include <numbers>

#include "catch_compat.hpp"
#include "tauwright/tauwright.hpp"

using namespace tauwright;
using Catch::Matchers::ContainsSubstring;

namespace {

TransferFunction lag_and_dead_time(double gain, double lag, double dead_time) {
    return TransferFunction::from_factors({.gain = gain, .lags = {lag}, .dead_time = dead_time});
}

TransferFunction integrator_and_dead_time(double gain, double dead_time) {
    return TransferFunction::from_factors({.gain = gain, .integrators = 1, .dead_time = dead_time});
}

Duty both_steps() { return {.setpoint_step = 5.0, .load_step = 4.0, .load_time = 150.0, .scan_time = 0.5}; }

AuditLoop heated_tank() {
    return {.name = "TIC-101", .process = lag_and_dead_time(1.2, 30.0, 5.0),
            .settings = PidSettings{.gain = 0.6, .integral_time = 60.0}, .duty = both_steps()};
}

}  // namespace

// The formulas of the header written out; SIMC (Skogestad, J. Process Control 13, 2003), with the
// effective dead time for the dead time.
TEST_CASE("the proposal made for one lag", "[closed form]") {
    AuditLoop loop = heated_tank();
    const double lag = GENERATE(8.0, 30.0, 400.0);
    loop.process = lag_and_dead_time(1.2, lag, 5.0);
    loop.settings->measurement_filter_time = 1.5;
    loop.settings->setpoint_weight = 0.4;
    const AuditRow row = audit(loop);
    REQUIRE(row.proposal);
    CHECK(row.proposal_made);
    const double D = 5.0 + 0.25 + 1.5, tau_c = std::max({D, 0.1 * lag, 1.5});
    const PidSettings& s = row.proposal->settings;
    CHECK(s.gain == Approx(lag / (1.2 * (tau_c + D))).epsilon(1e-12));
    CHECK(*s.integral_time == Approx(std::min(lag, 4.0 * (tau_c + D))).epsilon(1e-12));
    CHECK(s.derivative_time == 0.0);
    CHECK(s.measurement_filter_time == 1.5);
    CHECK(s.setpoint_weight == 0.4);
    CHECK(row.horizon == Approx(150.0 + 8.0 * (tau_c + D)).epsilon(1e-12));
}

// Integrating row of the IMC table (Rivera, Morari, Skogestad 1986).
TEST_CASE("the proposal made for an integrating process", "[closed form]") {
    const AuditRow row = audit({.process = integrator_and_dead_time(0.02, 4.0), .settings = PidSettings{.gain = 1.0, .integral_time = 100.0},
                                .duty = {.scan_time = 1.0}});
    REQUIRE(row.proposal);
    const double D = 4.5, tau_c = 3.0 * D;
    CHECK(row.proposal->settings.gain == Approx((2 * tau_c + D) / (0.02 * (tau_c + D) * (tau_c + D))).epsilon(1e-12));
    CHECK(*row.proposal->settings.integral_time == Approx(2 * tau_c + D).epsilon(1e-12));
    CHECK_FALSE(row.proposal->figures);
    CHECK(row.horizon == 0.0);
}

// Both lags cancelled by the zeros of an ideal PID: Kc = (T1 + T2)/(K (tau_c + D)), Ti = T1 + T2, Td = T1 T2/Ti.
TEST_CASE("the proposal made for two lags has a filter that the controller can hold", "[closed form]") {
    AuditLoop loop{.process = TransferFunction::from_factors({.gain = 2.0, .lags = {20.0, 5.0}, .dead_time = 3.0}),
                   .settings = PidSettings{.gain = 0.5, .integral_time = 30.0}};
    AuditRow row = audit(loop);
    REQUIRE(row.proposal);
    CHECK(row.proposal->settings.gain == Approx(25.0 / (2.0 * 6.0)).epsilon(1e-12));
    CHECK(*row.proposal->settings.integral_time == Approx(25.0).epsilon(1e-12));
    CHECK(row.proposal->settings.derivative_time == Approx(4.0).epsilon(1e-12));
    CHECK(row.proposal->settings.filter_time == Approx(0.4).epsilon(1e-12));
    loop.form = ControllerForm{.derivative_unit = TimeUnit::minutes, .filter_as = FilterAs::ratio, .fixed_filter = 8.0};
    row = audit(loop);
    REQUIRE(row.proposal);
    CHECK(row.proposal->settings.filter_time == Approx(0.5).epsilon(1e-12));
    CHECK(*row.proposal->entered->derivative_time == Approx(4.0 / 60.0).epsilon(1e-12));
    loop.form->filter_as = FilterAs::time;
    loop.form->fixed_filter = 0.01;  // minutes
    row = audit(loop);
    REQUIRE(row.proposal);
    CHECK(row.proposal->settings.filter_time == Approx(0.6).epsilon(1e-12));
}

// What the series expansion makes of a slow right-half-plane zero is weak at first.
TEST_CASE("a proposal made here is never weak", "[invariant]") {
    const double lead = GENERATE(-2.0, -10.0, -60.0), damping = GENERATE(0.05, 0.3, 1.0);
    CAPTURE(lead, damping);
    const AuditRow row = audit({.process = TransferFunction::from_factors({.gain = -0.8, .leads = {lead}, .lags = {3.0},
                                                                          .lag_pairs = {{.time_constant = 5.0, .damping = damping}},
                                                                          .dead_time = 2.0}),
                                .settings = PidSettings{.gain = -0.01, .integral_time = 5.0}});
    if (row.proposal) {
        CHECK(*row.proposal->margins.max_sensitivity <= 2.0);
        CHECK(*row.proposal->margins.gain_margin >= 1.7);
        CHECK(*row.proposal->margins.phase_margin_deg >= 30.0);
    } else {
        CHECK(row.outcome == AuditOutcome::no_proposal);
        CHECK_THAT(row.reason, ContainsSubstring("no proposal: "));
    }
    CHECK(row.error.empty());
}

// Trade practice: Kc = 100/PB; repeats per minute r to Ti = 60/r s.
TEST_CASE("what is in service is converted exactly from its form", "[closed form]") {
    AuditLoop loop = heated_tank();
    loop.settings.reset();
    SECTION("proportional band and repeats per minute") {
        loop.form = ControllerForm{.gain_as = GainAs::proportional_band, .integral_as = IntegralAs::repeats,
                                   .integral_unit = TimeUnit::minutes, .gain_resolution = 1.0, .integral_resolution = 0.01};
        loop.entered = Entered{.proportional_band = 80.0, .repeats = 2.0};
        const AuditRow row = audit(loop);
        REQUIRE(row.in_service);
        CHECK(row.in_service->settings.gain == Approx(1.25).epsilon(1e-15));
        CHECK(*row.in_service->settings.integral_time == Approx(30.0).epsilon(1e-15));
        CHECK(*row.in_service->entered == *loop.entered);
        REQUIRE(row.proposal);
        CHECK(std::round(*row.proposal->entered->proportional_band) == *row.proposal->entered->proportional_band);
        CHECK(row.proposal->settings == settings_from(*row.proposal->entered, *loop.form));
    }
    SECTION("series form: Kc = Kc' (Ti' + Td' - Tf)/Ti'") {
        loop.form = ControllerForm{.equation = Equation::series};
        loop.entered = Entered{.gain = 1.0, .integral_time = 20.0, .derivative_time = 5.0, .filter_time = 0.5};
        const AuditRow row = audit(loop);
        REQUIRE(row.in_service);
        const PidSettings& s = row.in_service->settings;
        CHECK(s.gain == Approx(24.5 / 20.0).epsilon(1e-14));
        CHECK(*s.integral_time == Approx(24.5).epsilon(1e-14));
        CHECK(s.derivative_time == Approx(20.0 * 5.0 / 24.5 - 0.5).epsilon(1e-14));
    }
    SECTION("engineering units, the process too: 2.4 degC/% over 200 degC is 1.2 %/%, 0.3 %/degC is 0.6 %/%") {
        loop.form = ControllerForm{.gain_unit = GainUnit::engineering,
                                   .process_value_range = Range{.low = 0.0, .high = 200.0, .unit = "degC"}, .output_range = Range{}};
        loop.entered = Entered{.gain = 0.3, .integral_time = 60.0};
        loop.process = lag_and_dead_time(2.4, 30.0, 5.0);
        loop.process_gain_unit = GainUnit::engineering;
        const AuditRow row = audit(loop), same = audit(heated_tank());
        REQUIRE((row.in_service && same.in_service));
        CHECK(row.in_service->settings.gain == Approx(0.6).epsilon(1e-15));
        CHECK(*row.in_service->margins.max_sensitivity == Approx(*same.in_service->margins.max_sensitivity).epsilon(1e-12));
        CHECK(*row.proposal->entered->gain == Approx(0.5 * same.proposal->settings.gain).epsilon(1e-12));
    }
    SECTION("settings are shown in the form as far as it holds them") {
        loop.settings = PidSettings{.gain = 1.25, .integral_time = 30.0};
        loop.form = ControllerForm{.gain_as = GainAs::proportional_band};
        CHECK(*audit(loop).in_service->entered->proportional_band == 80.0);
        loop.form->gain_limits.low = 200.0;
        const AuditRow row = audit(loop);
        REQUIRE(row.in_service);
        CHECK_FALSE(row.in_service->entered);
    }
}

TEST_CASE("both sides are what margins and trends say of them, under one duty", "[invariant]") {
    AuditLoop loop = heated_tank();
    loop.proposal = PidSettings{.gain = 2.0, .integral_time = 28.0, .derivative_time = 2.0, .filter_time = 0.5};
    loop.horizon = 260.0;
    const AuditRow row = audit(loop);
    CHECK_FALSE(row.proposal_made);
    CHECK(row.horizon == 260.0);
    for (const auto& [side, settings] : {std::pair{row.in_service, *loop.settings}, std::pair{row.proposal, *loop.proposal}}) {
        REQUIRE(side);
        CHECK(side->settings == settings);
        CHECK(side->margins == robustness(*loop.process, settings, {.scan_time = 0.5}));
        CHECK(side->figures == figures(simulate(*loop.process, settings, loop.duty, 260.0)));
    }
}

// P control of k exp(-theta s)/s: unstable above k Kc theta = pi/2, gain margin pi/(2 k Kc theta).
TEST_CASE("what a row comes to", "[closed form]") {
    const double k = 0.1, theta = 2.0, ultimate = std::numbers::pi / (2.0 * k * theta);
    AuditLoop loop{.process = integrator_and_dead_time(k, theta), .proposal = PidSettings{.gain = 0.4 * ultimate}};
    const auto row_with = [&](double share) {
        loop.settings = PidSettings{.gain = share * ultimate};
        return audit(loop);
    };
    const AuditRow unstable = row_with(1.01);
    CHECK(unstable.outcome == AuditOutcome::unstable_in_service);
    CHECK(unstable.change_worthwhile);
    CHECK_THAT(unstable.reason, ContainsSubstring("in service is unstable on this model (2 unstable poles)"));
    const AuditRow wrong = row_with(-0.4);
    CHECK_THAT(wrong.reason, ContainsSubstring("acts the wrong way (gain -3.14 on a process gain of 0.1)"));
    CHECK(row_with(0.99).outcome == AuditOutcome::weak_in_service);
    CHECK_THAT(row_with(0.99).reason, ContainsSubstring("largest sensitivity"));
    const AuditRow same = row_with(0.4);
    CHECK(same.outcome == AuditOutcome::no_case);
    CHECK_THAT(same.reason, ContainsSubstring("the proposal is what is in service"));
    CHECK(row_with(0.41).outcome == AuditOutcome::no_case);
    loop.proposal = PidSettings{.gain = 0.8 * ultimate};
    const AuditRow worse = row_with(0.4);
    CHECK(worse.outcome == AuditOutcome::proposal_worse);
    CHECK_FALSE(worse.change_worthwhile);
    CHECK_THAT(worse.reason, ContainsSubstring("keep what is in service"));
    CHECK_FALSE(row_with(0.9).change_worthwhile);
    CHECK_THAT(row_with(0.9).reason, ContainsSubstring("weak too"));
    loop.proposal = PidSettings{.gain = 1.2 * ultimate};
    CHECK_THAT(row_with(0.4).reason, ContainsSubstring("with the proposal the loop would be unstable"));
}

TEST_CASE("figures decide between two sound sides", "[closed form]") {
    AuditLoop loop = heated_tank();
    const AuditRow slow = audit(loop);
    CHECK(slow.outcome == AuditOutcome::proposal_better);
    CHECK(slow.change_worthwhile);
    REQUIRE(slow.proposal->figures);
    CHECK_FALSE(slow.in_service->figures->settling_time);
    CHECK_THAT(slow.reason, ContainsSubstring("settles in " + text_of(*slow.proposal->figures->settling_time, 3) + " s (in service not within 150 s)"));
    CHECK_THAT(slow.reason, ContainsSubstring("times the valve travel"));
    std::swap(loop.settings, loop.proposal);
    loop.settings = slow.proposal->settings;
    const AuditRow back = audit(loop);
    CHECK(back.outcome == AuditOutcome::proposal_worse);
    CHECK_THAT(back.reason, ContainsSubstring("keep what is in service: the proposal does not settle within 150 s"));
    loop.settings = PidSettings{.gain = 2.3};
    loop.proposal.reset();
    CHECK_THAT(audit(loop).reason, ContainsSubstring("takes away the offset"));
    // Without a trend, the integral of the error after a load is Ti/Kc: 50 s against 25 s.
    loop.duty = {};
    loop.settings = PidSettings{.gain = 0.6, .integral_time = 30.0};
    loop.proposal = PidSettings{.gain = 1.2, .integral_time = 30.0};
    CHECK_THAT(audit(loop).reason, ContainsSubstring("integrated error per unit of load of 25 s instead of 50 s"));
}

TEST_CASE("a loop that rings is said to", "[invariant]") {
    AuditLoop loop = heated_tank();
    loop.settings = PidSettings{.gain = 5.2, .integral_time = 12.0};
    const AuditRow row = audit(loop);
    CHECK(row.outcome == AuditOutcome::weak_in_service);
    REQUIRE((row.in_service && row.in_service->figures && row.in_service->figures->decay_ratio));
    CHECK(*row.in_service->figures->decay_ratio > 0.25);
    CHECK_THAT(row.reason, ContainsSubstring("oscillates (decay ratio " + text_of(*row.in_service->figures->decay_ratio, 3) + ")"));
    CHECK_THAT(row.text(), ContainsSubstring("Decay ratio"));
}

TEST_CASE("outcomes that leave nothing to propose", "[closed form]") {
    AuditLoop loop = heated_tank();
    SECTION("the form cannot hold it") {
        loop.form = ControllerForm{};
        loop.form->gain_limits.high = 0.01;
        loop.settings = PidSettings{.gain = 0.01, .integral_time = 30.0};
        const AuditRow row = audit(loop);
        CHECK(row.outcome == AuditOutcome::no_proposal);
        CHECK(row.code == error_code::ok);
        CHECK_THAT(row.reason, ContainsSubstring("the controller cannot hold it"));
    }
    SECTION("nothing bounds the speed") {
        const AuditRow row = audit({.process = integrator_and_dead_time(0.1, 0.0), .settings = PidSettings{.gain = 1.0}});
        CHECK(row.outcome == AuditOutcome::no_proposal);
        CHECK_THAT(row.reason, ContainsSubstring("no closed-loop time constant follows"));
    }
    SECTION("a loop that cannot be built") {
        loop.process = TransferFunction::from_factors({.leads = {3.0, 2.0}, .lags = {5.0}});
        loop.duty.scan_time.reset();
        loop.proposal = PidSettings{.gain = 0.1};
        const AuditRow row = audit(loop);
        CHECK(row.outcome == AuditOutcome::undetermined);
        CHECK_THAT(row.reason, ContainsSubstring("could not be decided in service"));
    }
}

TEST_CASE("what fails is said in the row, and the other side stays", "[closed form]") {
    AuditLoop loop = heated_tank();
    const auto failed = [&](error_code code, const char* text) {
        const AuditRow row = audit(loop);
        CHECK(row.outcome == AuditOutcome::failed);
        CHECK(std::string(name_of(row.code)) == name_of(code));
        CHECK_THAT(row.error, ContainsSubstring(text));
        CHECK_FALSE(row.reason.empty());
        return row;
    };
    using enum error_code;
    SECTION("settings") {
        loop.settings->integral_time = -1.0;
        const AuditRow row = failed(out_of_domain, "in service: settings.integral_time is -1");
        CHECK_FALSE(row.in_service);
        REQUIRE((row.proposal && row.proposal->figures));
        CHECK_THAT(row.reason, ContainsSubstring("proposal Ms"));
    }
    SECTION("not a number") {
        loop.settings->gain = std::numeric_limits<double>::quiet_NaN();
        CHECK(failed(not_finite, "settings.gain is nan").proposal);
    }
    SECTION("neither") { loop.settings.reset(); CHECK(failed(missing_argument, "neither settings nor entered").proposal); }
    SECTION("both") { loop.entered = Entered{}; failed(conflicting_arguments, "both given"); }
    SECTION("numbers without form") {
        loop.settings.reset();
        loop.entered = Entered{.gain = 1.0, .integral_time = 20.0};
        failed(missing_argument, "entered is given without form");
    }
    SECTION("numbers of another form") {
        loop.settings.reset();
        loop.form = ControllerForm{};
        loop.entered = Entered{.proportional_band = 50.0, .integral_time = 20.0};
        failed(conflicting_arguments, "in service: entered.proportional_band");
    }
    SECTION("proposal") {
        loop.proposal = PidSettings{};
        const AuditRow row = failed(out_of_domain, "proposal: proposal.gain is 0");
        CHECK((row.in_service && row.in_service->figures && !row.proposal));
    }
    SECTION("a proposal that the form cannot hold") {
        loop.proposal = PidSettings{.gain = 2.0, .integral_time = 10.0, .derivative_time = 9.0, .filter_time = 1.0};
        loop.form = ControllerForm{.equation = Equation::series};
        CHECK(failed(no_equivalent, "proposal: settings have integral_time").in_service);
    }
    SECTION("process") {
        loop.process.reset();
        const AuditRow row = failed(missing_argument, "process is not given");
        CHECK((!row.in_service && !row.proposal));
        CHECK(row.name == "TIC-101");
    }
    SECTION("unstable process without proposal") {
        loop.process = lag_and_dead_time(-1.2, -60.0, 1.0);
        const AuditRow row = failed(unsupported_form, "give a proposal");
        CHECK(row.in_service);
    }
    SECTION("ranges") { loop.process_gain_unit = GainUnit::engineering; failed(missing_range, "process_gain_unit is engineering"); }
    SECTION("duty") { loop.duty.scan_time = 0.0; failed(out_of_domain, "duty.scan_time is 0"); }
    SECTION("horizon") { loop.horizon = -3.0; failed(out_of_domain, "horizon is -3"); }
    SECTION("horizon below two scans") {
        loop.horizon = 0.6;
        const AuditRow row = failed(out_of_domain, "trend: horizon is 0.6");
        CHECK((row.in_service && row.proposal && !row.proposal->figures));
    }
    SECTION("form") {
        loop.form = ControllerForm{.gain_unit = GainUnit::engineering};
        failed(missing_range, "a range is missing");
    }
}

TEST_CASE("audits as text keep to 78 columns of ASCII", "[closed form]") {
    std::vector<AuditLoop> loops(5, heated_tank());
    loops[1].settings->gain = 5.2;
    loops[2].settings->gain = -1.0;
    loops[3].process.reset();
    loops[4].name = "a loop with a name longer than its column";
    loops[4].form = ControllerForm{.gain_as = GainAs::proportional_band};
    const std::vector<AuditRow> rows = audit(loops);
    std::vector<std::string> texts{text_of(rows), text_of(std::vector<AuditRow>{})};
    for (const AuditRow& row : rows) texts.push_back(row.text());
    for (const std::string& text : texts) {
        std::size_t column = 0;
        for (char c : text) {
            CHECK((c == '\n' || (c >= ' ' && c <= '~')));
            column = c == '\n' ? 0 : column + 1;
            CHECK(column <= 78);
        }
    }
    CHECK_THAT(texts[0], ContainsSubstring("Audit of 5 loops"));
    CHECK_THAT(texts[0], ContainsSubstring("1 unstable and 1 weak in service, 1 failed"));
    CHECK_THAT(texts[0], ContainsSubstring("error (missing_argument): process is not given"));
    CHECK_THAT(rows[4].text(), ContainsSubstring("Proportional band"));
    CHECK_THAT(rows[0].text(), ContainsSubstring(text_of(*rows[0].proposal->margins.max_sensitivity, 5)));
}
