#include "assess/sweep.hpp"

#include <numbers>

#include "assess/crossing.hpp"
#include "assess/low_end.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double closed_to = 1e-7;            // enclosures of peaks close to this, relative, where no proof of convexity helps
constexpr std::size_t most_points = 400'000;  // looked at before the sweep gives up
constexpr std::size_t most_crossings = 1000;
constexpr double look_ratio = 2.5;            // from one look in advance to the next

struct Todo {
    bool gain = true, phase = true, near_L = true, near_inverse = true;
    bool any() const noexcept { return gain || phase || near_L || near_inverse; }
};

struct End {
    double w;
    std::complex<double> L;
};

class Walk {
public:
    Walk(const LoopCurve& curve, const LoopCurve* mirrored) : curve_(curve), mirrored_(mirrored), m_(curve.net_integrators()) {}

    SweepResult run() {
        result_.complete = true;
        note_limits();
        look_ahead();
        result_.head = low_end(curve_, m_ > 0 ? result_.inverse_to_minus_one.distance : result_.to_minus_one.distance);
        double low = result_.head > 0.0 ? result_.head : lowest();
        result_.tail = high_end();
        End last{low, low > 0.0 ? curve_.at(low).L : curve_.low_gain()};
        start_winding(last.L);
        std::size_t next_axis = 0;
        double factor = 3.0;
        while (!finished(last.w)) {
            const std::size_t before = points_;
            double high = std::min({last.w > 0.0 ? factor * last.w : first_step(), last.w + widest(), curve_.end(), result_.tail});
            const bool at_root = next_axis < curve_.axis_roots().size() && high > gap_low(next_axis);
            if (at_root) high = std::max(gap_low(next_axis), last.w);
            const End end{high, curve_.at(high).L};
            look(end.L, high);
            if (high > last.w) visit(last, end, {true, !curve_.constant_phase(), true, true}, 0);
            last = at_root ? pass(next_axis++, end) : end;
            factor = points_ - before <= 1 ? std::min(2.0 * factor, 32.0) : points_ - before > 4 ? std::max(0.5 * factor, 2.0) : factor;
            if (!result_.complete) break;
        }
        finish(last);
        return std::move(result_);
    }

private:
    double first_step() const noexcept {
        double step = 0.1 * curve_.smallest_root();
        if (curve_.fastest_turn() > 0.0) step = std::min(step, 0.1 / curve_.fastest_turn());
        return is_finite(step) ? step : 1.0;
    }
    // A piece wider than this only gets split: the dead time turns it too far.
    double widest() const noexcept { return curve_.lasting_turn() > 0.0 ? 1.5 / curve_.lasting_turn() : infinity; }

    // Where no proof from the limit succeeds, for the phase starts on the negative real axis and leaves it by less than
    // doubles tell: so far down that |L| is beyond 1e16 or below 1e-16.
    double lowest() const noexcept {
        if (m_ == 0) return 0.0;
        const double asymptote = std::pow(std::abs(curve_.low_gain()) / (m_ > 0 ? 1e16 : 1e-16), 1.0 / m_);
        const double w = std::min({asymptote, 1e-6 * curve_.smallest_root(), 1e-6 * widest()});
        return is_finite(w) && w > 0.0 ? w : 1e-300;
    }

    double high_end() const noexcept {
        if (mirrored_ == nullptr || mirrored_->net_integrators() >= 0) return curve_.end();
        const double v = low_end(*mirrored_, result_.to_minus_one.distance);
        return v > 0.0 ? std::max(1.0 / v, result_.head) : curve_.end();
    }

    // Limits at both ends count among the closest approaches.
    void note_limits() noexcept {
        result_.to_minus_one = {curve_.nearest_at_infinity(), infinity, false};
        result_.inverse_to_minus_one = {curve_.inverse_nearest_at_infinity(), infinity, false};
        const double K = curve_.low_gain();
        if (m_ == 0) note_at_rest(std::abs(1.0 + K), std::abs(1.0 + 1.0 / K));
        else if (m_ > 0) note_at_rest(infinity, 1.0);
        else note_at_rest(1.0, infinity);
    }
    void note_at_rest(double distance, double inverse_distance) noexcept {
        if (distance <= result_.to_minus_one.distance) result_.to_minus_one = {distance, 0.0, false};
        if (inverse_distance <= result_.inverse_to_minus_one.distance) result_.inverse_to_minus_one = {inverse_distance, 0.0, false};
    }

