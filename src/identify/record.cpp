#include "tauwright/identify/record.hpp"

#include <algorithm>
#include <bit>

#include "core/sha256.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

void require_length(const char* name, std::size_t length, std::size_t expected) {
    if (length != expected)
        throw Error(error_code::wrong_length, std::string(name) + " has " + std::to_string(length) + " values, time_s has " +
                                                  std::to_string(expected) + "; give one value a sample in each");
}

void require_all_finite(const char* name, std::span<const double> values) {
    for (std::size_t i = 0; i < values.size(); ++i)
        if (!is_finite(values[i]))
            detail::refuse(error_code::not_finite, std::string(name) + "[" + std::to_string(i) + "]", values[i],
                           "give a finite number");
}

void add_doubles(detail::Sha256& hash, std::span<const double> values) {
    for (double x : values) {
        const auto bits = std::bit_cast<std::uint64_t>(x);
        std::uint8_t bytes[8];
        for (int i = 0; i < 8; ++i) bytes[i] = static_cast<std::uint8_t>(bits >> (8 * i));
        hash.add(bytes, sizeof bytes);
    }
}

}  // namespace

Record::Record(RecordColumns columns) : columns_(std::move(columns)) {
    const RecordColumns& c = columns_;
    const std::size_t n = c.time_s.size();
    if (n == 0) throw Error(error_code::record_too_short, "time_s has no samples; give a record with samples");
    require_length("output", c.output.size(), n);
    require_length("process_value", c.process_value.size(), n);
    if (!c.good.empty()) require_length("good", c.good.size(), n);
    if (!c.setpoint.empty()) require_length("setpoint", c.setpoint.size(), n);
    if (!c.automatic.empty()) require_length("automatic", c.automatic.size(), n);
    require_all_finite("time_s", c.time_s);
    require_all_finite("output", c.output);
    require_all_finite("setpoint", c.setpoint);
    for (std::size_t i = 0; i < n; ++i)
        if (good(i) && !is_finite(c.process_value[i]))
            detail::refuse(error_code::not_finite, "process_value[" + std::to_string(i) + "]", c.process_value[i],
                           "give a finite number, or mark the sample bad (good = 0)");
    for (std::size_t i = 1; i < n; ++i)
        if (!(c.time_s[i - 1] < c.time_s[i]))
            detail::refuse(error_code::time_not_increasing, "time_s[" + std::to_string(i) + "]", c.time_s[i],
                           "it does not come after " + text_of(c.time_s[i - 1]) + ": sort the samples and drop repeated stamps");
    if (c.output_range) check(*c.output_range, "output_range");
    if (c.process_value_range) check(*c.process_value_range, "process_value_range");
}

std::size_t Record::good_count() const noexcept {
    if (columns_.good.empty()) return size();
    return static_cast<std::size_t>(
        std::count_if(columns_.good.begin(), columns_.good.end(), [](std::uint8_t g) { return g != 0; }));
}

Record Record::with_good(std::vector<std::uint8_t> good) const {
    RecordColumns columns = columns_;
    columns.good = std::move(good);
    Record other(std::move(columns));
    other.source_ = source_;
    other.first_stamp_ = first_stamp_;
    other.file_sha256_ = file_sha256_;
    return other;
}

std::string Record::sha256() const {
    if (!file_sha256_.empty()) return file_sha256_;
    detail::Sha256 hash;
    add_doubles(hash, columns_.time_s);
    add_doubles(hash, columns_.output);
    add_doubles(hash, columns_.process_value);
    for (std::size_t i = 0; i < size(); ++i) {
        const std::uint8_t flag = good(i) ? 1 : 0;
        hash.add(&flag, 1);
    }
    return hash.hexadecimal();
}

}  // namespace v0
}  // namespace tauwright
