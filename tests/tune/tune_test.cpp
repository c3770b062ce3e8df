#include <algorithm>
#include <fstream>
#include <iterator>

#include "catch_compat.hpp"
#include "identify/simulated.hpp"
#include "tauwright/tauwright.hpp"

using namespace tauwright;
using Catch::Matchers::ContainsSubstring;
using simulated::Truth;

namespace {

// 0-200 degC and 0-100 %: the span row A12 of the trade facts, gain 2.4 degC/% = 1.2 %/%.
Record ranged_record(Truth truth = {}, unsigned seed = 3) {
    truth.gain = truth.lag > 0.0 ? 2.4 : 0.04;
    RecordColumns c = simulated::columns(truth, seed);
    c.process_value_range = Range{.low = 0.0, .high = 200.0, .unit = "degC"};
    c.output_range = Range{};
    return Record(c);
}

ControllerForm seconds_form() { return {.gain_resolution = 0.001, .integral_resolution = 0.01}; }

error_code code_of(const Record& record, const TuningRequest& request) {
    try {
        tune(record, request);
    } catch (const Error& e) {
        return e.code();
    }
    return error_code::ok;
}

}  // namespace

// The default speed and the settings that follow from it, by the formulas of the header written out:
// Kc = lag / (K (tau_c + D)), Ti = min(lag, 4 (tau_c + D)); source of the rule: Skogestad, J. Process
// Control 13, 2003 (SIMC), with the effective dead time D for theta.
TEST_CASE("self-regulating defaults", "[closed form]") {
    Truth truth{.noise = 0.05};
    const double lag = GENERATE(12.0, 60.0);
    truth.lag = lag;
    truth.move_times = {40, 640, 1240, 1840};
    truth.duration = 2400;
    truth.samples = 2400;
    const TuningSheet sheet = tune(ranged_record(truth), {.duty = Duty{.scan_time = 0.5}});
    REQUIRE(sheet.proposed);
    const FittedModel& fit = sheet.fit;
    const double D = fit.dead_time + 0.25;
    const double tau_c = std::max({D, 0.1 * fit.lags[0], 1.5, 2.0 * fit.standard_error("dead_time").value()});
    CHECK(sheet.speed->effective_dead_time == Approx(D).epsilon(1e-14));
    CHECK(sheet.speed->time_constant == Approx(tau_c).epsilon(1e-14));
    CHECK(sheet.proposed->settings.gain == Approx(fit.lags[0] / (fit.gain / 2.0 * (tau_c + D))).epsilon(1e-12));
    CHECK(*sheet.proposed->settings.integral_time == Approx(std::min(fit.lags[0], 4.0 * (tau_c + D))).epsilon(1e-12));
    CHECK(sheet.model->gain() == Approx(fit.gain / 2.0).epsilon(1e-15));  // 100 % / 200 degC
    CHECK(sheet.gain_unit == "%/%");
}

// Kc = (2 tau_c + D)/(k (tau_c + D)^2), Ti = 2 tau_c + D: IMC table, integrating row (Rivera, Morari, Skogestad 1986).
TEST_CASE("integrating defaults", "[closed form]") {
    const TuningSheet sheet = tune(ranged_record({.lag = 0.0, .noise = 0.05}), {.duty = Duty{.scan_time = 0.5}});
    REQUIRE(sheet.proposed);
    const double D = sheet.fit.dead_time + 0.25, tau_c = std::max(3.0 * D, 1.5), k = sheet.fit.gain / 2.0;
    CHECK(sheet.speed->time_constant == Approx(tau_c).epsilon(1e-14));
    CHECK(sheet.proposed->settings.gain == Approx((2 * tau_c + D) / (k * (tau_c + D) * (tau_c + D))).epsilon(1e-12));
    CHECK(*sheet.proposed->settings.integral_time == Approx(2 * tau_c + D).epsilon(1e-12));
}

TEST_CASE("margins are those of the rounded numbers, with scan and filters", "[invariant]") {
    const TuningSheet sheet =
        tune(ranged_record(), {.form = ControllerForm{.gain_as = GainAs::proportional_band, .integral_as = IntegralAs::repeats,
                                                      .integral_unit = TimeUnit::minutes, .gain_resolution = 1.0,
                                                      .integral_resolution = 0.1},
                               .duty = Duty{.scan_time = 1.0},
                               .as_found = Entered{.proportional_band = 200.0, .repeats = 2.0, .measurement_filter_time = 2.0}});
    REQUIRE(sheet.proposed);
    CHECK(std::round(*sheet.proposed->entered->proportional_band) == *sheet.proposed->entered->proportional_band);
    CHECK(sheet.proposed->settings == settings_from(*sheet.proposed->entered, *sheet.form));
    CHECK(sheet.proposed->settings.measurement_filter_time == 2.0);
    CHECK(sheet.speed->effective_dead_time == Approx(sheet.fit.dead_time + 0.5 + 2.0));
    CHECK(sheet.proposed->margins == robustness(*sheet.model, sheet.proposed->settings, {.scan_time = 1.0}));
    REQUIRE(sheet.as_found);
    CHECK(sheet.as_found->settings.gain == 0.5);
    CHECK(*sheet.as_found->settings.integral_time == 30.0);
}

