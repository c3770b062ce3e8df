#include "assess/loop_states.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "tauwright/control/pid_response.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

// p s + q: a lag (T, 1), a lead (T, 1), an integrator or a zero at the origin (1, 0).
struct RealFactor {
    double p, q;
    double time() const noexcept { return q == 0.0 ? std::numeric_limits<double>::max() : std::abs(p); }
};

// (a s^2 + b s + c) over one or two poles.
struct Section {
    double a = 0.0, b = 0.0, c = 1.0;
    RealFactor first{}, second{};  // real poles; `second` only where there are two
    QuadraticFactor pair{};
    int poles = 1;
    bool is_pair = false;
    int free_zeros = 1;

    double time() const noexcept { return is_pair ? pair.time_constant : first.time(); }
    void put(const RealFactor& zero) noexcept {
        a = a * zero.q + b * zero.p;
        b = b * zero.q + c * zero.p;
        c *= zero.q;
        --free_zeros;
    }
};

// The free section whose time constant is nearest, which keeps the signals inside the chain moderate.
template <class Sections, class Free>
typename Sections::iterator nearest(Sections& sections, double time, Free free) {
    auto best = sections.end();
    double closest = 0.0;
    for (auto it = sections.begin(); it != sections.end(); ++it) {
        const double distance = std::abs(std::log(it->time()) - std::log(time));
        if (free(*it) && (best == sections.end() || distance < closest)) best = it, closest = distance;
    }
    return best;
}

std::vector<Section> sections_of(const Factors& f) {
    std::vector<Section> sections;
    for (const QuadraticFactor& pair : f.lag_pairs) {
        Section s;
        s.pair = pair, s.is_pair = true, s.poles = 2, s.free_zeros = 2;
        sections.push_back(s);
    }
    for (double T : f.lags) sections.emplace_back().first = {T, 1.0};
    for (int i = 0; i < f.integrators; ++i) sections.emplace_back().first = {1.0, 0.0};
    for (const QuadraticFactor& zero : f.lead_pairs) {
        const double T = zero.time_constant;
        auto home = nearest(sections, T, [](const Section& s) { return s.free_zeros == 2; });
        if (home == sections.end()) {  // two real poles take the pair together
            const auto single = [](const Section& s) { return s.poles == 1; };
            const auto other = nearest(sections, T, single);
            const RealFactor taken = other->first;
            sections.erase(other);
            home = nearest(sections, T, single);
            home->second = taken, home->poles = 2;
        }
        home->a = T * T, home->b = 2.0 * zero.damping * T, home->free_zeros = 0;
    }
    const auto put = [&](const RealFactor& zero) {
        nearest(sections, zero.time(), [](const Section& s) { return s.free_zeros > 0; })->put(zero);
    };
    for (double T : f.leads) put({T, 1.0});
    for (int i = 0; i < f.zeros_at_origin; ++i) put({1.0, 0.0});
    return sections;
}

class Builder {
public:
    explicit Builder(std::size_t states) : states_(states) { loop_.rates.reserve(states); }