    // This close to 0 it is the limit there, which is known.
    void note(const Closest& found, Closest& closest) const noexcept {
        if (found.distance * found.distance < beats(closest) && !(m_ == 0 && found.frequency < 1e-9 * first_step())) closest = found;
    }
    void look(std::complex<double> L, double w) noexcept {
        const double size = norm(L), distance = norm(1.0 + L);
        if (distance < beats(result_.to_minus_one))
            result_.to_minus_one = {std::sqrt(distance), w, false};
        if (distance < beats(result_.inverse_to_minus_one) * size)
            result_.inverse_to_minus_one = {std::sqrt(distance / size), w, false};
    }
    // The square that an approach must be below; at a limit by more than rounding.
    static double beats(const Closest& closest) noexcept {
        const bool limit = closest.frequency == 0.0 || !is_finite(closest.frequency);
        return closest.distance * closest.distance * (limit ? 1.0 - 1e-14 : 1.0);
    }
    static double norm(std::complex<double> x) noexcept { return x.real() * x.real() + x.imag() * x.imag(); }

    // A few looks in advance spare much proving later on.
    void look_ahead() noexcept {
        double corner = std::min(curve_.smallest_root(), curve_.fastest_turn() > 0.0 ? 1.0 / curve_.fastest_turn() : infinity);
        if (m_ > 0) corner = std::min(corner, std::pow(std::abs(curve_.low_gain()), 1.0 / m_));
        if (!is_finite(corner)) corner = 1.0;
        corner = std::max(corner, 1e-290);
        double stop = std::max(10.0 * curve_.largest_root(), curve_.fastest_turn() > 0.0 ? 6.0 / curve_.fastest_turn() : 0.0);
        stop = std::min({std::max(stop, 100.0 * corner), 1e6 * corner, curve_.end()});
        for (double w = 0.1 * corner; w < stop; w *= look_ratio) {
            const std::complex<double> L = curve_.at(w).L;
            look(L, w);
            if (norm(L) < 0.01 && w > curve_.largest_root()) break;
        }
        polish(result_.to_minus_one, false);
        polish(result_.inverse_to_minus_one, true);
    }

    void polish(Closest& closest, bool inverse) noexcept {
        const double w = closest.frequency;
        if (!(w > 0.0) || !is_finite(w) || closest.inside) return;
        const Closest polished = nearest_between(curve_, inverse, w / look_ratio, std::min(look_ratio * w, curve_.end()), w);
        if (polished.distance <= closest.distance) closest = polished;
    }

    void start_winding(std::complex<double> first) noexcept {
        last_ = 1.0 + first;
        if (m_ <= 0) {
            result_.winding = m_ < 0 ? std::arg(last_) : 0.0;
            return;
        }
        // What 1 + L turns below the first point: down there it is K / (jw)^m and turns no more.
        std::complex<double> asymptote = curve_.low_gain();
        for (int i = 0; i < m_; ++i) asymptote = {asymptote.imag(), -asymptote.real()};
        result_.winding = std::arg(last_ / asymptote);
    }

    // A root on the path: the last and first frequency looked at around it.
    double gap_low(std::size_t i) const noexcept { return curve_.axis_roots()[i].w * (1.0 - 1e-9); }
    End pass(std::size_t i, const End& before) {
        const AxisRoot& root = curve_.axis_roots()[i];
        const double w = root.w * (1.0 + 1e-9);
        const End after{w, curve_.at(w).L};
        const bool pole = root.poles > 0;
        const double far = 1e3;
        if (pole ? std::min(norm(before.L), norm(after.L)) < far * far : std::max(norm(before.L), norm(after.L)) > 1.0 / (far * far))
            result_.complete = false;
        // Around a pole to its right: half a turn back each.
        const std::complex<double> next = 1.0 + after.L;
        const double halves = pole ? root.poles : 0;
        result_.winding += std::arg(next / last_ * (root.poles % 2 != 0 && pole ? -1.0 : 1.0)) - halves * std::numbers::pi;
        last_ = next;
        return after;
    }

    // Beyond w nothing can cross or come closer.
    bool finished(double w) const {
        if (w >= curve_.end() || w >= result_.tail) return true;
        if (!curve_.axis_roots().empty() && w < curve_.axis_roots().back().w) return false;
        const double bound = curve_.tail(w), rest = curve_.at_infinity();
        if (curve_.limit() != 0.0) return settled_at_limit(w);
        if (!(bound < 1.0)) return rest >= 1.0 && w > 1e4 * std::max(curve_.largest_root(), first_step());
        // Nothing is left where |L| cannot come back to what was found, or is as good as its limit.
        if (rest > 0.0 && (bound <= rest * (1.0 + 1e-9) || w > 3e3 * curve_.largest_root())) return true;
        const double near = 1.0 - bound, inverse_near = 1.0 / bound - 1.0, slack = 1.0 - closed_to;
        const bool near_settled = near >= result_.to_minus_one.distance * slack && inverse_near >= result_.inverse_to_minus_one.distance * slack;
        if (!near_settled && bound >= 1e-7) return false;
        // Without dead time the high end is proved free, or the phase leaves the negative real axis by less than doubles tell.
        if (!curve_.has_dead_time()) return result_.tail == curve_.end() && w >= 1e6 * curve_.largest_root();
        return bound < std::max(result_.largest_below_one, curve_.smallest_of_interest()) || curve_.phase_settled(w);
    }

