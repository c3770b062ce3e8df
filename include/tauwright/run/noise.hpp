// Seeded noise from integers alone: equal seeds give equal bits everywhere. Stands alone: no heap, no libm.
#pragma once

#include <cstdint>

namespace tauwright {
inline namespace v0 {
namespace run {

/// The sum of twelve uniform numbers less six: mean 0, variance 1, near normal, never beyond 6. Real-time safe.
/// The generator is splitmix64 (Steele, Lea and Flood, OOPSLA 2014).
class Noise {
public:
    Noise() = default;
    explicit Noise(std::uint64_t seed) noexcept : state_(seed) {}

    double next() noexcept {
        double sum = -6.0;
        for (int i = 0; i < 12; ++i) sum += uniform();
        return sum;
    }

private:
    double uniform() noexcept {
        state_ += 0x9e3779b97f4a7c15u;
        std::uint64_t z = state_;
        z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
        z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
        z ^= z >> 31;
        return static_cast<double>(z >> 11) * 0x1p-53;
    }
    std::uint64_t state_ = 0;
};

}  // namespace run
}  // namespace v0
}  // namespace tauwright
