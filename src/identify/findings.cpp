#include "identify/findings.hpp"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

std::string rounded(double x, int digits = 3) { return text_of(x, digits); }

void find_bad_samples(const Record& record, std::vector<Finding>& findings) {
    const std::size_t bad = record.size() - record.good_count();
    if (bad == 0) return;
    std::size_t first = record.size(), last = 0;
    for (std::size_t i = 0; i < record.size(); ++i)
        if (!record.good(i)) first = std::min(first, i), last = i;
    const double share = static_cast<double>(bad) / static_cast<double>(record.size());
    const Advice advice = share > 0.5 ? Advice::test_again : share > 0.2 ? Advice::tune_with_care : Advice::tune;
    findings.push_back({FindingCode::bad_samples_left_out, advice,
                        std::to_string(bad) + " of " + std::to_string(record.size()) +
                            " samples are bad and were left out; the output was held through them" +
                            (advice == Advice::test_again ? ": too little is left, test again with a healthy measurement" : ""),
                        share, first, last});
}

void find_output_at_limit(const Record& record, const FitData& data, std::vector<Finding>& findings) {
    if (!record.output_range()) return;
    const Range& range = *record.output_range();
    std::size_t count = 0, first = 0, last = 0;
    for (const Edge& edge : data.edges) {
        const double u = record.output()[edge.sample];
        if (u > range.low && u < range.high) continue;
        if (count++ == 0) first = edge.sample;
        last = edge.sample;
    }
    if (count > 0)
        findings.push_back({FindingCode::output_clipped, Advice::tune_with_care,
                            std::to_string(count) + " output moves end on a limit of the output; the final element may have "
                                                    "moved less than recorded: repeat the test inside the limits",
                            static_cast<double>(count), first, last});
}

// Share of the moves' variance that the law explains, apart from the few samples (a set-point change,
// a limit) that it does not.
double explained_share(const Eigen::MatrixXd& A, const Eigen::VectorXd& moves) {
    const Eigen::VectorXd first = moves - A * A.colPivHouseholderQr().solve(moves);
    std::vector<double> sizes(first.data(), first.data() + first.size());
    for (double& r : sizes) r = std::abs(r);
    std::vector<double> ordered = sizes;
    const auto most = ordered.begin() + static_cast<std::ptrdiff_t>(ordered.size() * 19 / 20);
    std::nth_element(ordered.begin(), most, ordered.end());
    std::vector<Eigen::Index> kept;
    for (Eigen::Index i = 0; i < moves.size(); ++i)
        if (sizes[static_cast<std::size_t>(i)] <= *most) kept.push_back(i);
    const Eigen::MatrixXd B = A(kept, Eigen::all);
    const Eigen::VectorXd m = moves(kept);
    const double total = (m.array() - m.mean()).matrix().squaredNorm();
    if (!(total > 0.0)) return 0.0;
    return 1.0 - (m - B * B.colPivHouseholderQr().solve(m)).squaredNorm() / total;
}

