// SHA-256 as FIPS 180-4 defines it, for naming the input of a tuning sheet.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>
#include <string>

namespace tauwright {
inline namespace v0 {
namespace detail {

class Sha256 {
public:
    void add(const void* data, std::size_t size) noexcept;
    /// The digest in lower-case hexadecimal; the object is used up.
    std::string hexadecimal();

private:
    void process(const std::uint8_t* block) noexcept;
    std::array<std::uint32_t, 8> state_ = {0x6a09e667u, 0xbb67ae85u, 0x3c6ef372u, 0xa54ff53au,
                                           0x510e527fu, 0x9b05688cu, 0x1f83d9abu, 0x5be0cd19u};
    std::array<std::uint8_t, 64> pending_ = {};
    std::size_t pending_size_ = 0;
    std::uint64_t total_ = 0;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
