// A controller's numbers, margins and figures as labeled texts, for columns side by side.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/control/controller_form.hpp"
#include "tauwright/control/pid_settings.hpp"
#include "tune/page.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

struct Cell {
    std::string label, text;
};

/// The range's unit, or `fallback`.
std::string unit_of(const std::optional<Range>& range, const char* fallback);

/// The fields as the controller shows them; without a form, the settings themselves.
std::vector<Cell> setting_cells(const PidSettings& settings, const std::optional<Entered>& entered,
                                const std::optional<ControllerForm>& form, const std::string& gain_unit);

std::vector<Cell> margin_cells(const Robustness& margins, const std::optional<Figures>& figures);

/// What figures hold beside those of `margin_cells`.
std::vector<Cell> further_cells(const std::optional<Figures>& figures);

/// One row a label of either list, "-" where a side has none.
void write_side_by_side(Page& page, const std::vector<Cell>& found, const std::vector<Cell>& proposed);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
