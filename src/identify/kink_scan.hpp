// Sums of squares of a first-order fit at one lag and any dead time, in a few steps each.
#pragma once

#include <optional>
#include <utility>
#include <vector>

#include "identify/process_fit.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Dead times that a scan will be asked about.
struct DeadTimeWindow {
    double low = 0.0, high = 0.0;  ///< s
};

/// For a fixed lag, sums over the samples from any one on, of powers of the decay counted from that
/// sample. They turn the normal equations at any dead time into a handful of look-ups a move.
/// Samples that no dead time of the window can part from their neighbors are summed up in one block.
class DeadTimeScan {
public:
    DeadTimeScan(const FitData& data, const FitOptions& options, double lag, DeadTimeWindow window);

    /// Best offset, drift and gain at this dead time, and the sum of squares they leave.
    std::pair<ParameterArray, double> best_linear(double dead_time) const;

private:
    struct From {  // sums over blocks k, k + 1, ... with e = exp(-(t - first time of block k)/lag)
        double e = 0, ee = 0, ye = 0, ce = 0;
    };
    struct Before {  // sums over the blocks before k
        double n = 0, y = 0, c = 0;
    };
    void add_block(std::size_t first, std::size_t last);

    const FitData& data_;
    const FitOptions& options_;
    double lag_;
    std::vector<double> time_;  // of each block's first sample
    std::vector<From> from_;
    std::vector<Before> before_;
    double yy_ = 0, cc_ = 0, yc_ = 0;
};

/// A point to descend from whose sum of squares promises to lie below the one found, among the dead
/// times within four `spread`s of it; empty where there is none.
std::optional<ParameterArray> better_dead_time(const FitData& data, const FitOptions& options,
                                               const LeastSquaresResult& found, double spread);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
