// Each obstacle on both sides of its boundary.
#include <algorithm>

#include "core/oracle_tools.hpp"
#include "tauwright/model/forms.hpp"
#include "tauwright/synthesize/synthesize.hpp"

using namespace tauwright;
using oracle::relative_error;

namespace {

TransferFunction from(Factors f) { return TransferFunction::from_factors(std::move(f)); }

const Obstacle* find(const Synthesis& s, ObstacleCode code) {
    const auto it = std::find_if(s.obstacles.begin(), s.obstacles.end(), [&](const Obstacle& o) { return o.code == code; });
    return it == s.obstacles.end() ? nullptr : &*it;
}

void check_present(const Synthesis& s, ObstacleCode code, Severity severity) {
    const Obstacle* o = find(s, code);
    INFO("looking for " << name_of(code) << " on " << s.process.text() << " to " << s.attained.text());
    REQUIRE(o != nullptr);
    CHECK(std::string(name_of(o->severity)) == name_of(severity));
    CHECK(o->message.size() > 10);
    CHECK(o->repair.size() > 10);
    const bool impossible = std::any_of(s.obstacles.begin(), s.obstacles.end(), [](const Obstacle& x) { return x.severity == Severity::impossible; });
    CHECK(s.buildable == !impossible);
    CHECK(s.controller.has_value() == s.buildable);
    if (!s.buildable) CHECK_FALSE(s.settings.has_value());
}

void check_absent(const Synthesis& s, ObstacleCode code) {
    INFO("must not be there: " << name_of(code) << " on " << s.process.text() << " to " << s.attained.text());
    CHECK(find(s, code) == nullptr);
}

Synthesis asked(const TransferFunction& G, double tau_c, int order = 1) { return synthesize(G, {.time_constant = tau_c, .order = order}); }
Synthesis taken(const TransferFunction& G, const TransferFunction& T) { return synthesize(G, {.transfer_function = T}); }

}  // namespace

TEST_CASE("faster than the dead time", "[closed form]") {
    const auto G = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const Synthesis fast = asked(G, 3.0 * (1.0 - 1e-9));
    check_present(fast, ObstacleCode::faster_than_dead_time, Severity::caution);
    CHECK(relative_error(find(fast, ObstacleCode::faster_than_dead_time)->value, 1.0 - 1e-9) <= 1e-12);
    CHECK(fast.buildable);
    check_absent(asked(G, 3.0), ObstacleCode::faster_than_dead_time);
    check_absent(asked(G, 3.0 * (1.0 + 1e-9)), ObstacleCode::faster_than_dead_time);
    check_absent(asked(first_order_plus_dead_time(2.0, 10.0, 0.0), 1e-3), ObstacleCode::faster_than_dead_time);
}

TEST_CASE("a slow pole cancelled: lag above 4 (tau_c + theta)", "[closed form]") {
    const auto at = [](double lag) { return asked(first_order_plus_dead_time(2.0, lag, 1.0), 2.0); };
    check_present(at(12.0 * (1.0 + 1e-9)), ObstacleCode::slow_pole_cancelled, Severity::caution);
    check_absent(at(12.0 * (1.0 - 1e-9)), ObstacleCode::slow_pole_cancelled);
    CHECK(relative_error(find(at(120.0), ObstacleCode::slow_pole_cancelled)->value, 40.0) <= 1e-12);
    CHECK(at(120.0).buildable);
}

TEST_CASE("prediction needed: the response begins before the process can answer", "[closed form]") {
    const auto G = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const auto at = [&](double theta) { return taken(G, from({.lags = {5.0}, .dead_time = theta})); };
    check_present(at(3.0 * (1.0 - 1e-9)), ObstacleCode::prediction_needed, Severity::impossible);
    check_present(at(0.0), ObstacleCode::prediction_needed, Severity::impossible);
    CHECK(find(at(0.0), ObstacleCode::prediction_needed)->value == 3.0);
    check_absent(at(3.0), ObstacleCode::prediction_needed);
    check_absent(at(3.0 * (1.0 + 1e-9)), ObstacleCode::prediction_needed);
    CHECK(at(4.0).buildable);
}