    // Without dead time, and with a limit k at high frequency: log(L/k) is at most `left` from here on.
    bool settled_at_limit(double w) const noexcept {
        const double k = curve_.limit(), left = curve_.left_to_limit(w);
        if (!(left < 0.5) || std::abs(std::log(std::abs(k))) <= left) return left < 1e-9;
        const double away = std::abs(k) * (growth(left) - 1.0);
        const double near = std::abs(1.0 + k) - away, inverse_near = std::abs(1.0 + 1.0 / k) - away / (k * k) * 2.0;
        // A negative k is a phase crossing at infinity; on the way there it is passed once at most, early.
        if (k < 0.0 && w < 1e6 * curve_.largest_root()) return false;
        const double slack = 1.0 - closed_to;
        return (near >= result_.to_minus_one.distance * slack && inverse_near >= result_.inverse_to_minus_one.distance * slack) || left < 1e-9;
    }

    void visit(const End& low, const End& high, Todo todo, int depth) {
        if (++points_ > most_points) {
            result_.complete = false;
            return;
        }
        const double middle = 0.5 * (low.w + high.w);
        const Piece piece{low.w, high.w, curve_.at(middle), curve_.bounds(low.w, high.w)};
        look(piece.middle.L, middle);
        if (todo.gain) todo.gain = !settle_gain(piece);
        if (todo.phase) todo.phase = !settle_phase(piece);
        // Poles and zeros that nearly cancel leave a phase that pieces this small do not settle; where the gain is so far
        // from 1 it decides nothing.
        if (todo.phase && depth > 10 && (norm(piece.middle.L) < 1e-14 || norm(piece.middle.L) > 1e14)) todo.phase = false;
        if (todo.near_L && settle_near(open_loop_at(piece.middle, m_), piece, false)) {
            // Over this piece 1 + L turns by less than half a circle.
            const std::complex<double> next = 1.0 + high.L;
            result_.winding += turn_between(last_, next);
            last_ = next;
            todo.near_L = false;
        }
        if (todo.near_inverse) todo.near_inverse = !settle_near(inverse_at(piece.middle, m_), piece, true);
        if (!todo.any()) return;
        if (depth > 60 || middle <= low.w || middle >= high.w) {
            // The curve goes through -1: what is here has been looked at.
            if (todo.near_L) last_ = 1.0 + high.L;
            if (todo.any()) result_.complete &= result_.to_minus_one.distance < through_minus_one;
            return;
        }
        const End center{middle, piece.middle.L};
        visit(low, center, todo, depth + 1);
        visit(center, high, todo, depth + 1);
    }

    bool settle_gain(const Piece& piece) {
        const CrossingSearch found = crossings(curve_, piece, CrossingOf::gain);
        if (!found.settled) return false;
        for (int i = 0; i < found.count; ++i) result_.gain_crossings.push_back(found.crossing[i]);
        return true;
    }

    bool settle_phase(const Piece& piece) {
        const CrossingSearch found = crossings(curve_, piece, CrossingOf::phase);
        if (!found.settled) return false;
        for (int i = 0; i < found.count; ++i) take_phase_crossing(found.crossing[i]);
        return true;
    }

    void take_phase_crossing(const Crossing& c) {
        const CurvePoint p = curve_.at(c.w);
        const double gain = std::abs(curve_.value(c.w));
        if (result_.phase_crossings.size() < most_crossings) result_.phase_crossings.push_back(c);
        else result_.capped = true;
        if (gain < 1.0) result_.largest_below_one = std::max(result_.largest_below_one, gain);
        if (!(gain > 1.0)) return;
        if (result_.smallest_above_one == 0.0 || gain < result_.smallest_above_one) result_.smallest_above_one = gain;
        const int pair = c.w < curve_.end() ? 2 : 1;
        if (c.touches) result_.crossings_clear = false;
        else result_.crossed_by_gain += p.slope.imag() < 0.0 ? pair : -pair;
    }

