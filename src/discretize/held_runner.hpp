// Runs a held process sample by sample: +, - and * alone, so that every machine gives the same bits.
#pragma once

#include <cstddef>
#include <vector>

#include "tauwright/core/error.hpp"
#include "tauwright/core/finite.hpp"
#include "tauwright/discretize/held.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// A held process at rest, about its operating point (all values are changes from it). Keeps its own copy of the
/// coefficients and its own delay line. The constructor allocates and throws `unsupported_form` for a linear input.
class HeldRunner {
public:
    explicit HeldRunner(const DiscreteTransferFunction& process)
        : order_(process.order()), delay_(static_cast<std::size_t>(process.delay_scans())),
          direct_(process.direct_before()) {
        if (process.between() != Between::constant)
            throw Error(error_code::unsupported_form,
                        "process was sampled with a linear input; a run holds its input: use Between::constant");
        const auto copy = [](std::span<const double> from) { return std::vector<double>(from.begin(), from.end()); };
        growth_ = copy(process.growth());
        now_ = copy(process.now());
        before_ = copy(process.before());
        outputs_ = copy(process.outputs());
        restart();
    }

    /// Back to rest.
    void restart() {
        state_.assign(order_, 0.0);
        change_.assign(order_, 0.0);
        line_.assign(delay_ + 2, 0.0);
        newest_ = 0;
        value_ = 0.0;
    }

    /// Holds `input` for one scan and returns the process value at its end. An input that is not finite is taken as
    /// the one before. O(order^2); does not allocate.
    double step(double input) noexcept {
        const double held_input = is_finite(input) ? input : line_[newest_];
        newest_ = newest_ + 1 < line_.size() ? newest_ + 1 : 0;
        line_[newest_] = held_input;
        const double delayed = past(delay_), older = past(delay_ + 1);
        const double* row = growth_.data();
        for (std::size_t i = 0; i < order_; ++i, row += order_) {
            double change = now_[i] * delayed + before_[i] * older;
            const std::size_t width = i + 2 < order_ ? i + 2 : order_;
            for (std::size_t j = 0; j < width; ++j) change += row[j] * state_[j];
            change_[i] = change;
        }
        double value = direct_ * delayed;
        for (std::size_t i = 0; i < order_; ++i) {
            state_[i] = flushed(state_[i] + change_[i]);
            value += outputs_[i] * state_[i];
        }
        return value_ = value;
    }

    /// The value the last step returned; 0 at the start.
    double value() const noexcept { return value_; }

private:
    // The input of so many scans ago, the newest being 0.
    double past(std::size_t scans) const noexcept {
        return line_[newest_ >= scans ? newest_ - scans : newest_ + line_.size() - scans];
    }
    static double flushed(double x) noexcept { return (x < 1e-200 && x > -1e-200) ? 0.0 : x; }

    std::size_t order_, delay_;
    double direct_, value_ = 0.0;
    std::vector<double> growth_, now_, before_, outputs_, state_, change_, line_;
    std::size_t newest_ = 0;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
