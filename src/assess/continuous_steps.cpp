// The method of steps. Pieces begin at every event plus every multiple of the dead time, so that each dead time has the same
// pieces and the input of one is the output of the same piece a dead time earlier. A piece is halved where the
// series of a state does not end, and two halves of the input become one again where one series holds both.
#include <algorithm>
#include <cmath>
#include <cstdint>
#include <memory>

#include "assess/continuous_run.hpp"
#include "assess/series_step.hpp"
#include "math/lanes.hpp"
#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr std::size_t m = series_terms;
constexpr double resolved = 4e-15;  // of a signal's size so far, left in the last two terms of a series
constexpr double deepest_level = 44.0;
constexpr std::size_t most_leaves = 20'000'000, most_leaves_at_once = 1'000'000;

constexpr std::size_t lanes = 2 * Lanes::count;

// Clenshaw's recurrence at a few points at a time; terms that no longer count are left out.
void put_values(const double* terms, const double* twice_x, double* values) noexcept {
    double size = 0.0;
    for (std::size_t k = 0; k < m; ++k) size = std::max(size, std::abs(terms[k]));
    std::size_t count = m;
    while (count > 1 && std::abs(terms[count - 1]) <= 1e-18 * size) --count;
    const Lanes x = Lanes::load(twice_x), y = Lanes::load(twice_x + Lanes::count), half(0.5);
    Lanes b1(0.0), b2(0.0), c1(0.0), c2(0.0);
    for (std::size_t k = count; k-- > 1;) {
        const Lanes term(terms[k]), b = (term - b2) + x * b1, c = (term - c2) + y * c1;
        b2 = b1, c2 = c1;
        b1 = b, c1 = c;
    }
    const Lanes first(terms[0]);
    ((first - b2) + half * x * b1).store(values);
    ((first - c2) + half * y * c1).store(values + Lanes::count);
}

// The output over one part of a piece; its length is the piece's over 2^level.
struct Leaf {
    int level = 0;
    Series output{};
};

struct Piece {
    double start = 0.0, length = 0.0;  // within a dead time
    int finest = 0;
    std::vector<std::unique_ptr<SeriesStep>> steps = {};  // one a level, made when needed
    std::vector<Leaf> before = {Leaf{}}, now = {};        // the dead time before this one, and this one
};

class StepsRun {
public:
    StepsRun(const LoopStates& loop, ContinuousRun& run) : loop_(loop), run_(run), state_scale_(loop.size(), 0.0) {
        in_.resize(m + loop.size() + 2, 0.0);
        out_.resize(2 * m + 3 * loop.size(), 0.0);
        state_.resize(loop.size(), 0.0);
        put_pieces();
    }

    void operator()() {
        for (double count = 0.0; !run_.complete(); count += 1.0)
            for (Piece& piece : pieces_) {
                go_through(piece, count * loop_.dead_time + piece.start);
                if (run_.complete()) return;
            }
    }

private:
    void put_pieces();
    void go_through(Piece& piece, double start);
    bool try_leaf(Piece& piece, int level, const Series& delayed, double start);
    void write_points(double start, double length);
    void look_for_limits(double start, double length);
    bool join(const Leaf& left, const Leaf& right, Series& whole);

    const LoopStates& loop_;
    ContinuousRun& run_;
    std::vector<Piece> pieces_;
    std::vector<double> in_, out_, state_, state_scale_;
    double output_scale_ = 0.0;
    std::size_t leaves_ = 0;
    std::unique_ptr<JoinedHalves> joined_halves_;
};

void StepsRun::put_pieces() {
    const double theta = loop_.dead_time;
    std::vector<double> starts = {0.0};
    for (const Drive* drive : {&run_.setpoint, &run_.load})
        for (double event : {drive->start, drive->start + drive->duration}) {
            if (drive->size == 0.0 || event >= run_.horizon) continue;
            const double phase = std::fmod(event, theta), near = time_rounding(event + theta);
            if (phase > near && phase < theta - near) starts.push_back(phase);
        }
    std::sort(starts.begin(), starts.end());
    for (double start : starts) {
        if (!pieces_.empty() && start - pieces_.back().start <= time_rounding(run_.horizon + theta)) continue;
        pieces_.emplace_back().start = start;
    }
    for (std::size_t i = 0; i < pieces_.size(); ++i) {
        Piece& piece = pieces_[i];
        piece.length = (i + 1 < pieces_.size() ? pieces_[i + 1].start : theta) - piece.start;
        // Half a time constant is certainly short enough for an exponential; three halvings more for what the
        // loop makes of it.
        const double constants = std::max(1.0, 2.0 * piece.length * loop_.fastest);
        piece.finest = static_cast<int>(std::min(std::ceil(std::log2(constants)) + 3.0, deepest_level));
        piece.steps.resize(static_cast<std::size_t>(piece.finest) + 1);
    }
}

bool StepsRun::join(const Leaf& left, const Leaf& right, Series& whole) {
    if (!joined_halves_) joined_halves_ = std::make_unique<JoinedHalves>();
    whole = (*joined_halves_)(left.output, right.output);
    const Series a = left_half(whole), b = right_half(whole);
    double worst = 0.0;
    for (std::size_t k = 0; k < m; ++k)
        worst = std::max({worst, std::abs(a[k] - left.output[k]), std::abs(b[k] - right.output[k])});
    return worst <= resolved * output_scale_;
}