    // Is |1 + X| nowhere on the piece noticeably below the smallest found, and does it turn by less than
    // half a circle? From discs, or from the Taylor series of q = |1 + X|^2 with a bound on its third derivative.
    bool settle_near(const Quantity& x, const Piece& piece, bool inverse) {
        Closest& closest = inverse ? result_.inverse_to_minus_one : result_.to_minus_one;
        if (!(closest.distance > through_minus_one)) return true;
        const double h = piece.half_width(), size = size_of(x.value);
        double change = piece.rest_change(x.slope.real());
        if (m_ != 0) change += piece.low > 0.0 ? std::abs(m_) * h / piece.low : infinity;
        if (change < 20.0) {
            const double grows = growth(change), enough = closest.distance * (1.0 - 1e-12);
            if (1.0 - size * grows > enough) return true;                                  // stays inside a circle around 0 ...
            if (size - grows * (1.0 + enough) > 0.0 && (inverse || turn_is_small(x, piece, size * grows, size / grows - 1.0)))
                return true;                                                               // ... or outside one
        }
        const QuantityBounds b = bounds_of(x, piece);
        const SquaredDistance s = squared_distance(x, piece.middle.w);
        const double third = third_derivative(b, std::sqrt(s.q0), h), bound = least(s, third, h);
        const double wanted = closest.distance * closest.distance;
        double nearest = bound;
        if (!(bound > wanted * (1.0 - 2e-12))) {
            if (s.q2 > third * h) {  // convex: one minimum, which can be found
                if (!(closest.inside && closest.frequency > piece.low && closest.frequency < piece.high))
                    note(nearest_between(curve_, inverse, piece.low, piece.high, piece.middle.w), closest);
                nearest = closest.distance * closest.distance;
            } else if (!(bound > wanted * (1.0 - 2.0 * closed_to))) {
                return false;
            }
        }
        return inverse || 2.0 * h * b.X1 < 3.0 * std::sqrt(nearest);
    }

    // |d arg(1 + X)| <= |X'| / |1 + X| all along the piece.
    bool turn_is_small(const Quantity& x, const Piece& piece, double largest, double nearest) const noexcept {
        const double steep = size_of(x.slope) + piece.bounds.bend * piece.half_width() + (m_ != 0 ? std::abs(m_) / piece.low : 0.0);
        return 2.0 * piece.half_width() * largest * steep < 3.0 * nearest;
    }

    void finish(const End& last) {
        // The path's own end is real: negative, it is a crossing.
        if (is_finite(curve_.end()) && last.w >= curve_.end() && last.L.real() < -1e-6) take_phase_crossing({curve_.end(), false, 0.0});
        const auto ascending = [](const Crossing& a, const Crossing& b) { return a.w < b.w; };
        std::sort(result_.gain_crossings.begin(), result_.gain_crossings.end(), ascending);
        std::sort(result_.phase_crossings.begin(), result_.phase_crossings.end(), ascending);
        polish(result_.to_minus_one, false);
        polish(result_.inverse_to_minus_one, true);
        if (is_finite(curve_.end())) {
            if (last.w < curve_.end()) result_.winding += turn_between(1.0 + last.L, 1.0 + curve_.value(curve_.end()));
            return;
        }
        if (curve_.has_dead_time() && result_.largest_below_one == 0.0 && !curve_.phase_settled(last.w)) find_late_crossing(last.w);
        // From the last point to the value at infinity, within a disc around 1 or close to the limit.
        result_.winding += std::arg((1.0 + curve_.limit()) / (1.0 + last.L));
    }

    // Too far out to prove it the first, and too small to matter but for the gain margin.
    void find_late_crossing(double from) {
        const auto angle = [&](double w) {
            const std::complex<double> L = curve_.value(w);
            return std::atan2(-L.imag(), -L.real());
        };
        double low = from, at_low = angle(low);
        for (int i = 0; i < 2000; ++i) {
            double high = 1.02 * low;
            const double at_high = angle(high);
            if (std::abs(at_low) < 1.0 && std::abs(at_high) < 1.0 && (at_low > 0.0) != (at_high > 0.0)) {
                for (int k = 0; k < 60; ++k) {
                    const double middle = 0.5 * (low + high);
                    ((angle(middle) > 0.0) == (at_low > 0.0) ? low : high) = middle;
                }
                if (is_finite(high)) take_phase_crossing({high, false, 0.0});
                return;
            }
            low = high;
            at_low = at_high;
        }
    }

    const LoopCurve& curve_;
    const LoopCurve* mirrored_;
    int m_;
    SweepResult result_;
    std::complex<double> last_ = 1.0;
    std::size_t points_ = 0;
};

}  // namespace

SweepResult sweep(const LoopCurve& curve, const LoopCurve* mirrored) { return Walk(curve, mirrored).run(); }

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
