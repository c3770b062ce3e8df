// A sampled process about its operating point, by the fastest exact recursion that holds it.
#pragma once

#include <optional>
#include <utility>
#include <vector>

#include "discretize/held_runner.hpp"
#include "tauwright/discretize/process.hpp"
#include "tauwright/run/process_block.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// True for the forms that `run::ProcessBlock` takes.
inline bool fits_process_block(const TransferFunction& process) noexcept {
    const Factors& f = process.factors();
    const bool plain = f.leads.empty() && f.lead_pairs.empty() && f.zeros_at_origin == 0;
    return plain && process.order() <= 2 && f.integrators <= 1 && (f.lag_pairs.empty() || process.order() == 2);
}

class DrivenProcess {
public:
    /// At rest. Throws what `discretize` or `held` throw. Allocates.
    DrivenProcess(const TransferFunction& process, double scan_time, double rest_input, double rest_value)
        : rest_input_(rest_input), rest_value_(rest_value) {
        if (!fits_process_block(process)) {
            runner_.emplace(held(process, scan_time));
            return;
        }
        block_ = run::ProcessBlock(discretize(process, scan_time), rest_input, rest_value);
        line_.resize(run::delay_line_length(block_.coefficients()));
        block_.start(line_.data(), line_.size());
    }

    /// Holds `input` for one scan and returns the process value at its end. Does not allocate.
    double step(double input) noexcept {
        if (runner_) return rest_value_ + runner_->step(input - rest_input_);
        return block_.step(input, line_.data());
    }

private:
    double rest_input_, rest_value_;
    run::ProcessBlock block_;
    std::vector<double> line_;
    std::optional<HeldRunner> runner_;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
