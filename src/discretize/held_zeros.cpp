#include "discretize/held_zeros.hpp"

#include <algorithm>
#include <cmath>

#include "discretize/held_solve.hpp"
#include "tauwright/core/exponential.hpp"
#include "tauwright/core/finite.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

using Complex = std::complex<double>;

constexpr double too_far = 1e18;  // a zero beyond changes nothing on the unit circle but the gain
constexpr double settled = 0x1p-50;  // the last move, far larger than what it leaves to be moved
constexpr int most_approach_passes = 60;
constexpr int most_refine_passes = 3;
constexpr int most_cluster_passes = 12;
constexpr int most_partings = 3;

bool finite(const Complex& x) noexcept { return is_finite(x.real()) && is_finite(x.imag()); }

std::vector<double> rounded_all(const std::vector<Twice>& x) {
    std::vector<double> y(x.size());
    for (std::size_t i = 0; i < x.size(); ++i) y[i] = rounded(x[i]);
    return y;
}

// The factors of w^1, w^0, w^-1, ... of F (see ZeroSearch) for large w, the first `count` of them.
std::vector<Twice> coefficients_at_infinity(const SampledCascade& s, std::size_t count) {
    const std::size_t n = s.order;
    std::vector<Twice> x(n), next(n), coefficients(count);
    const bool z = s.pole_at_zero;  // inputs as polynomials in w = z - 1
    for (std::size_t k = 0; k < count; ++k) {
        for (std::size_t i = 0; i < n; ++i) {
            Twice sum;
            for (std::size_t j = 0; j <= s.last[i]; ++j) sum = sum + s.growth[i * n + j] * x[j];
            if (k == 0 && z) sum = s.ahead[i];
            if (k == 1) sum = sum + (z ? Twice(2.0) * s.ahead[i] + s.now[i] : s.ahead[i]);
            if (k == 2) sum = sum + (z ? s.ahead[i] + s.now[i] + s.before[i] : s.ahead[i] + s.now[i]);
            next[i] = sum;
        }
        std::swap(x, next);
        Twice total = z ? (k == 0 ? s.direct_now : k == 1 ? s.direct_now + s.direct_before : Twice(0.0))
                        : (k == 1 ? s.direct_now : Twice(0.0));
        for (std::size_t i = 0; i < n; ++i) total = total + s.outputs[i] * x[i];
        coefficients[k] = total;
    }
    return coefficients;
}

/// The zeros of F(w) = outputs (w - growth)^-1 inputs(w) + direct(w), the response without its pole at z = 0, by
/// Aberth's iteration on N = F product(w - poles): never a polynomial. First in double; then F in twice the digits,
/// and its slope only where zeros crowd.
class ZeroSearch {
public:
    ZeroSearch(const SampledCascade& s, const std::vector<Complex>& poles, int at_one)
        : s_(s), poles_(poles), at_one_(at_one), growth_(rounded_all(s.growth)), now_(rounded_all(s.now)),
          before_(rounded_all(s.before)), ahead_(rounded_all(s.ahead)), outputs_(rounded_all(s.outputs)),
          plain_{s.order, growth_.data(), now_.data(), before_.data(), ahead_.data(), outputs_.data(),
                 rounded(s.direct_now), rounded(s.direct_before)},
          exact_{s.order, s.growth.data(), s.now.data(), s.before.data(), s.ahead.data(), s.outputs.data(),
                 s.direct_now, s.direct_before} {
        for (const Complex& p : poles_)
            if (p != 0.0) slowest_ = std::min(slowest_, std::abs(p));
    }

    void start(const std::vector<Complex>& starts, std::size_t count);
    void approach() { iterate(most_approach_passes, 1e-9, plain_, plain_); }
    void refine() {
        // Between zeros that nearly fall together the slope needs the digits as well.
        bool moving = iterate(most_refine_passes, settled, exact_, plain_);
        for (int i = 0; moving && i < most_partings; ++i) {
            leave_axis();
            moving = iterate(most_cluster_passes, settled, exact_, exact_);
        }
    }
    void mirror();
    double error(double leading) const;
    std::vector<Complex> zeros() const;

private:
    template <class Real>
    Complex value(const HeldColumns<Real>& c, Complex w) const noexcept;
    template <class Real>
    Complex slope(const HeldColumns<Real>& c, Complex w) const noexcept;
    template <class Real, class SlopeReal>
    bool iterate(int most_passes, double close, const HeldColumns<Real>& values, const HeldColumns<SlopeReal>& slopes);
    Complex step(std::size_t i, Complex value, Complex slope) const noexcept;
    void leave_axis();