TEST_CASE("perfect response: the controller is infinite", "[closed form]") {
    const Synthesis perfect = taken(from({.gain = 2.0, .lags = {10.0}}), from({}));
    check_present(perfect, ObstacleCode::infinite_controller, Severity::impossible);
    CHECK_FALSE(perfect.buildable);
    check_absent(perfect, ObstacleCode::prediction_needed);
    // The same written with factors that cancel, and with dead time in the process.
    check_present(taken(from({.gain = 2.0, .lags = {10.0}}), from({.leads = {4.0}, .lags = {4.0}})), ObstacleCode::infinite_controller, Severity::impossible);
    const Synthesis late = taken(first_order_plus_dead_time(2.0, 10.0, 3.0), from({}));
    check_present(late, ObstacleCode::infinite_controller, Severity::impossible);
    check_present(late, ObstacleCode::prediction_needed, Severity::impossible);
    // Nearly perfect is possible, with a high gain: tau_c = 1e-6.
    const Synthesis nearly = asked(from({.gain = 2.0, .lags = {10.0}}), 1e-6);
    check_absent(nearly, ObstacleCode::infinite_controller);
    CHECK(relative_error(nearly.settings->gain, 5e6) <= 1e-12);
    // T = exp(-theta s) on a process with that dead time is not 1 everywhere.
    check_absent(taken(first_order_plus_dead_time(2.0, 10.0, 3.0), from({.dead_time = 3.0})), ObstacleCode::infinite_controller);
}

TEST_CASE("improper: more zeros than poles", "[closed form]") {
    const auto G = second_order_plus_dead_time(2.0, 10.0, 5.0, 1.0);
    check_present(asked(G, 3.0), ObstacleCode::improper, Severity::needs_filter);
    CHECK(find(asked(G, 3.0), ObstacleCode::improper)->value == 1.0);
    CHECK(asked(G, 3.0).buildable);
    check_absent(asked(G, 3.0, 2), ObstacleCode::improper);
    check_absent(asked(first_order_plus_dead_time(2.0, 10.0, 1.0), 3.0), ObstacleCode::improper);
    const auto four = from({.lags = {1.0, 2.0, 3.0, 4.0}});
    CHECK(find(taken(four, from({.lags = {1.0}})), ObstacleCode::improper)->value == 3.0);
    check_absent(taken(four, from({.lags = {1.0, 1.0, 1.0, 1.0}})), ObstacleCode::improper);
    // Zeros of T that answer for the poles of the integrating default: (2 tau_c + theta) s + 1 over two lags.
    check_absent(asked(integrating_plus_dead_time(0.05, 1.0), 4.0), ObstacleCode::improper);
    check_present(asked(integrating_plus_dead_time(0.05, 1.0, 3.0), 4.0), ObstacleCode::improper, Severity::needs_filter);
}

TEST_CASE("a zero in the right half plane, cancelled or kept", "[closed form]") {
    const auto G = from({.gain = 1.0, .leads = {-2.0}, .lags = {10.0, 5.0}, .dead_time = 1.5});
    const Synthesis bad = taken(G, from({.lags = {3.0}, .dead_time = 1.5}));
    check_present(bad, ObstacleCode::right_half_plane_zero_cancelled, Severity::impossible);
    CHECK(relative_error(find(bad, ObstacleCode::right_half_plane_zero_cancelled)->value, 0.5) <= 1e-12);
    check_absent(taken(G, from({.leads = {-2.0}, .lags = {3.0}, .dead_time = 1.5})), ObstacleCode::right_half_plane_zero_cancelled);
    check_absent(asked(G, 3.0), ObstacleCode::right_half_plane_zero_cancelled);
    // Nearly the same zero is another zero.
    check_present(taken(G, from({.leads = {-2.0 * (1.0 + 1e-9)}, .lags = {3.0}, .dead_time = 1.5})), ObstacleCode::right_half_plane_zero_cancelled, Severity::impossible);
    // A zero in the left half plane may go, and so may a pair there.
    check_absent(asked(from({.leads = {2.0}, .lags = {10.0, 5.0}}), 3.0), ObstacleCode::right_half_plane_zero_cancelled);
    const auto pair = from({.lags = {1.0, 2.0, 3.0}, .lead_pairs = {{2.0, -0.3}}});
    check_present(taken(pair, from({.lags = {3.0}})), ObstacleCode::right_half_plane_zero_cancelled, Severity::impossible);
    check_absent(asked(pair, 3.0), ObstacleCode::right_half_plane_zero_cancelled);
}

