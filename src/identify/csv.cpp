#include "identify/csv.hpp"

#include <algorithm>

#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

CsvReader::CsvReader(std::string_view text, std::string name) : rest_(text), name_(std::move(name)) {
    if (rest_.starts_with("\xEF\xBB\xBF")) rest_.remove_prefix(3);
    if (const std::size_t nul = rest_.find('\0'); nul != std::string_view::npos)
        throw Error(error_code::file_malformed, name_ + " holds a zero byte at position " + std::to_string(nul) +
                                                    "; it is not a text file: export the record as CSV in UTF-8");
}

std::string CsvReader::place() const { return name_ + ", line " + std::to_string(row_line_); }

std::string_view CsvReader::take_line() noexcept {
    const std::size_t end = std::min(rest_.find_first_of("\r\n"), rest_.size());
    const std::string_view line = rest_.substr(0, end);
    rest_.remove_prefix(end);
    skip_line_end();
    return line;
}

void CsvReader::skip_line_end() noexcept {
    if (rest_.empty()) return;
    if (rest_.starts_with("\r\n")) rest_.remove_prefix(1);
    rest_.remove_prefix(1);
    ++line_;
}

std::string_view CsvReader::plain_field() noexcept {
    const std::size_t end = std::min(rest_.find_first_of(",\r\n"), rest_.size());
    const std::string_view field = rest_.substr(0, end);
    rest_.remove_prefix(end);
    return field;
}

std::string_view CsvReader::quoted_field() {
    std::string text;
    for (;;) {
        rest_.remove_prefix(1);  // the opening quote, or the second of a pair
        const std::size_t end = rest_.find('"');
        if (end == std::string_view::npos)
            throw Error(error_code::file_malformed, place() + ": a quoted field is not closed; add the closing quote");
        line_ += static_cast<std::size_t>(std::count(rest_.begin(), rest_.begin() + static_cast<std::ptrdiff_t>(end), '\n'));
        text.append(rest_.substr(0, end));
        rest_.remove_prefix(end + 1);
        if (rest_.empty() || rest_.front() != '"') break;
        text += '"';
    }
    if (!rest_.empty() && rest_.find_first_of(",\r\n") != 0)
        throw Error(error_code::file_malformed, place() + ": text follows a closing quote; end the field with a comma");
    unescaped_.push_back(std::move(text));
    return unescaped_.back();
}

bool CsvReader::next_row(std::vector<std::string_view>& fields) {
    fields.clear();
    unescaped_.clear();
    unescaped_.reserve(64);  // views into its strings must survive the row
    while (!rest_.empty()) {
        row_line_ = line_;
        if (rest_.front() == '#') {
            comments_.push_back(take_line().substr(1));
            continue;
        }
        if (rest_.find_first_of("\r\n") == 0) {
            skip_line_end();
            continue;
        }
        for (;;) {
            if (unescaped_.size() == 64)
                throw Error(error_code::file_malformed, place() + ": more than 64 quoted fields; is this a plant record?");
            fields.push_back(!rest_.empty() && rest_.front() == '"' ? quoted_field() : plain_field());
            if (rest_.empty() || rest_.front() != ',') break;
            rest_.remove_prefix(1);
        }
        skip_line_end();
        return true;
    }
    return false;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