TEST_CASE("settings are withheld, with the reason", "[closed form]") {
    const Record good = ranged_record();
    SECTION("no move") {
        const TuningSheet sheet = tune(ranged_record({.move_times = {}, .move_sizes = {}}));
        CHECK_FALSE(sheet.proposed);
        CHECK(sheet.advice() == Advice::test_again);
        CHECK_THAT(sheet.text(), ContainsSubstring("NO SETTINGS ARE GIVEN"));
    }
    SECTION("response below the noise") { CHECK_FALSE(tune(ranged_record({.noise = 60.0})).proposed); }
    SECTION("weak margins, unless somebody accepts them") {
        TuningRequest request{.time_constant = 0.2};
        const TuningSheet sheet = tune(good, request);
        CHECK_FALSE(sheet.proposed);
        REQUIRE(sheet.withheld.size() == 1);
        CHECK_THAT(sheet.withheld[0], ContainsSubstring("name who accepts"));
        request.accept_weak_margins_by = "A. Engineer";
        const TuningSheet accepted = tune(good, request);
        CHECK(accepted.proposed);
        CHECK(accepted.weak_margins_accepted_by == "A. Engineer");
        CHECK_THAT(accepted.text(), ContainsSubstring("Weak margins were accepted by A. Engineer"));
    }
    SECTION("a field that cannot hold the number") {
        ControllerForm form;
        form.gain_limits.high = 0.1;
        const TuningSheet sheet = tune(good, {.form = form});
        CHECK_FALSE(sheet.proposed);
        CHECK_THAT(sheet.withheld.at(0), ContainsSubstring("the controller cannot hold the settings"));
    }
}

TEST_CASE("what is asked wrongly is refused", "[closed form]") {
    const Record bare = simulated::record({}, 1), ranged = ranged_record();
    CHECK(code_of(ranged, {.safety_function = true}) == error_code::safety_function);
    CHECK(code_of(bare, {.form = seconds_form()}) == error_code::missing_range);
    CHECK(code_of(bare, {.as_found = Entered{.gain = 1.0, .integral_time = 10.0}}) == error_code::missing_argument);
    CHECK(code_of(ranged, {.time_constant = 0.0}) == error_code::out_of_domain);
    CHECK(code_of(ranged, {.duty = Duty{.scan_time = -1.0}}) == error_code::out_of_domain);
    ControllerForm other = seconds_form();
    other.process_value_range = Range{.low = 0.0, .high = 100.0, .unit = "degC"};
    CHECK(code_of(ranged, {.form = other}) == error_code::conflicting_arguments);
    ControllerForm engineering = seconds_form();
    engineering.gain_unit = GainUnit::engineering;
    CHECK(code_of(bare, {.form = engineering}) == error_code::missing_range);
    CHECK(code_of(ranged, {.form = seconds_form(), .as_found = Entered{.gain = 1.0}}) == error_code::missing_argument);
}

TEST_CASE("without ranges the sheet stays in the record's units and says so", "[closed form]") {
    const TuningSheet sheet = tune(simulated::record({.noise = 0.05}, 1));
    REQUIRE(sheet.proposed);
    CHECK(sheet.gain_unit == "output unit/process-value unit");
    CHECK(sheet.model->gain() == sheet.fit.gain);
    CHECK_FALSE(sheet.proposed->figures);
}

TEST_CASE("no speed that follows from the model is a reason, not an error", "[closed form]") {
    const TuningSheet sheet = tune(ranged_record({.lag = 0.0, .noise = 0.05}), {.identify = {.fixed = {.dead_time = 0.0}}});
    CHECK_FALSE(sheet.proposed);
    CHECK_THAT(sheet.withheld.at(0), ContainsSubstring("no closed-loop time constant follows"));
}