TEST_CASE("no integral action: T(0) is not 1", "[closed form]") {
    const auto G = first_order_plus_dead_time(2.0, 10.0, 3.0);
    const auto at = [&](double gain) { return taken(G, from({.gain = gain, .lags = {5.0}, .dead_time = 3.0})); };
    for (double missing : {0.5, 1e-3, -1e-3, 1e-9, -1e-9, 1e-12}) {
        const Synthesis s = at(1.0 - missing);
        INFO("1 - T(0) = " << missing);
        check_present(s, ObstacleCode::no_integral_action, Severity::caution);
        CHECK(oracle::absolute_error(find(s, ObstacleCode::no_integral_action)->value, missing) <= 1e-15);
        CHECK(s.buildable);
    }
    check_absent(at(1.0), ObstacleCode::no_integral_action);
    check_absent(asked(G, 5.0), ObstacleCode::no_integral_action);
    // An integrating process: 1 - T has to vanish twice for loads to leave no offset; once leaves K tau.
    const auto once = taken(from({.gain = 0.05, .integrators = 1}), from({.lags = {5.0}}));
    check_present(once, ObstacleCode::no_integral_action, Severity::caution);
    CHECK(relative_error(find(once, ObstacleCode::no_integral_action)->value, 0.05 * 5.0) <= 1e-6);
    check_absent(asked(integrating_plus_dead_time(0.05, 1.0), 4.0), ObstacleCode::no_integral_action);
}

TEST_CASE("an unstable pole cancelled, or the response 1 there", "[closed form]") {
    const auto G = from({.lags = {-1.0}});  // pole at 1 rad/s
    const auto T = [](double gamma) { return from({.leads = {gamma}, .lags = {0.5, 0.5}}); };
    check_absent(taken(G, T(1.25)), ObstacleCode::unstable_pole_cancelled);
    CHECK(taken(G, T(1.25)).buildable);
    for (double gamma : {1.25 * (1.0 + 1e-6), 1.25 * (1.0 - 1e-6), 0.5, 2.0})
        check_present(taken(G, T(gamma)), ObstacleCode::unstable_pole_cancelled, Severity::impossible);
    CHECK(find(taken(G, T(2.0)), ObstacleCode::unstable_pole_cancelled)->value == 1.0);
    // Two integrators, T(0) = 1 but no flatter.
    check_present(taken(from({.integrators = 2}), from({.lags = {1.0}})), ObstacleCode::unstable_pole_cancelled, Severity::impossible);
    check_absent(taken(from({.integrators = 2}), from({.leads = {3.0}, .lags = {1.0, 1.0, 1.0}})), ObstacleCode::unstable_pole_cancelled);
}

TEST_CASE("codes and severities keep their words and numbers", "[regression]") {
    const struct { ObstacleCode code; int number; const char* word; } codes[] = {
        {ObstacleCode::infinite_controller, 1, "infinite_controller"}, {ObstacleCode::no_integral_action, 2, "no_integral_action"},
        {ObstacleCode::prediction_needed, 3, "prediction_needed"}, {ObstacleCode::faster_than_dead_time, 4, "faster_than_dead_time"},
        {ObstacleCode::improper, 5, "improper"}, {ObstacleCode::right_half_plane_zero_cancelled, 6, "right_half_plane_zero_cancelled"},
        {ObstacleCode::unstable_pole_cancelled, 7, "unstable_pole_cancelled"}, {ObstacleCode::slow_pole_cancelled, 8, "slow_pole_cancelled"},
        {ObstacleCode::negative_time, 9, "negative_time"}};
    for (const auto& c : codes) {
        CHECK(static_cast<int>(c.code) == c.number);
        CHECK(std::string(name_of(c.code)) == c.word);
    }
    CHECK(std::string(name_of(Severity::caution)) == "caution");
    CHECK(std::string(name_of(Severity::needs_filter)) == "needs_filter");
    CHECK(std::string(name_of(Severity::impossible)) == "impossible");
}
