// The cautions a sheet shows.
#pragma once

#include <string>
#include <vector>

#include "tauwright/tune/tuning_sheet.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// The standing cautions and those that this sheet's numbers call for.
std::vector<std::string> cautions_for(const TuningSheet& sheet);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