// Output moves that follow from the process value just as a controller would make them.
void find_controller(const Record& record, const FitData& data, std::vector<Finding>& findings) {
    const auto automatic = record.automatic();
    const auto in_automatic = static_cast<std::size_t>(std::count(automatic.begin(), automatic.end(), std::uint8_t{1}));
    const char* remedy = "; feedback biases the fit: test again in manual";
    if (in_automatic * 10 > record.size()) {
        findings.push_back({FindingCode::output_moved_by_controller, Advice::test_again,
                            std::to_string(in_automatic) + " of " + std::to_string(record.size()) +
                                " samples were taken with the loop in automatic" + remedy,
                            static_cast<double>(in_automatic) / static_cast<double>(record.size()), 0, record.size() - 1});
        return;
    }
    if (data.edges.size() < 20 || data.edges.size() * 10 < record.size()) return;
    const auto y = record.process_value(), u = record.output(), sp = record.setpoint();
    std::vector<std::size_t> used;
    for (std::size_t i = 1; i < record.size(); ++i)
        if (record.good(i) && record.good(i - 1)) used.push_back(i);
    if (used.size() < 20) return;
    const auto n = static_cast<Eigen::Index>(used.size());
    const Eigen::Index columns = sp.empty() ? 3 : 4;
    Eigen::MatrixXd A(n, columns);
    Eigen::VectorXd moves(n);
    for (Eigen::Index k = 0; k < n; ++k) {
        const std::size_t i = used[static_cast<std::size_t>(k)];
        moves(k) = u[i] - u[i - 1];
        A(k, 0) = 1.0;
        A(k, 1) = y[i] - y[i - 1];
        A(k, 2) = sp.empty() ? y[i] : sp[i] - y[i];
        if (!sp.empty()) A(k, 3) = sp[i] - sp[i - 1];
    }
    const double explained = explained_share(A, moves);
    if (explained > 0.5)
        findings.push_back({FindingCode::output_moved_by_controller, Advice::test_again,
                            rounded(100.0 * explained) +
                                " % of the output's movement follows from the process value at the same moment, as a controller "
                                "moves it" + remedy,
                            explained, data.edges.front().sample, data.edges.back().sample});
}

// Largest excursion of the model's response to the moves, from its values where pieces end.
double response_size(const FitData& data, Form form, const ParameterArray& p) {
    const auto list = pieces(data, p[at_dead_time]);
    std::vector<double> ends;
    for (std::size_t k = 1; k <= list.size(); ++k)
        ends.push_back(k < list.size() ? std::min(list[k].start, data.span) : data.span);
    ParameterArray bare = p;
    bare[at_offset] = bare[at_drift] = bare[at_curvature] = 0.0;
    double low = 0.0, high = 0.0;
    for (double y : response_at(ends, data.edges, form, bare, 0.0)) low = std::min(low, y), high = std::max(high, y);
    return high - low;
}

void find_weak_response(const FitData& data, const FitResult& result, FittedModel& fit) {
    const double size = response_size(data, fit.form, result.parameters);
    const auto error = fit.standard_error(fit.form == Form::integrating_plus_dead_time ? "slope" : "gain");
    const double certainty = error ? std::abs(fit.gain) / *error : 1e9;
    fit.response_to_noise = fit.noise > 0.0 ? size / fit.noise : std::numeric_limits<double>::infinity();
    const bool vague = fit.standard_error("dead_time").value_or(0.0) > 0.25 * data.span;
    if (size >= 3.0 * fit.noise && certainty >= 5.0 && is_finite(certainty) && !vague) return;
    if (!is_finite(certainty) || certainty == 0.0 || vague) {
        fit.findings.push_back({FindingCode::below_noise, Advice::test_again,
                                "the record cannot tell gain, lag and dead time apart; test again with faster sampling and at least one "
                                "move held until the response has settled",
                                fit.response_to_noise, data.edges.front().sample, data.edges.back().sample});
        return;
    }
    fit.findings.push_back({FindingCode::below_noise, Advice::test_again,
                            "the response is " + rounded(fit.noise > 0.0 ? size / fit.noise : 0.0) +
                                " times the noise (its standard deviation); test again with moves at least " +
                                rounded(std::max(2.0, 15.0 * fit.noise / std::max(size, 1e-300)), 2) + " times as large",
                            fit.noise > 0.0 ? size / fit.noise : 0.0, data.edges.front().sample, data.edges.back().sample});
}