    const SampledCascade& s_;
    const std::vector<Complex>& poles_;
    int at_one_;
    std::vector<double> growth_, now_, before_, ahead_, outputs_;
    HeldColumns<double> plain_;
    HeldColumns<Twice> exact_;
    std::vector<unsigned char> done_;
    double slowest_ = 1.0;  // size of the smallest pole other than 0: zeros far below it are as good as 0
    std::vector<Complex> w_;
};

// Around each given start, for equal ones must not stay together; the rest where the zeros that sampling brings
// with it lie for short scans, negative z spread evenly in angle (their limits are the Euler-Frobenius zeros).
void ZeroSearch::start(const std::vector<Complex>& starts, std::size_t count) {
    for (std::size_t i = 0; i < count; ++i) {
        const double angle = 2.4 * static_cast<double>(i) + 0.7;
        Complex w;
        if (i < starts.size()) {
            w = std::abs(starts[i]) < too_far ? starts[i] : Complex(too_far);  // also where it has overflowed
        } else {
            const double rest = static_cast<double>(count - starts.size());
            const double place = (static_cast<double>(i - starts.size()) + 0.5) / rest - 0.5;
            w = -1.0 - std::exp(3.14 * std::tan(2.6 * place));
        }
        w_.push_back(w + 0.05 * std::abs(w) * Complex(std::cos(angle), std::sin(angle)));
    }
}

template <class Real>
Complex ZeroSearch::value(const HeldColumns<Real>& c, Complex w) const noexcept {
    Point<Real> at{Real(w.real()), Real(w.imag())};
    for (int attempt = 0;; ++attempt) {
        const Point<Real> one{Real(1.0), Real(0.0)}, z = one + at;
        StatesAt<Real> x;
        const Point<Real> direct_now{c.direct_now, Real(0.0)}, direct_before{c.direct_before, Real(0.0)};
        Point<Real> direct = direct_now;
        if (s_.pole_at_zero) {
            combine_inputs(c, z * z, z, one, x);
            direct = direct_now * z + direct_before;
        } else {
            combine_inputs(c, z, one, Point<Real>{}, x);
        }
        solve_states(c, at, x);
        const Complex value = rounded(outputs_of(c, x) + direct);
        if (finite(value) || attempt == 3) return value;
        // At a pole to the last digit: beside it by far less than the search asks for.
        const Real beside = Real(1.0) + Real(std::is_same_v<Real, double> ? 0x1p-48 : 0x1p-80);
        at = beside * at;
    }
}

// F' = outputs (w - growth)^-1 (inputs' - x) + direct'
template <class Real>
Complex ZeroSearch::slope(const HeldColumns<Real>& c, Complex w) const noexcept {
    const Point<Real> at{Real(w.real()), Real(w.imag())}, one{Real(1.0), Real(0.0)}, none{}, z = one + at;
    StatesAt<Real> x, b;
    if (s_.pole_at_zero) {
        combine_inputs(c, z * z, z, one, x);
        combine_inputs(c, z + z, one, none, b);
    } else {
        combine_inputs(c, z, one, none, x);
        combine_inputs(c, one, none, none, b);
    }
    solve_states(c, at, x);
    for (std::size_t i = 0; i < c.order; ++i) b[i] = b[i] - x[i];
    solve_states(c, at, b);
    return rounded(outputs_of(c, b)) + (s_.pole_at_zero ? rounded(c.direct_now) : 0.0);
}

// One step of Aberth's iteration, N / (N' - N sum 1 / (w - others)), with N'/N = F'/F + sum 1 / (w - poles).
Complex ZeroSearch::step(std::size_t i, Complex value, Complex slope) const noexcept {
    const Complex w = w_[i];
    Complex sum = 0.0;
    for (const Complex& p : poles_) {
        if (w == p) return 0.0;  // only a pole that a lead cancels is approached
        sum += 1.0 / (w - p);
    }
    for (std::size_t j = 0; j < w_.size(); ++j)
        if (j != i && w_[j] != w) sum -= 1.0 / (w - w_[j]);
    if (at_one_ > 0) sum -= static_cast<double>(at_one_) / w;
    return value / (slope + value * sum);
}

