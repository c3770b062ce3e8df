// What the fitters work on: the good samples and the moves of the held output.
#pragma once

#include <cstddef>
#include <vector>

#include "tauwright/identify/record.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// One change of the held output.
struct Edge {
    double time = 0.0;       ///< seconds after the record's first sample
    double level = 0.0;      ///< output after it, less the first output
    double size = 0.0;       ///< output after it less output before it
    std::size_t sample = 0;  ///< record sample that carries it
};

/// Good samples: times in seconds after the record's first sample, process values less their mean.
struct FitData {
    std::vector<double> t, y;
    std::vector<Edge> edges;
    double mean = 0.0;         ///< what was taken off the process values
    double span = 0.0;         ///< s, first to last sample of the record
    double sampling = 0.0;     ///< s, mean distance of good samples
};

FitData fit_data(const Record& record);

/// At most `most` points: means over neighbors between which the output does not change.
FitData thinned(const FitData& data, std::size_t most);

/// Longest dead time worth trying: the longest hold, or a quarter of the tested time for quick moves.
/// Beyond it the answer to one move would be read as the answer to another.
double longest_dead_time(const FitData& data);

/// The pieces between edges once these are delayed: samples [first, last) belong to piece p, which
/// began at time `start`; piece 0 is the rest before the first move.
struct Piece {
    std::size_t first = 0, last = 0;
    double start = 0.0;
};
std::vector<Piece> pieces(const FitData& data, double dead_time);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