    SignalForm form() const { return {std::vector<double>(states_, 0.0), 0.0, 0.0}; }
    static void add(SignalForm& to, double factor, const SignalForm& from) {
        for (std::size_t i = 0; i < to.states.size(); ++i) to.states[i] += factor * from.states[i];
        to.input += factor * from.input;
        to.setpoint += factor * from.setpoint;
    }
    std::size_t next() const noexcept { return loop_.rates.size(); }
    std::size_t push(SignalForm rate, std::size_t block, double speed) {
        loop_.rates.push_back(std::move(rate));
        if (block > 0) loop_.block_sizes.push_back(block);
        loop_.fastest = std::max(loop_.fastest, speed);
        return loop_.rates.size() - 1;
    }
    /// x of (p s + q) x = w.
    std::size_t lag(const SignalForm& w, const RealFactor& pole) {
        SignalForm rate = form();
        add(rate, 1.0 / pole.p, w);
        rate.states[next()] -= pole.q / pole.p;
        return push(std::move(rate), 1, std::abs(pole.q / pole.p));
    }
    SignalForm section(const SignalForm& w, const Section& s) { return s.is_pair ? pair(w, s) : real(w, s); }
    /// The form's rate of change; it must not hold the input itself.
    SignalForm rate_of(const SignalForm& signal) const {
        SignalForm rate = form();
        for (std::size_t i = 0; i < loop_.rates.size(); ++i)
            if (signal.states[i] != 0.0) add(rate, signal.states[i], loop_.rates[i]);
        return rate;
    }
    LoopStates& loop() noexcept { return loop_; }

private:
    SignalForm real(const SignalForm& w, const Section& s) {
        SignalForm out = form();
        const RealFactor one = s.first, two = s.second;
        const std::size_t x = lag(w, one);
        if (s.poles == 1) {
            add(out, s.b / one.p, w);
            out.states[x] += (s.c * one.p - s.b * one.q) / one.p;
            return out;
        }
        SignalForm middle = form();
        middle.states[x] = 1.0;
        const std::size_t y = lag(middle, two);
        // a s^2 + b s + c = alpha d1 d2 + beta d2 + gamma.
        const double alpha = s.a / (one.p * two.p);
        const double beta = (s.b - alpha * (one.p * two.q + two.p * one.q)) / two.p;
        add(out, alpha, w);
        out.states[x] += beta;
        out.states[y] += s.c - alpha * one.q * two.q - beta * two.q;
        return out;
    }
    // T x1' = x2, T x2' = w - x1 - 2 z x2.
    SignalForm pair(const SignalForm& w, const Section& s) {
        const double T = s.pair.time_constant, z = s.pair.damping;
        const std::size_t x1 = next(), x2 = x1 + 1;
        SignalForm first = form(), second = form(), out = form();
        first.states[x2] = 1.0 / T;
        add(second, 1.0 / T, w);
        second.states[x1] -= 1.0 / T;
        second.states[x2] -= 2.0 * z / T;
        const double speed = (std::abs(z) <= 1.0 ? 1.0 : std::abs(z) + std::sqrt((std::abs(z) - 1.0) * (std::abs(z) + 1.0))) / T;
        push(std::move(first), 2, speed);
        push(std::move(second), 0, speed);
        const double square = s.a / (T * T);
        add(out, square, w);
        out.states[x1] += s.c - square;
        out.states[x2] += s.b / T - 2.0 * z * square;
        return out;
    }

    std::size_t states_;
    LoopStates loop_;
};

void check_process(const TransferFunction& process, const PidSettings& settings) {
    if (process.relative_degree() < 0)
        refuse(error_code::out_of_domain, "process relative degree", process.relative_degree(),
               "a process with more zeros than poles has no response in time; add the lags that make it proper");
    if (process.order() > 20)
        refuse(error_code::out_of_domain, "process order", process.order(), "give a process of at most 20 poles");
    if (process.relative_degree() == 0 && settings.derivative_time > 0.0 && settings.filter_time == 0.0 &&
        settings.measurement_filter_time == 0.0)
        refuse(error_code::out_of_domain, "settings.filter_time", 0.0,
               "unfiltered derivative action on a process that answers at once gives impulses; give a filter time above 0");
}

}  // namespace

LoopStates loop_states(const TransferFunction& given, const PidSettings& settings) {
    require(settings);
    const TransferFunction process = given.cancelled();
    check_process(process, settings);
    const double Kc = settings.gain, Ki = settings.integral_gain_per_s(), Td = settings.derivative_time;
    const double Tf = Td > 0.0 ? settings.filter_time : 0.0, Tm = settings.measurement_filter_time;
    Builder build(static_cast<std::size_t>(process.order()) + (Tm > 0.0) + (Ki != 0.0) + (Tf > 0.0));

    SignalForm y = build.form();
    y.input = 1.0;
    for (const Section& section : sections_of(process.factors())) y = build.section(y, section);
    for (double& x : y.states) x *= process.gain();
    y.input *= process.gain();

    SignalForm measured = y, measured_rate = build.form();
    if (Tm > 0.0) {
        const std::size_t filtered = build.lag(y, {Tm, 1.0});
        measured = build.form();
        measured.states[filtered] = 1.0;
    }
    if (Td > 0.0 && Tf == 0.0) measured_rate = build.rate_of(measured);
    SignalForm u = build.form();
    u.setpoint = Kc * settings.setpoint_weight;
    Builder::add(u, -Kc, measured);
    if (Ki != 0.0) {
        SignalForm rate = build.form();
        rate.setpoint = Ki;
        Builder::add(rate, -Ki, measured);
        u.states[build.push(std::move(rate), 1, 0.0)] = 1.0;
    }
    if (Tf > 0.0) {
        const std::size_t filtered = build.lag(measured, {Tf, 1.0});
        Builder::add(measured_rate, 1.0 / Tf, measured);
        measured_rate.states[filtered] -= 1.0 / Tf;
    }
    if (Td > 0.0) Builder::add(u, -Kc * Td, measured_rate);

    LoopStates loop = std::move(build.loop());
    loop.value = std::move(y);
    loop.output = std::move(u);
    loop.dead_time = process.dead_time();
    return loop;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
