#include "discretize/held_sections.hpp"

#include <algorithm>
#include <cmath>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

/// n2 s^2 + n1 s + n0, the leads of one section multiplied out.
struct Numerator {
    Twice n2, n1, n0 = 1.0;
    void multiply(const Twice& time_constant, const Twice& constant) noexcept {
        n2 = n2 * constant + n1 * time_constant;
        n1 = n1 * constant + n0 * time_constant;
        n0 = n0 * constant;
    }
};

/// A real pole as 1 / (slope s + constant): a lag has constant 1, an integrator 0 and the scan time as slope.
struct RealPole {
    double slope, constant;
};

struct Section {
    std::vector<RealPole> poles;  // one or two, or else a pair
    QuadraticFactor pair;
    Numerator numerator;
    std::size_t room;  // how many zeros it still takes

    double time_constant() const noexcept {
        double longest = 0.0;
        for (const auto& pole : poles) longest = std::max(longest, std::abs(pole.slope));
        return poles.empty() ? pair.time_constant : longest;
    }
    std::size_t states() const noexcept { return poles.size() == 1 ? 1 : 2; }
};

double apart(double a, double b) noexcept { return std::abs(std::log(std::abs(a) / std::abs(b))); }

std::vector<Section> sections_of(const Factors& f, double scan_time) {
    std::vector<Section> sections;
    for (const auto& pair : f.lag_pairs) sections.push_back({{}, pair, {}, 2});
    for (double T : f.lags) sections.push_back({{{T, 1.0}}, {}, {}, 1});
    for (int i = 0; i < f.integrators; ++i) sections.push_back({{{scan_time, 0.0}}, {}, {}, 1});
    return sections;
}

// The section with room whose time constant is nearest. There is one as long as the process is proper.
Section& nearest(std::vector<Section>& sections, double time_constant) {
    Section* best = nullptr;
    for (auto& section : sections) {
        if (section.room == 0) continue;
        if (best == nullptr || apart(section.time_constant(), time_constant) < apart(best->time_constant(), time_constant))
            best = &section;
    }
    return *best;
}

// A pair of leads goes to a pair of lags, or else to two real poles, which become one section.
void place_pair(std::vector<Section>& sections, const QuadraticFactor& pair) {
    const double T = pair.time_constant;
    std::size_t best = sections.size();
    for (std::size_t i = 0; i < sections.size(); ++i) {
        const bool fits = sections[i].poles.empty() && sections[i].room == 2;
        if (fits && (best == sections.size() ||
                     apart(sections[i].pair.time_constant, T) < apart(sections[best].pair.time_constant, T)))
            best = i;
    }
    if (best == sections.size()) {
        std::vector<std::size_t> real;
        for (std::size_t i = 0; i < sections.size(); ++i)
            if (sections[i].poles.size() == 1 && sections[i].room == 1) real.push_back(i);
        std::sort(real.begin(), real.end(), [&](std::size_t i, std::size_t j) {
            return apart(sections[i].time_constant(), T) < apart(sections[j].time_constant(), T);
        });
        best = std::min(real[0], real[1]);
        const std::size_t other = std::max(real[0], real[1]);
        sections[best].poles.push_back(sections[other].poles[0]);
        sections.erase(sections.begin() + static_cast<std::ptrdiff_t>(other));
    }
    auto& numerator = sections[best].numerator;
    numerator.n2 = Twice(T) * Twice(T);
    numerator.n1 = Twice(2.0 * pair.damping) * Twice(T);
    sections[best].room = 0;
}

void place_zeros(std::vector<Section>& sections, const Factors& f, double scan_time) {
    for (const auto& pair : f.lead_pairs) place_pair(sections, pair);
    const auto place = [&](double time_constant, double constant) {
        Section& section = nearest(sections, time_constant);
        section.numerator.multiply(time_constant, constant);
        --section.room;
    };
    for (double T : f.leads) place(T, 1.0);
    for (int i = 0; i < f.zeros_at_origin; ++i) place(scan_time, 0.0);
}