// Moves all zeros until they stay within `close` of themselves; false when all do.
template <class Real, class SlopeReal>
bool ZeroSearch::iterate(int most_passes, double close, const HeldColumns<Real>& values,
                         const HeldColumns<SlopeReal>& slopes) {
    done_.assign(w_.size(), 0);
    bool moving = true;
    for (int pass = 0; moving && pass < most_passes; ++pass) {
        moving = false;
        for (std::size_t i = 0; i < w_.size(); ++i) {
            if (done_[i]) continue;
            Complex move = step(i, value(values, w_[i]), slope(slopes, w_[i]));
            const double size = std::abs(w_[i]);
            // Out of step: somewhere else, deterministically. Never more than tenfold away in one step.
            if (!finite(move)) move = size * Complex(0.02, 0.03);
            if (const double far = std::abs(move); far > 10.0 * size) move *= 10.0 * size / far;
            w_[i] -= move;
            done_[i] = std::abs(move) <= close * size || size < 1e-20 * slowest_;
            moving = moving || !done_[i];
        }
    }
    return moving;
}

// Two iterates on the real axis never leave it again, even if the zeros they look for are a conjugate pair: those
// that have not settled go to either side of it by half their distance. Real zeros get them back.
void ZeroSearch::leave_axis() {
    const std::vector<Complex> from = w_;
    for (std::size_t i = 0; i < from.size(); ++i) {
        if (done_[i]) continue;
        std::size_t nearest = from.size();
        double distance = 0.0;
        for (std::size_t j = 0; j < from.size(); ++j)
            if (const double d = std::abs(from[j] - from[i]); j != i && (nearest == from.size() || d < distance)) {
                nearest = j;
                distance = d;
            }
        if (nearest < from.size() && std::abs(from[i].imag()) < 1e-3 * distance)
            w_[i] += Complex(0.0, (nearest > i ? 0.5 : -0.5) * distance);
    }
}

// Makes conjugates exact mirror images, next to each other, and real zeros real.
void ZeroSearch::mirror() {
    std::vector<Complex> out, left = w_;
    while (!left.empty()) {
        const Complex w = left.back();
        std::size_t twin = left.size() - 1;
        for (std::size_t j = 0; j < left.size(); ++j)
            if (std::abs(std::conj(w) - left[j]) < std::abs(std::conj(w) - left[twin])) twin = j;
        left.pop_back();
        if (twin == left.size()) {
            out.push_back(w.real());
            continue;
        }
        const Complex mean = 0.5 * (w + std::conj(left[twin]));
        left.erase(left.begin() + static_cast<std::ptrdiff_t>(twin));
        out.emplace_back(mean.real(), std::abs(mean.imag()));
        out.emplace_back(mean.real(), -std::abs(mean.imag()));
    }
    w_ = out;
}

// The factored form against F in twice the digits at frequencies from below the slowest root to the highest; where a
// root is near, its last digit counts for more and the difference for less.
double ZeroSearch::error(double leading) const {
    double slowest = slowest_;
    for (const Complex& root : w_) slowest = std::min(slowest, std::abs(root));
    slowest = std::max(slowest, 1e-3 * slowest_);
    const int points = 4 + static_cast<int>(w_.size()) / 2;
    const double ratio = std::pow(3.1 / (0.3 * slowest), 1.0 / points);
    double worst = 0.0, angle = 0.3 * slowest;
    for (int i = 0; i <= points; ++i, angle *= ratio) {
        const Complex w = exponential_minus_one({0.0, angle});
        Complex product = leading;
        double sensitivity = 1.0;
        const auto distance_to = [&](const Complex& root) {
            const Complex d = w - root;
            sensitivity += (std::abs(w) + std::abs(root)) / std::abs(d);
            return d;
        };
        for (int k = 0; k < at_one_; ++k) product *= w;
        for (std::size_t k = 0; k < std::max(poles_.size(), w_.size()); ++k) {
            if (k < w_.size()) product *= distance_to(w_[k]);
            if (k < poles_.size()) product /= distance_to(poles_[k]);
        }
        const Complex exact = value<Twice>(exact_, w);
        const double roots = 1.0 + static_cast<double>(poles_.size() + w_.size());
        worst = larger(worst, std::abs(product - exact) / std::abs(exact) * std::min(1.0, 2.0 * roots / sensitivity));
    }
    return worst < 1.0 ? worst : 1.0;
}

