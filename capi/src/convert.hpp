// C structs to C++ values and back. Throwing on bad input, with the member's name.
#pragma once

#include <optional>
#include <string>

#include "structs.hpp"
#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/assess/valve_cycle.hpp"
#include "tauwright/assess/worst_case.hpp"
#include "tauwright/control/controller_form.hpp"
#include "tauwright/control/pid_settings.hpp"
#include "tauwright/core/range.hpp"
#include "tauwright/discretize/transmitter_coefficients.hpp"
#include "tauwright/discretize/valve_coefficients.hpp"
#include "tauwright/identify/identify.hpp"
#include "tauwright/synthesize/synthesize.hpp"
#include "tauwright/tauwright.h"

namespace tauwright::shell {

/// An optional member: the flag, the number, the member's full name for messages.
std::optional<double> optional(std::int32_t has, double value, const std::string& name);

/// The same, forming the full name only for an error: for entries that do not allocate.
std::optional<double> optional(std::int32_t has, double value, const char* owner, const char* member);

/// Sets flag and number; an absent number is 0.
void set(const std::optional<double>& from, std::int32_t& has, double& value) noexcept;

Range range(const tauw_range* source, const char* name);
std::optional<Range> optional_range(const tauw_range* source, const char* name);
PidSettings settings(const tauw_pid_settings* source, const char* name = "settings");
ControllerForm controller_form(const tauw_controller_form* source, const char* name = "form");
Entered entered(const tauw_entered* source, const char* name = "entered");
ValveSettings valve_settings(const tauw_valve_settings* source, const char* name = "valve");
TransmitterSettings transmitter_settings(const tauw_transmitter_settings* source, const char* name = "transmitter");
Duty duty(const tauw_duty* source, const char* name = "duty");
/// NULL means the defaults.
RobustnessOptions robustness_options(const tauw_robustness_options* source, const char* name = "options");
IdentifyOptions identify_options(const tauw_identify_options* source, const char* name = "options");

tauw_range from(const Range& range) noexcept;
tauw_pid_settings from(const PidSettings& settings) noexcept;
tauw_entered from(const Entered& entered) noexcept;
tauw_robustness from(const Robustness& robustness) noexcept;
tauw_figures from(const Figures& figures) noexcept;
tauw_worst_case from(const WorstCase& found) noexcept;
tauw_valve_cycle from(const ValveCycle& found) noexcept;
tauw_finding from(const Finding& finding) noexcept;
tauw_obstacle from(const Obstacle& obstacle) noexcept;

}  // namespace tauwright::shell