/// One section's equations: x' = A x + b v, y = outputs . x + direct v.
struct Equations {
    Twice A[2][2], b[2], outputs[2], direct;
};

Equations equations_of_pair(const Section& s, double h) noexcept {
    const Twice T = s.pair.time_constant, rate = Twice(h) / T, twice_damping = 2.0 * s.pair.damping;
    const auto& n = s.numerator;
    Equations e;
    e.A[0][1] = rate;
    e.A[1][0] = -rate;
    e.A[1][1] = -(twice_damping * rate);
    e.b[1] = rate;
    e.direct = n.n2 / (T * T);
    e.outputs[0] = n.n0 - e.direct;
    e.outputs[1] = n.n1 / T - twice_damping * e.direct;
    return e;
}

Equations equations_of_poles(const Section& s, double h) noexcept {
    const Twice a1 = s.poles[0].slope, c1 = s.poles[0].constant;
    const auto& n = s.numerator;
    Equations e;
    e.A[0][0] = -(c1 * Twice(h) / a1);
    e.b[0] = Twice(h) / a1;
    if (s.poles.size() == 1) {
        e.direct = n.n1 / a1;
        e.outputs[0] = n.n0 - e.direct * c1;
        return e;
    }
    const Twice a2 = s.poles[1].slope, c2 = s.poles[1].constant;
    e.A[1][0] = Twice(h) / a2;
    e.A[1][1] = -(c2 * Twice(h) / a2);
    e.direct = n.n2 / (a1 * a2);
    e.outputs[0] = (n.n1 - e.direct * (a1 * c2 + c1 * a2)) / a2;
    e.outputs[1] = n.n0 - e.direct * c1 * c2 - e.outputs[0] * c2;
    return e;
}

// Connects the section to what the cascade gives out so far: input v = outputs . x + direct u.
void append(Cascade& cascade, std::size_t at, const Section& section, double h) {
    const Equations e = section.poles.empty() ? equations_of_pair(section, h) : equations_of_poles(section, h);
    const std::size_t n = cascade.order, states = section.states();
    for (std::size_t i = 0; i < states; ++i) {
        Twice* row = &cascade.A[(at + i) * n];
        for (std::size_t j = 0; j < at; ++j) row[j] = e.b[i] * cascade.outputs[j];
        for (std::size_t j = 0; j < states; ++j) row[at + j] = e.A[i][j];
        cascade.b[at + i] = e.b[i] * cascade.direct;
        cascade.last[at + i] = section.poles.empty() ? at + 1 : at + i;
    }
    for (std::size_t j = 0; j < at; ++j) cascade.outputs[j] = e.direct * cascade.outputs[j];
    for (std::size_t j = 0; j < states; ++j) cascade.outputs[at + j] = e.outputs[j];
    cascade.direct = e.direct * cascade.direct;
}

}  // namespace

Cascade cascade_of(const Factors& factors, double scan_time) {
    auto sections = sections_of(factors, scan_time);
    place_zeros(sections, factors, scan_time);
    std::stable_sort(sections.begin(), sections.end(), [](const Section& a, const Section& b) {
        return a.time_constant() < b.time_constant();
    });
    Cascade cascade;
    for (const auto& section : sections) cascade.order += section.states();
    const std::size_t n = cascade.order;
    cascade.A.resize(n * n);
    cascade.b.resize(n);
    cascade.outputs.resize(n);
    cascade.last.resize(n);
    cascade.direct = 1.0;
    std::size_t at = 0;
    for (const auto& section : sections) {
        append(cascade, at, section, scan_time);
        at += section.states();
    }
    Twice gain = 1.0;
    for (int i = 0; i < factors.integrators; ++i) gain = gain * Twice(scan_time);
    for (int i = 0; i < factors.zeros_at_origin; ++i) gain = gain / Twice(scan_time);
    for (Twice& c : cascade.outputs) c = gain * c;
    cascade.direct = gain * cascade.direct;
    return cascade;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