TEST_CASE("the record's ranges serve a form in engineering units", "[closed form]") {
    ControllerForm form = seconds_form();
    form.gain_unit = GainUnit::engineering;
    const TuningSheet sheet = tune(ranged_record({.noise = 0.05}), {.form = form});
    REQUIRE(sheet.proposed);
    // 100 % of output over 200 degC: half the number per degC (trade-facts A13).
    CHECK(*sheet.proposed->entered->gain == Approx(0.5 * sheet.proposed->settings.gain).epsilon(1e-12));
}

TEST_CASE("as-found numbers that the model calls unstable are questioned", "[closed form]") {
    const TuningSheet sheet = tune(ranged_record({.noise = 0.05}), {.form = seconds_form(), .duty = Duty{.setpoint_step = 2.0, .scan_time = 0.5},
                                                                    .as_found = Entered{.gain = 40.0, .integral_time = 5.0}});
    REQUIRE(sheet.as_found);
    CHECK(sheet.as_found->margins.verdict == Verdict::unstable);
    CHECK_FALSE(sheet.as_found->figures);
    CHECK_THAT(sheet.text(), ContainsSubstring("would not be stable on this"));
}

TEST_CASE("an integral time limited for loads is said, and the slow pole with it is not", "[closed form]") {
    const TuningSheet sheet = tune(ranged_record({.lag = 60.0, .noise = 0.02, .move_times = {40, 640, 1240, 1840}, .duration = 2400, .samples = 2400}));
    REQUIRE(sheet.proposed);
    CHECK(sheet.speed->integral_time_limited);
    CHECK_THAT(sheet.text(), ContainsSubstring("limited to 4 (time constant"));
    for (const Obstacle& o : sheet.obstacles) CHECK(o.code != ObstacleCode::slow_pole_cancelled);
}

TEST_CASE("the standing cautions come first and in order", "[closed form]") {
    const TuningSheet sheet = tune(ranged_record());
    const char* const first_words[] = {"Advice, not authority.", "Not for safety functions.", "Change control.",
                                       "Local rules win.", "Operator in command."};
    for (std::size_t i = 0; i < 5; ++i) CHECK_THAT(sheet.cautions.at(i), Catch::Matchers::StartsWith(first_words[i]));
    CHECK_THAT(sheet.text(), ContainsSubstring("No scan time was given"));
}

TEST_CASE("a sheet survives JSON to the last bit", "[invariant]") {
    const std::vector<TuningSheet> sheets = {
        tune(ranged_record(), {.form = seconds_form(), .duty = Duty{.setpoint_step = 4.0, .load_step = 2.0, .load_time = 60.0,
                                                                     .scan_time = 0.5},
                               .as_found = Entered{.gain = 0.3, .integral_time = 40.0}, .loop_name = "TIC \"1\" \xC2\xB0"}),
        tune(ranged_record({.move_times = {}, .move_sizes = {}})), tune(simulated::record({}, 2)),
        tune(ranged_record({.lag = 0.0, .noise = 0.05}))};
    for (const TuningSheet& sheet : sheets) {
        const std::string json = sheet.json();
        const TuningSheet back = TuningSheet::from_json(json);
        CHECK(back.json() == json);
        CHECK(differences(sheet, back).empty());
        CHECK(back.text() == sheet.text());
    }
    const auto changed = differences(sheets[0], tune(ranged_record({}, 4), {.form = seconds_form()}));
    CHECK(std::any_of(changed.begin(), changed.end(), [](const SheetDifference& d) { return d.path == "/input_sha256"; }));
    CHECK(std::any_of(changed.begin(), changed.end(), [](const SheetDifference& d) { return d.path == "/as_found" || d.path.starts_with("/as_found/"); }));
}

TEST_CASE("a sheet of version 1 is still read", "[regression]") {
    // Written by the library before version 2, which added members; those keep their defaults.
    const std::string path = std::string(__FILE__).substr(0, std::string(__FILE__).rfind("tune/")) + "fuzz/sheet_json_fuzz_corpus/version_1.json";
    std::ifstream file(path);
    REQUIRE(file);
    const std::string old{std::istreambuf_iterator<char>(file), {}};
    REQUIRE_THAT(old, ContainsSubstring("\"schema_version\": 1"));
    const TuningSheet sheet = TuningSheet::from_json(old);
    REQUIRE(sheet.proposed);
    CHECK(sheet.proposed->margins.verdict == Verdict::stable);
    CHECK_FALSE(sheet.proposed->margins.sensitivity_bandwidth.has_value());
    CHECK_FALSE(sheet.proposed->valve_cycle);
    const TuningSheet again = TuningSheet::from_json(sheet.json());
    CHECK(differences(sheet, again).empty());
}

