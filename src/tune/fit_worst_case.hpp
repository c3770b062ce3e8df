// The worst case over what the record leaves open, as the sheet shows and judges it.
#pragma once

#include <string>
#include <vector>

#include "tauwright/tune/tuning_sheet.hpp"
#include "tune/controller_cells.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Over the fit's joint 95 % confidence region, half a scan standing in for the sampling; empty where the
/// record cannot tell one (parameters fixed, or a region that reaches a gain or lag of 0).
std::optional<WorstCase> worst_over_fit(const TuningSheet& sheet, const PidSettings& settings);

/// Why the worst case is weak; empty where it is not, or where there is none.
std::string weakness_of(const std::optional<WorstCase>& worst);

std::vector<Cell> worst_case_cells(const std::optional<WorstCase>& worst);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