// Solves one leaf from `state_` on; true where its series end.
bool StepsRun::try_leaf(Piece& piece, int level, const Series& delayed, double start) {
    auto& step = piece.steps[static_cast<std::size_t>(level)];
    const double length = std::ldexp(piece.length, -level);
    if (!step) step = std::make_unique<SeriesStep>(loop_, length);
    const std::size_t n = loop_.size();
    const double middle = start + 0.5 * length;
    const Drive::Line load = run_.load.at(middle - loop_.dead_time), setpoint = run_.setpoint.at(middle);
    std::copy(delayed.begin(), delayed.end(), in_.begin());
    in_[0] += load.value;
    in_[1] += 0.5 * length * load.slope;
    std::copy(state_.begin(), state_.end(), in_.begin() + m);
    in_[m + n] = setpoint.value;
    in_[m + n + 1] = 0.5 * length * setpoint.slope;
    step->apply(in_.data(), out_.data());
    if (level == piece.finest) return true;
    const double* end = out_.data() + 2 * m;
    const double* tails = end + n;
    for (std::size_t i = 0; i < n; ++i) {
        const double scale = std::max({state_scale_[i], std::abs(state_[i]), std::abs(end[i])});
        if (!(std::abs(tails[2 * i]) + std::abs(tails[2 * i + 1]) <= resolved * scale)) return false;
    }
    return true;
}

void StepsRun::go_through(Piece& piece, double piece_start) {
    const std::uint64_t full = std::uint64_t{1} << piece.finest;
    const auto span_of = [&](int level) { return full >> level; };
    piece.now.clear();
    std::uint64_t at = 0, old_at = 0;
    std::size_t old = 0;
    int level = piece.before[0].level;
    while (at < full) {
        const Leaf& source = piece.before[old];
        // One level coarser than the leaf before at most, where the place allows it and the input can be joined.
        if (at > 0 && level > 0 && at % span_of(level - 1) == 0) --level;
        Series whole{};
        if (level < source.level) {
            const bool twins = old_at == at && at % span_of(source.level - 1) == 0 && old + 1 < piece.before.size() &&
                               piece.before[old + 1].level == source.level;
            level = twins && join(source, piece.before[old + 1], whole) ? source.level - 1 : source.level;
        }
        const double start = piece_start + std::ldexp(piece.length, -piece.finest) * static_cast<double>(at);
        for (;; ++level) {
            Series delayed = level < source.level ? whole : source.output;
            for (int l = source.level + 1; l <= level; ++l)
                delayed = (at & span_of(l)) != 0 ? right_half(delayed) : left_half(delayed);
            if (try_leaf(piece, level, delayed, start)) break;
        }
        const double length = std::ldexp(piece.length, -level);
        Leaf& leaf = piece.now.emplace_back();
        leaf.level = level;
        std::copy_n(out_.begin(), m, leaf.output.begin());
        double size = 0.0;
        for (double term : leaf.output) size += std::abs(term);
        output_scale_ = std::max(output_scale_, size);
        for (std::size_t i = 0; i < state_.size(); ++i) {
            state_[i] = out_[2 * m + i];
            state_scale_[i] = std::max(state_scale_[i], std::abs(state_[i]));
            size += std::abs(state_[i]);
        }
        if (!is_finite(size))
            refuse(error_code::out_of_domain, "horizon", run_.horizon,
                   joined({"the response grows beyond all numbers at ", text_of(start), " s; give a shorter horizon"}));
        if (++leaves_ > most_leaves || piece.now.size() > most_leaves_at_once)
            refuse(error_code::out_of_domain, "horizon", run_.horizon,
                   "the process has parts too fast for this horizon; give a shorter one, or leave out lags that do not matter");
        write_points(start, length);
        if (run_.complete()) return;
        at += span_of(level);
        while (old < piece.before.size() && old_at + span_of(piece.before[old].level) <= at)
            old_at += span_of(piece.before[old++].level);
    }
    std::swap(piece.before, piece.now);
}

void StepsRun::write_points(double start, double length) {
    const double end = start + length, last = end - time_rounding(end), scale = 4.0 / length;
    if (!run_.limited) look_for_limits(start, length);
    for (;;) {
        double twice_x[lanes] = {}, u[lanes], y[lanes];
        std::size_t count = 0;
        const std::size_t left = std::min(lanes, run_.points - run_.done);
        for (; count < left && run_.time[run_.done + count] < last; ++count)
            twice_x[count] = std::clamp((run_.time[run_.done + count] - start) * scale - 2.0, -2.0, 2.0);
        if (count == 0) return;
        put_values(out_.data(), twice_x, u);
        put_values(out_.data() + m, twice_x, y);
        std::copy_n(u, count, run_.output.data() + run_.done);
        std::copy_n(y, count, run_.value.data() + run_.done);
        run_.done += count;
        if (count < lanes) return;
    }
}

void StepsRun::look_for_limits(double start, double length) {
    const double* u = out_.data();
    double swing = 0.0;
    for (std::size_t k = 1; k < m; ++k) swing += std::abs(u[k]);
    if (u[0] - swing >= -run_.room_below && u[0] + swing <= run_.room_above) return;
    const double right = std::clamp(2.0 * ((run_.horizon - start) / length) - 1.0, -1.0, 1.0);
    constexpr std::size_t looks = 4 * m;
    for (std::size_t i = 0; i <= looks; ++i) {
        const double x = -1.0 + (right + 1.0) * static_cast<double>(i) / static_cast<double>(looks);
        double b1 = 0.0, b2 = 0.0;
        for (std::size_t k = m; k-- > 1;) {
            const double b = u[k] + 2.0 * x * b1 - b2;
            b2 = b1;
            b1 = b;
        }
        run_.look_at(u[0] + x * b1 - b2);
    }
}

}  // namespace

void run_by_steps(const LoopStates& loop, ContinuousRun& run) { StepsRun(loop, run)(); }

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
