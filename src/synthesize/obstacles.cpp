#include "synthesize/obstacles.hpp"

#include <algorithm>
#include <cmath>

#include "synthesize/default_response.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// Slow poles drag a load response when they outlast the loop this many times (common practice, no source).
constexpr double slow_times = 4.0;

std::string shown(double x) { return text_of(x, 6); }

// The slowest lag of the response: its closed-loop time constant.
double time_constant_of(const TransferFunction& response) {
    double slowest = 0.0;
    for (double T : response.factors().lags) slowest = std::max(slowest, T);
    for (const auto& pair : response.factors().lag_pairs) slowest = std::max(slowest, pair.time_constant);
    return slowest;
}

void find_prediction(const TransferFunction& process, const TransferFunction& response, std::vector<Obstacle>& list) {
    const double missing = process.dead_time() - response.dead_time();
    if (missing > 1e-12 * process.dead_time())
        list.push_back({ObstacleCode::prediction_needed, Severity::impossible,
                        "the response asked for begins " + shown(missing) +
                            " s before the process can answer; the controller would have to predict",
                        missing, "ask for a dead time of at least " + shown(process.dead_time()) + " s"});
}

void find_speed(const TransferFunction& process, const TransferFunction& response, std::vector<Obstacle>& list) {
    const double tau_c = time_constant_of(response), dead_time = process.dead_time();
    if (dead_time > 0.0 && tau_c < dead_time && response.dead_time() >= dead_time)
        list.push_back({ObstacleCode::faster_than_dead_time, Severity::caution,
                        "the closed-loop time constant " + shown(tau_c) + " s is below the dead time " + shown(dead_time) +
                            " s; a small error in the dead time can make the loop unstable",
                        tau_c / dead_time, "ask for a time constant of at least " + shown(dead_time) + " s"});
    for (double lag : process.factors().lags) {
        if (lag <= slow_times * (tau_c + dead_time) || lag <= 0.0) continue;
        list.push_back({ObstacleCode::slow_pole_cancelled, Severity::caution,
                        "the lag of " + shown(lag) + " s is cancelled by the controller and stays in the load response, " +
                            shown(lag / (tau_c + dead_time)) + " times slower than the loop",
                        lag / (tau_c + dead_time),
                        "limit the integral time to 4 (time constant + dead time) = " + shown(4.0 * (tau_c + dead_time)) + " s"});
    }
}

void find_improper(const TransferFunction& process, const TransferFunction& response, std::vector<Obstacle>& list) {
    const int k = process.relative_degree() - response.relative_degree();
    if (k > 0)
        list.push_back({ObstacleCode::improper, Severity::needs_filter,
                        "the controller has " + std::to_string(k) + " more zeros than poles; its gain grows without end "
                                                                    "with frequency",
                        static_cast<double>(k),
                        "raise the order by " + std::to_string(k) + ", or add a filter to the derivative action"});
}

void find_cancelled_zeros(const TransferFunction& process, const TransferFunction& response, std::vector<Obstacle>& list) {
    // What the response does not keep of the process's zeros, the controller has as poles.
    const TransferFunction filter = struck_out(response, process);
    for (const auto& p : filter.poles()) {
        if (p.real() < 0.0 || p.imag() < 0.0) continue;
        list.push_back({ObstacleCode::right_half_plane_zero_cancelled, Severity::impossible,
                        "the zero at " + shown(p.real()) + (p.imag() > 0.0 ? " + " + shown(p.imag()) + "j" : std::string()) +
                            " rad/s would be cancelled by the controller, whose output then does not settle",
                        p.real(), "keep this zero in the response asked for"});
    }
}

void find_cancelled_poles(const TransferFunction& process, const InternalModelController& controller,
                          std::vector<Obstacle>& list) {
    for (const auto& p : process.poles()) {
        if (p.real() < 0.0 || p.imag() < 0.0 || p == 0.0) continue;  // those at 0 are counted below
        const double missing = std::abs(controller.one_minus_response(p));
        if (missing <= 1e-9) continue;
        list.push_back({ObstacleCode::unstable_pole_cancelled, Severity::impossible,
                        "the response differs from 1 by " + shown(missing) + " at the pole " + shown(p.real()) +
                            (p.imag() > 0.0 ? " + " + shown(p.imag()) + "j" : std::string()) +
                            " rad/s; the controller would cancel a pole that does not decay, and every load would stay or run away",
                        p.real(), "ask for a response that is 1 at the unstable pole"});
    }
    if (process.integrators() > controller.integrators())
        list.push_back({ObstacleCode::unstable_pole_cancelled, Severity::impossible,
                        "1 - T vanishes " + std::to_string(controller.integrators()) + " times at s = 0, the process integrates " +
                            std::to_string(process.integrators()) + " times; every load would run away",
                        0.0, "ask for a response that is 1 at rest, and once more flat for each further integrator"});
}

void find_missing_integral(const TransferFunction& process, const TransferFunction& response,
                           const InternalModelController& controller, std::vector<Obstacle>& list) {
    const double at_rest = response.steady_gain();
    if (controller.integrators() == 0) {
        list.push_back({ObstacleCode::no_integral_action, Severity::caution,
                        "the response settles at " + shown(at_rest) + " of the set point, not at 1; an offset of " +
                            shown(100.0 * (1.0 - at_rest)) + " % stays",
                        1.0 - at_rest, "ask for a response with gain 1 at rest"});
    } else if (controller.integrators() == process.integrators()) {
        // G (1 - T) at s = 0: both vanish to the same order, look close by.
        const double w = 1e-6 / (time_constant_of(response) + response.dead_time() + 1e-300);
        const double offset = std::abs(process({0.0, w}) * controller.one_minus_response({0.0, w}));
        list.push_back({ObstacleCode::no_integral_action, Severity::caution,
                        "the controller does not integrate: a load leaves an offset of " + shown(offset) + " per unit of load",
                        offset, "ask for a response whose 1 - T vanishes once more at s = 0"});
    }
}

}  // namespace

bool is_perfect(const TransferFunction& response) {
    const TransferFunction left = struck_out(response, TransferFunction::from_factors({}));
    return response.dead_time() == 0.0 && left.gain() == 1.0 && left.order() == 0 && left.zero_count() == 0;
}

std::vector<Obstacle> find_obstacles(const TransferFunction& process, const TransferFunction& response) {
    std::vector<Obstacle> list;
    if (is_perfect(response)) {
        list.push_back({ObstacleCode::infinite_controller, Severity::impossible,
                        "the response asked for is 1 at every frequency; the controller would need infinite gain", 1.0,
                        "ask for a response that takes time"});
        find_prediction(process, response, list);
        find_improper(process, response, list);
        find_cancelled_zeros(process, response, list);
        return list;
    }
    const InternalModelController controller(struck_out(response, process), response);
    find_prediction(process, response, list);
    find_cancelled_zeros(process, response, list);
    find_cancelled_poles(process, controller, list);
    find_improper(process, response, list);
    find_missing_integral(process, response, controller, list);
    find_speed(process, response, list);
    return list;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