std::vector<Complex> ZeroSearch::zeros() const {
    std::vector<Complex> zeros(static_cast<std::size_t>(at_one_), Complex(0.0));
    zeros.insert(zeros.end(), w_.begin(), w_.end());
    return zeros;
}

// N of a cascade of up to two states, from F at infinity times the polynomial of the poles.
SampledZeros zeros_in_closed_form(const SampledCascade& s, const std::vector<Twice>& f, std::size_t first) {
    const auto growth = [&](std::size_t i, std::size_t j) { return s.growth[i * s.order + j]; };
    Twice p1, p0;  // w^2 + p1 w + p0, or w + p1
    if (s.order == 1) p1 = -growth(0, 0);
    if (s.order == 2) {
        p1 = -(growth(0, 0) + growth(1, 1));
        p0 = growth(0, 0) * growth(1, 1) - growth(0, 1) * growth(1, 0);
    }
    const Twice c0 = f[first], c1 = f[first + 1] + p1 * c0, c2 = f[first + 2] + p1 * f[first + 1] + p0 * c0;
    const std::size_t degree = s.order + 1 - first;
    if (degree == 2) return zeros_of_quadratic(c0, c1, c2);
    return degree == 1 ? zeros_of_quadratic(0.0, c0, c1) : zeros_of_quadratic(0.0, 0.0, c0);
}

}  // namespace

SampledZeros zeros_of_quadratic(Twice c2, const Twice& c1, const Twice& c0) {
    SampledZeros found;
    found.error = 4e-16;
    if (std::abs(c2.high) * too_far < std::abs(c1.high)) c2 = 0.0;
    if (c2.high == 0.0) {
        const bool constant = c1.high == 0.0 || std::abs(c1.high) * too_far < std::abs(c0.high);
        found.leading = rounded(constant ? c0 : c1);
        if (!constant) found.zeros = {0.0 - rounded(c0 / c1)};
        return found;
    }
    found.leading = rounded(c2);
    const Twice p = Twice(0.5) * c1 / c2, q = c0 / c2;  // w^2 + 2 p w + q
    const Twice discriminant = p * p - q;
    if (discriminant.high >= 0.0) {
        const Twice root = square_root(discriminant), large = p.high < 0.0 ? root - p : -(p + root);
        found.zeros = {rounded(large), large.high == 0.0 ? 0.0 : rounded(q / large)};
    } else {
        const double re = rounded(-p), im = rounded(square_root(-discriminant));
        found.zeros = {{re, im}, {re, -im}};
    }
    return found;
}

SampledZeros zeros_of(const SampledCascade& s, const std::vector<Complex>& poles, const std::vector<Complex>& starts,
                      int at_one) {
    const std::size_t n = s.order;
    const auto f = coefficients_at_infinity(s, n + 4);
    std::size_t first = 0;
    while (first < n + 1 && f[first].high == 0.0) ++first;
    if (n <= 2 && first > 0) return zeros_in_closed_form(s, f, first);
    SampledZeros found;
    found.leading = rounded(f[first]);
    Twice trace;
    for (std::size_t i = 0; i < n; ++i) trace = trace + s.growth[i * n + i];
    if (const double next = rounded(f[first + 1] - trace * f[first]);
        first < n + 1 && std::abs(found.leading) * too_far <= std::abs(next)) {
        found.leading = next;
        ++first;
    }
    const std::size_t zeros = n + 1 - first, known = std::min(zeros, static_cast<std::size_t>(at_one));
    ZeroSearch search(s, poles, static_cast<int>(known));
    search.start(starts, zeros - known);
    search.approach();
    search.refine();
    search.mirror();
    found.zeros = search.zeros();
    found.error = search.error(found.leading);
    return found;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
