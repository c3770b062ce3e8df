#include <algorithm>
#include <array>
#include <charconv>
#include <filesystem>
#include <fstream>
#include <limits>

#include "core/sha256.hpp"
#include "identify/csv.hpp"
#include "identify/timestamp.hpp"
#include "tauwright/identify/record.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using detail::CsvReader;

constexpr std::string_view known_columns =
    "time_s or time, output, process_value, and optionally quality, setpoint, mode";

std::string_view trimmed(std::string_view text) noexcept {
    const auto first = text.find_first_not_of(" \t");
    if (first == std::string_view::npos) return {};
    return text.substr(first, text.find_last_not_of(" \t") - first + 1);
}

std::string lower(std::string_view text) {
    std::string out(text);
    for (char& c : out)
        if (c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
    return out;
}

// A field's text for a message: short, and only what can be printed.
std::string quoted(std::string_view text) {
    std::string out = "'";
    for (char c : text.substr(0, 40)) out += (c >= ' ' && c <= '~') ? c : '?';
    return out + (text.size() > 40 ? "...'" : "'");
}

[[noreturn]] void malformed(const CsvReader& in, const std::string& what) {
    throw Error(error_code::file_malformed, in.place() + ": " + what);
}

double parsed_number(const CsvReader& in, const char* column, std::string_view field) {
    std::string_view text = trimmed(field);
    if (text.starts_with('+') && !text.starts_with("+-")) text.remove_prefix(1);
    double value = 0.0;
    const auto [end, problem] = std::from_chars(text.data(), text.data() + text.size(), value);
    if (problem == std::errc::result_out_of_range)
        malformed(in, std::string(column) + " is " + quoted(field) + ", beyond what a number can hold; correct it");
    if (problem != std::errc{} || end != text.data() + text.size() || text.empty()) {
        const bool comma = text.find(',') != std::string_view::npos;
        malformed(in, std::string(column) + " is " + quoted(field) +
                          (comma ? ", a decimal comma; write the number with a point"
                                 : ", not a number; correct it, or mark the row bad in a quality column"));
    }
    if (!is_finite(value))
        throw Error(error_code::not_finite, in.place() + ": " + column + " is " + quoted(field) +
                                                "; give a finite number, or mark the row bad in a quality column");
    return value;
}

struct Columns {
    static constexpr std::size_t absent = std::numeric_limits<std::size_t>::max();
    std::size_t time_s = absent, time = absent, output = absent, process_value = absent;
    std::size_t quality = absent, setpoint = absent, mode = absent, count = 0;
};

Columns columns_from(const CsvReader& in, const std::vector<std::string_view>& header) {
    Columns c;
    c.count = header.size();
    const std::array<std::pair<const char*, std::size_t*>, 7> known = {{{"time_s", &c.time_s},
                                                                        {"time", &c.time},
                                                                        {"output", &c.output},
                                                                        {"process_value", &c.process_value},
                                                                        {"quality", &c.quality},
                                                                        {"setpoint", &c.setpoint},
                                                                        {"mode", &c.mode}}};
    for (std::size_t i = 0; i < header.size(); ++i) {
        const std::string name = lower(trimmed(header[i]));
        for (const auto& [word, index] : known) {
            if (name != word) continue;
            if (*index != Columns::absent) malformed(in, "column " + name + " stands twice; keep one of them");
            *index = i;
        }
    }
    const auto need = [&](std::size_t index, const char* word) {
        if (index != Columns::absent) return;
        const bool semicolons = header.size() == 1 && header[0].find(';') != std::string_view::npos;
        malformed(in, std::string("the header row has no column ") + word + (semicolons ? "; its fields are separated by ';', use ','" : "") +
                          "; name the columns " + std::string(known_columns));
    };
    if (c.time_s != Columns::absent && c.time != Columns::absent)
        malformed(in, "both time_s and time are given; keep one of them");
    need(c.time_s != Columns::absent ? c.time_s : c.time, "time_s or time");
    need(c.output, "output");
    need(c.process_value, "process_value");
    return c;
}

bool is_good(const CsvReader& in, std::string_view field) {
    const std::string word = lower(trimmed(field));
    if (word == "good") return true;
    if (word == "bad") return false;
    malformed(in, "quality is " + quoted(field) + "; write good or bad");
}

bool is_automatic(const CsvReader& in, std::string_view field) {
    const std::string word = lower(trimmed(field));
    if (word == "automatic") return true;
    if (word == "manual") return false;
    malformed(in, "mode is " + quoted(field) + "; write manual or automatic");
}

// "output_range: 0 100 %" -> Range; empty where the comment is about something else.
std::optional<Range> range_in(std::string_view comment, std::string_view key, const std::string& name) {
    comment = trimmed(comment);
    if (!lower(comment.substr(0, key.size())).starts_with(key)) return std::nullopt;
    comment = trimmed(comment.substr(key.size()));
    if (!comment.starts_with(':'))
        throw Error(error_code::file_malformed, name + ": the comment " + std::string(key) + " has no colon; write it as '# " +
                                                    std::string(key) + ": 0 100 %'");
    comment = trimmed(comment.substr(1));
    Range range;
    for (double* end : {&range.low, &range.high}) {
        const auto word = comment.substr(0, std::min(comment.find_first_of(" \t"), comment.size()));
        const std::size_t plus = word.starts_with('+') && !word.starts_with("+-") ? 1 : 0;
        const auto [stop, problem] = std::from_chars(word.data() + plus, word.data() + word.size(), *end);
        if (word.empty() || problem != std::errc{} || stop != word.data() + word.size())
            throw Error(error_code::file_malformed, name + ": the comment " + std::string(key) + " has " + quoted(word) +
                                                        " where a number belongs; write it as '# " + std::string(key) +
                                                        ": 0 100 %'");
        comment = trimmed(comment.substr(word.size()));
    }
    range.unit = std::string(comment);
    try {
        check(range, key);
    } catch (const Error& e) {
        throw Error(e.code(), name + ": the comment " + std::string(key) + ": " + e.what());
    }
    return range;
}

double seconds_of(const CsvReader& in, const Columns& columns, const std::vector<std::string_view>& row,
                  std::optional<std::int64_t>& origin_ns) {
    if (columns.time_s != Columns::absent) return parsed_number(in, "time_s", row[columns.time_s]);
    const auto field = trimmed(row[columns.time]);
    const auto stamp = detail::parse_timestamp(field);
    if (!stamp)
        malformed(in, "time is " + quoted(field) +
                          ", not an RFC 3339 stamp such as 2026-03-01T08:30:00Z; for plain seconds name the column time_s");
    if (!stamp->has_offset)
        throw Error(error_code::time_zone_missing, in.place() + ": time is " + quoted(field) +
                                                       "; add Z or an offset such as +01:00, so that clock changes cannot hide");
    if (!origin_ns) origin_ns = stamp->nanoseconds;
    return static_cast<double>(stamp->nanoseconds - *origin_ns) / 1e9;
}

}  // namespace

