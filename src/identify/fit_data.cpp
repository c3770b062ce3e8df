#include "identify/fit_data.hpp"

#include <algorithm>
#include <limits>
#include <numeric>

namespace tauwright {
inline namespace v0 {
namespace detail {

FitData fit_data(const Record& record) {
    FitData data;
    const auto time = record.time_s(), output = record.output(), value = record.process_value();
    const double origin = time[0];
    data.t.reserve(record.size());
    data.y.reserve(record.size());
    for (std::size_t i = 0; i < record.size(); ++i) {
        if (i > 0 && output[i] != output[i - 1])
            data.edges.push_back({time[i] - origin, output[i] - output[0], output[i] - output[i - 1], i});
        if (!record.good(i)) continue;
        data.t.push_back(time[i] - origin);
        data.y.push_back(value[i]);
    }
    if (!data.y.empty()) data.mean = std::accumulate(data.y.begin(), data.y.end(), 0.0) / static_cast<double>(data.y.size());
    for (double& y : data.y) y -= data.mean;
    data.span = time[record.size() - 1] - origin;
    if (data.t.size() > 1) data.sampling = (data.t.back() - data.t.front()) / static_cast<double>(data.t.size() - 1);
    return data;
}

FitData thinned(const FitData& data, std::size_t most) {
    FitData thin;
    thin.edges = data.edges;
    thin.mean = data.mean;
    thin.span = data.span;
    const std::size_t n = data.t.size();
    const std::size_t block = (n + most - 1) / most;
    thin.sampling = data.sampling * static_cast<double>(block);
    std::size_t edge = 0;
    for (std::size_t i = 0; i < n;) {
        while (edge < data.edges.size() && data.edges[edge].time <= data.t[i]) ++edge;
        const double until = edge < data.edges.size() ? data.edges[edge].time : std::numeric_limits<double>::infinity();
        double t = 0.0, y = 0.0;
        const std::size_t first = i;
        while (i < n && i - first < block && data.t[i] < until) {
            t += data.t[i];
            y += data.y[i];
            ++i;
        }
        const auto count = static_cast<double>(i - first);
        thin.t.push_back(t / count);
        thin.y.push_back(y / count);
    }
    return thin;
}

double longest_dead_time(const FitData& data) {
    const double after = data.edges.empty() ? data.span : data.span - data.edges.front().time;
    double hold = 0.25 * after;
    for (std::size_t k = 0; k < data.edges.size(); ++k)
        hold = std::max(hold, (k + 1 < data.edges.size() ? data.edges[k + 1].time : data.span) - data.edges[k].time);
    return std::max(std::min(hold, after - 2.0 * data.sampling), 0.0);
}

std::vector<Piece> pieces(const FitData& data, double dead_time) {
    std::vector<Piece> list;
    list.reserve(data.edges.size() + 1);
    std::size_t first = 0;
    double start = 0.0;
    for (const Edge& edge : data.edges) {
        const double next = edge.time + dead_time;
        const auto from = data.t.begin() + static_cast<std::ptrdiff_t>(first);
        const auto last = static_cast<std::size_t>(std::lower_bound(from, data.t.end(), next) - data.t.begin());
        list.push_back({first, last, start});
        first = last;
        start = next;
    }
    list.push_back({first, data.t.size(), start});
    return list;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
