// A plant record: what the history holds of one loop, checked on the way in.
#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "tauwright/core/range.hpp"

namespace tauwright {
inline namespace v0 {

/// The arrays of a record. Lengths are equal; empty optional arrays mean not known.
struct RecordColumns {
    std::vector<double> time_s = {};         ///< strictly increasing, seconds from any origin
    std::vector<double> output = {};         ///< controller output, held from its sample to the next
    std::vector<double> process_value = {};
    std::vector<std::uint8_t> good = {};     ///< 0 drops the process value; its output is still held
    std::vector<double> setpoint = {};
    std::vector<std::uint8_t> automatic = {};///< 1 where the loop was in automatic
    std::optional<Range> output_range = {};
    std::optional<Range> process_value_range = {};
};

/// A checked plant record. Immutable; owns its arrays.
class Record {
public:
    /// Throws `wrong_length`, `not_finite` (a process value may be anything where good is 0),
    /// `time_not_increasing` with the index, `record_too_short` for no samples, and what `check`
    /// says of a range. Compiled; allocates.
    explicit Record(RecordColumns columns);

    std::size_t size() const noexcept { return columns_.time_s.size(); }
    std::span<const double> time_s() const noexcept { return {columns_.time_s.data(), columns_.time_s.size()}; }
    std::span<const double> output() const noexcept { return {columns_.output.data(), columns_.output.size()}; }
    std::span<const double> process_value() const noexcept { return {columns_.process_value.data(), columns_.process_value.size()}; }
    bool good(std::size_t i) const noexcept { return columns_.good.empty() || columns_.good[i] != 0; }
    std::size_t good_count() const noexcept;
    std::span<const double> setpoint() const noexcept { return {columns_.setpoint.data(), columns_.setpoint.size()}; }
    std::span<const std::uint8_t> automatic() const noexcept { return {columns_.automatic.data(), columns_.automatic.size()}; }
    const std::optional<Range>& output_range() const noexcept { return columns_.output_range; }
    const std::optional<Range>& process_value_range() const noexcept { return columns_.process_value_range; }

    /// Where it was read from (empty for arrays) and when its first sample was taken, as written.
    const std::string& source() const noexcept { return source_; }
    const std::string& first_stamp() const noexcept { return first_stamp_; }
    /// The same record with other marks; throws `wrong_length`, or `not_finite` as the constructor.
    Record with_good(std::vector<std::uint8_t> good) const;
    /// SHA-256 in hexadecimal: of the file's bytes, or (computed on call) of the arrays time, output,
    /// process value as little-endian doubles followed by a byte a sample for good.
    std::string sha256() const;

private:
    friend Record read_record_text(std::string_view text, const std::string& name);
    RecordColumns columns_;
    std::string source_, first_stamp_, file_sha256_;
};

/// Reads a CSV file (RFC 4180; LF or CRLF; UTF-8 with or without a byte-order mark). Compiled.
///
/// A header row names the columns, in any order and case: `time_s` (seconds) or `time` (RFC 3339
/// with an offset), `output`, `process_value`; optional `quality` (good or bad), `setpoint`, `mode`
/// (manual or automatic). Lines that begin with # are comments; those of the form
///   # output_range: 0 100 %          # process_value_range: 0 120 degC
/// give the ranges. An empty process value is a bad sample. In a row marked bad the process value
/// may be any text. Throws `file_not_readable`, `file_malformed`, `time_zone_missing`,
/// `time_not_increasing`, each with the line and the remedy.
Record read_record(const std::string& path);

/// The same from text already in memory; `name` stands for the file in messages.
Record read_record_text(std::string_view text, const std::string& name = "record");

}  // namespace v0
}  // namespace tauwright
