// The response that a closed-loop time constant asks of a process.
#pragma once

#include "tauwright/synthesize/desired_response.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

TransferFunction default_response(const TransferFunction& process, const DesiredResponse& desired);

/// a / b without dead time, equal factors struck out on both sides wherever they lie. For algebra on
/// responses that keep a process's zeros on purpose; a loop must not be judged by what is left.
TransferFunction struck_out(const TransferFunction& a, const TransferFunction& b);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
