// The open loops of all members of a set, enclosed by their logarithm over a box of frequencies and coordinates.
#pragma once

#include <complex>
#include <cstddef>
#include <vector>

#include "assess/member_set.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

/// A box: coordinates as center and half width. Entry 0 is the log frequency; where a lag pair's time constant
/// is a coordinate, the log of frequency times time constant: the resonance then stays where it is.
struct FamilyBox {
    std::vector<double> center, half;
};

/// log(-L) over a box, to second order:
///   s + j alpha + sum of slope[i] (x_i - center_i) + something within `rest` in size,
/// where the true slopes all over the box lie within slope_radius of those in the center.
/// Entry 0 belongs to the (relative) log frequency.
struct Enclosure {
    double frequency = 0.0;          ///< at the center, rad/s
    double s = 0.0, alpha = 0.0;     ///< log |L|; angle of L from -1, -pi to pi
    double rest = 0.0;
    bool centered = true;            ///< s and alpha are those of the center itself
    std::vector<std::complex<double>> slope;
    std::vector<double> slope_radius;
};

/// Ranges of log |L| and of the angle from -1 (not reduced).
struct Rectangle {
    double s_low = 0.0, s_high = 0.0, alpha_low = 0.0, alpha_high = 0.0;
};

class LoopFamily {
public:
    LoopFamily(const MemberSet& set, const TransferFunction& controller, double extra_delay);

    const MemberSet& set() const noexcept { return set_; }
    /// Entry 0 of a box at this log frequency and member.
    double first_of(double log_frequency, const double* z) const noexcept {
        return log_frequency + (resonance_ < 0 ? 0.0 : z[resonance_]);
    }
    /// Change of the log frequency with a coordinate (entry 0 and those of the members).
    double frequency_slope(std::size_t i) const noexcept {
        return i == 0 ? 1.0 : resonance_ >= 0 && i == static_cast<std::size_t>(resonance_) + 1 ? -1.0 : 0.0;
    }
    /// Half width of the log frequency over a box.
    double log_frequency_half(const FamilyBox& box) const noexcept {
        return box.half[0] + (resonance_ < 0 ? 0.0 : box.half[static_cast<std::size_t>(resonance_) + 1]);
    }
    double lowest_first(double log_frequency) const noexcept {
        return log_frequency + (resonance_ < 0 ? 0.0 : set_.lowest(static_cast<std::size_t>(resonance_)));
    }
    double highest_first(double log_frequency) const noexcept {
        return log_frequency + (resonance_ < 0 ? 0.0 : set_.highest(static_cast<std::size_t>(resonance_)));
    }
    /// Not const: it works in its own memory.
    void enclose(const FamilyBox& box, Enclosure& e) noexcept;
    /// All members from frequency 0 to w, and from w on. Of what cannot be told, ranges are infinite.
    Rectangle below(double w) const noexcept;
    Rectangle above(double w) const noexcept;

private:
    struct First {  // T s + 1
        double time;
        int parameter, power;
    };
    struct Pair {  // T^2 s^2 + 2 z T s + 1
        double time, damping;
        int time_parameter, damping_parameter, power;
    };
    struct Ends {  // of a parameter or a fixed value
        double low, high;
    };
    void take(const TransferFunction& G, bool process);
    int parameter_at(Place place, std::size_t index) const noexcept;
    void enclose_first(const First& f, Enclosure& e) noexcept;
    void enclose_pair(const Pair& f, Enclosure& e) noexcept;
    void enclose_dead_time(Enclosure& e) noexcept;
    void finish_slopes(Enclosure& e) noexcept;
    Ends ends(double fixed, int parameter) const noexcept;

    const MemberSet& set_;
    double gain_ = 1.0, dead_time_ = 0.0;  // without those that are parameters
    int gain_parameter_ = -1, dead_time_parameter_ = -1, integrators_ = 0;
    int resonance_ = -1;  ///< the lightest damped lag pair's time constant
    double rounding_ = 0.0;
    std::vector<First> firsts_;
    std::vector<Pair> pairs_;

    // Work of the box at hand.
    double w_ = 0.0, half_ = 0.0, first_half_ = 0.0, re_ = 1.0, im_ = 0.0;
    std::complex<double> resonant_slope_ = 0.0;
    double resonant_radius_ = 0.0;
    std::vector<double> value_, reach_, share_, slope_radius_;  // of parameters: reach of the logarithm (of the dead time itself)
    std::vector<std::complex<double>> slope_;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