TEST_CASE("settings are withheld where the fit's own uncertainty makes them weak", "[invariant]") {
    // One record of little and one of much noise, the same speed asked for: cautions, "Reasons to withhold settings".
    const auto asked = [](double noise, const char* name) {
        const Record record = ranged_record({.noise = noise});
        const double dead_time = identify(record).dead_time;
        return tune(record, {.time_constant = 0.8 * dead_time, .duty = Duty{.scan_time = 0.5}, .accept_weak_margins_by = name});
    };
    const TuningSheet quiet = asked(0.3, "");
    REQUIRE(quiet.proposed);
    REQUIRE(quiet.proposed->worst_case);
    CHECK(quiet.proposed->worst_case->certified);
    CHECK(*quiet.proposed->worst_case->max_sensitivity > *quiet.proposed->margins.max_sensitivity);
    CHECK_THAT(quiet.text(), ContainsSubstring("stable, proved"));
    const TuningSheet noisy = asked(3.0, "");
    CHECK_FALSE(noisy.proposed);
    REQUIRE(noisy.withheld.size() == 1);
    CHECK_THAT(noisy.withheld[0], Catch::Matchers::StartsWith("within the fit's 95 % confidence region, the largest sensitivity is"));
    const TuningSheet accepted = asked(3.0, "J. Doe");
    REQUIRE(accepted.proposed);
    CHECK(accepted.weak_margins_accepted_by == "J. Doe");
    // What the sheet calls the worst member is one, and is as bad as it says.
    const WorstCase& worst = *accepted.proposed->worst_case;
    CHECK(*robustness(worst.at, accepted.proposed->settings, {.scan_time = 0.5}).max_sensitivity == Approx(*worst.max_sensitivity).epsilon(0.02));
    CHECK(differences(accepted, TuningSheet::from_json(accepted.json())).empty());
}

TEST_CASE("a sheet says what no retuning will cure", "[published]") {
    // Sticking under integral action never settles (trade fact H02); a perfect valve has no cycle to tell of.
    const auto washed = [](const ValveSettings& valve) {
        return tune(ranged_record(), {.form = seconds_form(), .duty = Duty{.setpoint_step = 4.0, .scan_time = 0.5, .valve = valve}});
    };
    const TuningSheet sheet = washed({.stick = 1.0});
    REQUIRE(sheet.proposed);
    REQUIRE(sheet.proposed->valve_cycle);
    CHECK(sheet.proposed->valve_cycle->existence == CycleExistence::persists);
    CHECK_FALSE(sheet.proposed->valve_cycle->retuning_cures);
    CHECK_THAT(sheet.text(), ContainsSubstring("Valve, with the proposed settings:"));
    CHECK(TuningSheet::from_json(sheet.json()).proposed->valve_cycle == sheet.proposed->valve_cycle);
    CHECK_FALSE(washed({}).proposed->valve_cycle);
}

TEST_CASE("documents that are no sheet are refused with the place", "[closed form]") {
    const std::string json = tune(ranged_record()).json();
    const auto refused = [](const std::string& text) {
        try {
            TuningSheet::from_json(text);
        } catch (const Error& e) {
            return std::string(name_of(e.code())) + ": " + e.what();
        }
        return std::string("accepted");
    };
    const auto changed = [&](const std::string& from, const std::string& to) {
        std::string text = json;
        const auto at = text.find(from);
        REQUIRE(at != std::string::npos);
        return refused(text.replace(at, from.size(), to));
    };
    CHECK_THAT(refused(""), Catch::Matchers::StartsWith("file_malformed"));
    CHECK_THAT(refused("[]"), ContainsSubstring("not an object"));
    CHECK_THAT(refused("{}"), Catch::Matchers::StartsWith("schema_unsupported"));
    CHECK_THAT(changed("\"schema_version\": 2", "\"schema_version\": 3"), Catch::Matchers::StartsWith("schema_unsupported"));
    CHECK_THAT(changed("\"r_squared\"", "\"r_squares\""), ContainsSubstring("/fit/r_squared is missing"));
    CHECK_THAT(changed("\"first_order_plus_dead_time\"", "\"tenth_order\""), ContainsSubstring("/fit/form is not one of the words"));
    CHECK_THAT(changed("\n    \"lags_s\": [\n      ", "\n    \"lags_s\": [], \"unused\": [\n      "), ContainsSubstring("/fit/lags_s does not belong"));
    CHECK_THAT(changed("\"zeros_at_origin\": 0", "\"zeros_at_origin\": -1"), ContainsSubstring("impossible value"));
    CHECK_THAT(changed("\"samples_used\": 1000", "\"samples_used\": -3"), ContainsSubstring("not a whole number"));
}
