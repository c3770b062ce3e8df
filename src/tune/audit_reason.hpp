// What a row of an audit comes to, in a word and in a line.
#pragma once

#include <string>

#include "tauwright/tune/audit.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// What the row itself does not hold.
struct AuditContext {
    double process_gain = 0.0;     ///< in percent; 0 where its sign says nothing of the action needed
    double settling_window = 0.0;  ///< the part of the trend in which a set-point step may settle, in s
    std::string withheld = {};     ///< why there is no proposal, where none could be made
};

/// Fills `outcome`, `change_worthwhile` and `reason` from the rest of the row.
void conclude(AuditRow& row, const AuditContext& context);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