Record read_record_text(std::string_view text, const std::string& name) {
    CsvReader in(text, name);
    std::vector<std::string_view> row;
    if (!in.next_row(row))
        throw Error(error_code::file_malformed, name + " is empty; give a header row that names " + std::string(known_columns));
    const Columns columns = columns_from(in, row);
    RecordColumns record;
    std::optional<std::int64_t> origin_ns;
    std::string first_stamp;
    bool any_bad = false;
    while (in.next_row(row)) {
        if (row.size() != columns.count)
            malformed(in, std::to_string(row.size()) + " fields where the header has " + std::to_string(columns.count) +
                              (row.size() > columns.count ? "; decimal commas must become points" : "; complete the row"));
        const double t = seconds_of(in, columns, row, origin_ns);
        if (!record.time_s.empty() && !(record.time_s.back() < t))
            throw Error(error_code::time_not_increasing,
                        in.place() + ": time " + quoted(row[columns.time_s != Columns::absent ? columns.time_s : columns.time]) +
                            " does not come after the row before; sort the rows and drop repeated stamps");
        if (record.time_s.empty() && columns.time != Columns::absent) first_stamp = trimmed(row[columns.time]);
        record.time_s.push_back(t);
        record.output.push_back(parsed_number(in, "output", row[columns.output]));
        const auto value = trimmed(row[columns.process_value]);
        const bool good = (columns.quality == Columns::absent || is_good(in, row[columns.quality])) && !value.empty();
        record.process_value.push_back(good ? parsed_number(in, "process_value", value)
                                            : std::numeric_limits<double>::quiet_NaN());
        record.good.push_back(good ? 1 : 0);
        any_bad |= !good;
        if (columns.setpoint != Columns::absent) record.setpoint.push_back(parsed_number(in, "setpoint", row[columns.setpoint]));
        if (columns.mode != Columns::absent) record.automatic.push_back(is_automatic(in, row[columns.mode]) ? 1 : 0);
    }
    if (record.time_s.empty())
        throw Error(error_code::record_too_short, name + " has a header row but no samples; give a record with samples");
    if (!any_bad) record.good.clear();
    for (std::string_view comment : in.comments()) {
        for (const auto& [key, place] : {std::pair{"output_range", &record.output_range},
                                         std::pair{"process_value_range", &record.process_value_range}}) {
            auto range = range_in(comment, key, name);
            if (!range) continue;
            if (*place)
                throw Error(error_code::conflicting_arguments, name + ": the comment " + key + " stands twice; keep one of them");
            *place = std::move(range);
        }
    }
    Record result(std::move(record));
    detail::Sha256 hash;
    hash.add(text.data(), text.size());
    result.file_sha256_ = hash.hexadecimal();
    result.source_ = name;
    result.first_stamp_ = std::move(first_stamp);
    return result;
}

Record read_record(const std::string& path) {
    std::error_code unknown;
    std::ifstream file(path, std::ios::binary);
    std::string text;
    // Reading a folder throws an exception of the stream library's own on some systems.
    if (std::filesystem::is_directory(path, unknown)) file.setstate(std::ios::failbit);
    if (file) text.assign(std::istreambuf_iterator<char>(file), std::istreambuf_iterator<char>());
    if (!file || file.bad())
        throw Error(error_code::file_not_readable, "path is '" + path + "', which cannot be opened and read; check that the file "
                                                   "exists and may be read");
    return read_record_text(text, path);
}

}  // namespace v0
}  // namespace tauwright
