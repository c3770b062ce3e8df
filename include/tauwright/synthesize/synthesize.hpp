// From a process and a response asked for to the controller, what stands in its way, and the PI or
// PID nearest to it. Compiled.
#pragma once

#include <complex>
#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "tauwright/control/internal_model_controller.hpp"
#include "tauwright/control/pid_settings.hpp"
#include "tauwright/synthesize/desired_response.hpp"

namespace tauwright {
inline namespace v0 {

enum class ObstacleCode : std::int32_t {
    infinite_controller = 1,
    no_integral_action = 2,
    prediction_needed = 3,
    faster_than_dead_time = 4,
    improper = 5,
    right_half_plane_zero_cancelled = 6,
    unstable_pole_cancelled = 7,
    slow_pole_cancelled = 8,
    negative_time = 9,
};

enum class Severity : std::int32_t {
    caution = 0,       ///< can be built; think twice
    needs_filter = 1,  ///< can be built with a filter or a response of higher order
    impossible = 2,    ///< cannot be built, or not made stable inside
};

constexpr const char* name_of(ObstacleCode code) noexcept {
    switch (code) {
        case ObstacleCode::infinite_controller: return "infinite_controller";
        case ObstacleCode::no_integral_action: return "no_integral_action";
        case ObstacleCode::prediction_needed: return "prediction_needed";
        case ObstacleCode::faster_than_dead_time: return "faster_than_dead_time";
        case ObstacleCode::improper: return "improper";
        case ObstacleCode::right_half_plane_zero_cancelled: return "right_half_plane_zero_cancelled";
        case ObstacleCode::unstable_pole_cancelled: return "unstable_pole_cancelled";
        case ObstacleCode::slow_pole_cancelled: return "slow_pole_cancelled";
        case ObstacleCode::negative_time: return "negative_time";
    }
    return "unknown";
}

constexpr const char* name_of(Severity severity) noexcept {
    switch (severity) {
        case Severity::caution: return "caution";
        case Severity::needs_filter: return "needs_filter";
        case Severity::impossible: return "impossible";
    }
    return "unknown";
}

/// One thing that stands in the way of the controller asked for, or that it brings with it.
struct Obstacle {
    ObstacleCode code = ObstacleCode::improper;
    Severity severity = Severity::caution;
    std::string message = {};  ///< what and why
    double value = 0.0;        ///< the number that shows it
    std::string repair = {};   ///< what to ask for instead
};

/// The answer. A value in every case: what cannot be built is said in `obstacles`.
struct Synthesis {
    TransferFunction process;
    TransferFunction attained;  ///< T: what the exact controller gives, the default response or the one asked for
    std::optional<InternalModelController> controller = {};  ///< (1/G) T/(1 - T), exact; empty where impossible
    std::vector<Obstacle> obstacles = {};
    bool buildable = false;        ///< no obstacle is impossible
    /// P, I, PI or PID from the exact controller by taking its dead time to first order; the first
    /// three terms around s = 0 where that is no PID. Empty where impossible or not expressible.
    std::optional<PidSettings> settings = {};
    bool pid_expressible = false;  ///< the settings are that controller without loss, but for the dead time

    /// Closed loop with the settings instead of the exact controller, at a complex s. Throws
    /// `missing_argument` where there are no settings.
    std::complex<double> attained_with_settings(std::complex<double> s) const;
};

/// Solves the loop for the controller. A default response takes any stable process with at most one
/// integrator (`unsupported_form` otherwise); a response taken literally takes any process.
/// Throws `conflicting_arguments`, `missing_argument`, `out_of_domain`, `not_finite`. Allocates.
/// Sources: direct synthesis; internal model control (Rivera, Morari and Skogestad, Ind. Eng. Chem.
/// Process Des. Dev. 25, 1986); interpolation for internal stability (Morari and Zafiriou, 1989).
Synthesis synthesize(const TransferFunction& process, const DesiredResponse& desired);

}  // namespace v0
}  // namespace tauwright
