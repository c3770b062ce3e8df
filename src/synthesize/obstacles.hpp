// What stands between a process and a response asked of it.
#pragma once

#include <vector>

#include "tauwright/synthesize/synthesize.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

std::vector<Obstacle> find_obstacles(const TransferFunction& process, const TransferFunction& response);

/// True where the response is 1 at every frequency.
bool is_perfect(const TransferFunction& response);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
