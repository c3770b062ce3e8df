// What the tests of every floor share: closeness, seeded random numbers, and checks of errors.
#pragma once

#include <cmath>
#include <complex>
#include <cstdint>
#include <initializer_list>
#include <ostream>
#include <string>

#include "catch_compat.hpp"
#include "tauwright/core/error.hpp"

namespace oracle {

/// A difference that prints with its exponent when a check fails.
struct Difference {
    double size;
    friend bool operator<=(Difference d, double allowed) { return d.size <= allowed; }
    friend std::ostream& operator<<(std::ostream& out, Difference d) { return out << tauwright::text_of(d.size); }
};

/// |x - expected| relative to |expected|; absolute where 0 is expected.
template <class Number>
Difference relative_error(Number x, Number expected) {
    const double size = std::abs(expected);
    return {std::abs(x - expected) / (size == 0.0 ? 1.0 : size)};
}
template <class Number>
Difference absolute_error(Number x, Number expected) {
    return {std::abs(x - expected)};
}

/// Random numbers that are the same everywhere: splitmix64 (Steele, Lea and Flood, OOPSLA 2014).
class Seeded {
public:
    explicit Seeded(std::uint64_t seed) : state_(seed) {}

    std::uint64_t bits() {
        state_ += 0x9e3779b97f4a7c15u;
        std::uint64_t z = state_;
        z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
        z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
        return z ^ (z >> 31);
    }
    double uniform(double low, double high) { return low + (high - low) * (static_cast<double>(bits() >> 11) * 0x1p-53); }
    /// Equally likely in every decade between two positive numbers.
    double scaled(double low, double high) { return low * std::pow(high / low, uniform(0.0, 1.0)); }
    int below(int n) { return static_cast<int>(bits() % static_cast<std::uint64_t>(n)); }
    bool chance(double share) { return uniform(0.0, 1.0) < share; }

private:
    std::uint64_t state_;
};

/// Insists that `call` throws Error with this code and a message that holds every one of `words`.
template <class Call>
void check_refused(tauwright::error_code code, std::initializer_list<const char*> words, Call call) {
    try {
        call();
    } catch (const tauwright::Error& e) {
        const std::string message = e.what();
        INFO(message);
        CHECK(std::string(tauwright::name_of(e.code())) == tauwright::name_of(code));
        for (const char* word : words) {
            INFO("looking for: " << word);
            CHECK(message.find(word) != std::string::npos);
        }
        return;
    }
    FAIL_CHECK("nothing was refused where " << tauwright::name_of(code) << " was expected");
}

}  // namespace oracle