// Residuals that wander in company with the moves: the form, a load, a drift or the valve does not suit.
void find_misfit(const Record& record, const FitData& data, const FitResult& result, double wandering, FittedModel& fit) {
    const double size = response_size(data, fit.form, result.parameters);
    const double share = size > 0.0 ? wandering / size : 0.0;
    // Where the wandering is no larger than the noise from sample to sample, it is noise.
    if (!(share > 0.015) || wandering < 1.5 * std::sqrt(std::max(fit.noise * fit.noise - wandering * wandering, 0.0))) return;
    fit.findings.push_back({FindingCode::model_does_not_fit, share > 0.03 ? Advice::test_again : Advice::tune_with_care,
                            "the residuals wander by " + rounded(100.0 * share, 2) +
                                " % of the response: the model does not follow the record. Look at the picture for a load or a drift "
                                "during the test, for dead band, or for a process that oscillates or first goes the wrong way; fit "
                                "with a drift, or test again",
                            share, 0, record.size() - 1});
}

void find_early_end(const Record& record, const FitData& data, FittedModel& fit) {
    double longest = 0.0;
    for (std::size_t k = 0; k < data.edges.size(); ++k) {
        const double until = k + 1 < data.edges.size() ? data.edges[k + 1].time : data.span;
        longest = std::max(longest, until - data.edges[k].time);
    }
    const bool integrating = fit.form == Form::integrating_plus_dead_time;
    const double needed = integrating ? 2.0 * fit.dead_time : fit.dead_time + 3.0 * fit.lags[0];
    if (longest >= needed) return;
    const double spread = fit.standard_error(integrating ? "slope" : "gain").value_or(0.0) / std::abs(fit.gain);
    if (data.edges.size() > 8 && spread < 0.05) return;  // many short moves can say as much as a long one
    fit.findings.push_back({FindingCode::ends_early, spread < 0.1 ? Advice::tune_with_care : Advice::test_again,
                            "no move was held for longer than " + rounded(longest) + " s, the response needs " +
                                rounded(needed) + " s; hold at least one move that long",
                            longest / needed, data.edges.back().sample, record.size() - 1});
}

// A trend of the residuals before the first move shows.
void find_unsteady_start(const FitData& data, const FitResult& result, const FitOptions& options, FittedModel& fit) {
    const double begin = data.edges.front().time;
    std::vector<double> t;
    for (double time : data.t) {
        if (time >= begin) break;
        t.push_back(time);
    }
    if (t.size() < 8) return;
    const auto model = response_at(t, data.edges, fit.form, result.parameters, options.time_center);
    double mean_t = 0.0, mean_r = 0.0;
    for (std::size_t i = 0; i < t.size(); ++i) mean_t += t[i], mean_r += data.y[i] - model[i];
    const auto n = static_cast<double>(t.size());
    mean_t /= n;
    mean_r /= n;
    double tt = 0.0, tr = 0.0, rr = 0.0;
    for (std::size_t i = 0; i < t.size(); ++i) {
        const double a = t[i] - mean_t, r = data.y[i] - model[i] - mean_r;
        tt += a * a;
        tr += a * r;
        rr += r * r;
    }
    const double slope = tr / tt, error = std::sqrt(std::max(rr - slope * tr, 0.0) / (n - 2.0) / tt);
    const double change = std::abs(slope) * (t.back() - t.front()), size = response_size(data, fit.form, result.parameters);
    if (change <= 0.1 * size || std::abs(slope) <= 4.0 * error) return;
    fit.findings.push_back({FindingCode::not_steady_at_start, Advice::test_again,
                            "before the first move the process value drifts by " + rounded(change / size * 100.0, 2) +
                                " % of the response; test again from a steady state, or fit with a drift",
                            change / size, 0, data.edges.front().sample});
}

