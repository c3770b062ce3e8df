// C structs to C++ values and back. Throwing on bad input, with the member's name.
#pragma once

#include <optional>
#include <string>

#include "structs.hpp"
#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/control/controller_form.hpp"
#include "tauwright/control/pid_settings.hpp"
#include "tauwright/core/range.hpp"
#include "tauwright/identify/identify.hpp"
#include "tauwright/synthesize/synthesize.hpp"
#include "tauwright/tauwright.h"

namespace tauwright::shell {

/// An optional member: the flag, the number, the member's full name for messages.
std::optional<double> optional(std::int32_t has, double value, const std::string& name);

/// Sets flag and number; an absent number is 0.
void set(const std::optional<double>& from, std::int32_t& has, double& value) noexcept;

Range range(const tauw_range* source, const char* name);
std::optional<Range> optional_range(const tauw_range* source, const char* name);
PidSettings settings(const tauw_pid_settings* source, const char* name = "settings");
ControllerForm controller_form(const tauw_controller_form* source, const char* name = "form");
Entered entered(const tauw_entered* source, const char* name = "entered");
Duty duty(const tauw_duty* source, const char* name = "duty");
IdentifyOptions identify_options(const tauw_identify_options* source, const char* name = "options");

tauw_range from(const Range& range) noexcept;
tauw_pid_settings from(const PidSettings& settings) noexcept;
tauw_entered from(const Entered& entered) noexcept;
tauw_robustness from(const Robustness& robustness) noexcept;
tauw_figures from(const Figures& figures) noexcept;
tauw_finding from(const Finding& finding) noexcept;
tauw_obstacle from(const Obstacle& obstacle) noexcept;

}  // namespace tauwright::shell