void find_unequal_gains(const FitData& data, const FitResult& result, const FitOptions& options, FittedModel& fit) {
    constexpr std::size_t most_moves = 12;
    const bool one_by_one = data.edges.size() <= most_moves;
    std::vector<std::size_t> group_of;
    for (std::size_t k = 0; k < data.edges.size(); ++k)
        group_of.push_back(one_by_one ? k : (data.edges[k].size > 0.0 ? 0u : 1u));
    const std::size_t groups = one_by_one ? data.edges.size() : 2;
    const GroupGains found = group_gains(data, fit.form, result, options, group_of, groups, fit.noise);
    if (one_by_one)
        for (std::size_t k = 0; k < groups; ++k)
            fit.moves.push_back({data.edges[k].sample, data.edges[k].size, found.gains[k], found.standard_errors[k]});
    double worst = 1.0;
    bool opposite = false;
    std::size_t first = 0, second = 0;
    for (std::size_t a = 0; a < groups; ++a)
        for (std::size_t b = a + 1; b < groups; ++b) {
            const double ga = found.gains[a], gb = found.gains[b];
            const double ea = found.standard_errors[a], eb = found.standard_errors[b];
            if (!(ea > 0.0) || !(eb > 0.0) || std::abs(ga - gb) < 4.0 * std::hypot(ea, eb)) continue;
            const bool differ = (ga > 0.0) != (gb > 0.0) && std::abs(ga) > 4.0 * ea && std::abs(gb) > 4.0 * eb;
            const double small = std::min(std::abs(ga), std::abs(gb)), large = std::max(std::abs(ga), std::abs(gb));
            const double ratio = differ ? -large / small : large / std::max(small, 1e-6 * large);
            if ((differ && !opposite) || (differ == opposite && std::abs(ratio) > std::abs(worst)))
                worst = ratio, opposite = differ, first = a, second = b;
        }
    if (!opposite && worst <= 1.25) return;
    const auto sample_of = [&](std::size_t g) {
        const auto it = std::find(group_of.begin(), group_of.end(), g);
        return data.edges[static_cast<std::size_t>(it - group_of.begin())].sample;
    };
    const std::string where = one_by_one ? "moves " + std::to_string(first + 1) + " and " + std::to_string(second + 1)
                                         : std::string("moves up and moves down");
    fit.findings.push_back(
        {FindingCode::gain_differs, opposite ? Advice::test_again : Advice::tune_with_care,
         opposite ? where + " show gains of opposite sign, " + rounded(found.gains[first]) + " and " +
                        rounded(found.gains[second]) + "; no controller suits both: look for a load during the test and test again"
                  : where + " show gains of " + rounded(found.gains[first]) + " and " + rounded(found.gains[second]) +
                        "; look for dead band, for a load during the test, or for a gain that depends on the level",
         worst, std::min(sample_of(first), sample_of(second)), std::max(sample_of(first), sample_of(second))});
}

}  // namespace

std::optional<Record> without_clipped(const Record& record, std::vector<Finding>& findings) {
    if (!record.process_value_range()) return std::nullopt;
    const Range& range = *record.process_value_range();
    const auto y = record.process_value();
    std::vector<std::uint8_t> good(record.size());
    std::size_t count = 0, first = 0, last = 0;
    for (std::size_t i = 0; i < record.size(); ++i) {
        good[i] = record.good(i) ? 1 : 0;
        if (!good[i] || (y[i] > range.low && y[i] < range.high)) continue;
        good[i] = 0;
        if (count++ == 0) first = i;
        last = i;
    }
    if (count == 0) return std::nullopt;
    const double share = static_cast<double>(count) / static_cast<double>(record.size());
    findings.push_back({FindingCode::output_clipped, share > 0.2 ? Advice::test_again : Advice::tune_with_care,
                        std::to_string(count) + " process values stand on the end of their range and were left out; "
                                                "repeat the test inside the range",
                        share, first, last});
    return record.with_good(std::move(good));
}

void look_at_record(const Record& record, const FitData& data, std::vector<Finding>& findings) {
    find_bad_samples(record, findings);
    find_output_at_limit(record, data, findings);
    find_controller(record, data, findings);
}

void look_at_fit(const Record& record, const FitData& data, const FitResult& result, const FitOptions& options,
                 const ResidualShape& shape, FittedModel& fit) {
    find_weak_response(data, result, fit);
    find_misfit(record, data, result, shape.wandering, fit);
    find_early_end(record, data, fit);
    find_unsteady_start(data, result, options, fit);
    find_unequal_gains(data, result, options, fit);
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
