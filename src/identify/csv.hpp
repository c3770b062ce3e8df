// RFC 4180 rows with their line numbers, comment lines set apart.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Walks through CSV text one row at a time; quoted fields may hold commas, quotes and line ends.
class CsvReader {
public:
    CsvReader(std::string_view text, std::string name);

    /// The next row that is neither empty nor a comment; false at the end. Fields stay valid until
    /// the next call. Throws `file_malformed` for quotes that do not close or stray characters.
    bool next_row(std::vector<std::string_view>& fields);
    /// Line on which the row last read begins, from 1.
    std::size_t line() const noexcept { return row_line_; }
    /// The comment lines met so far, without the #.
    const std::vector<std::string_view>& comments() const noexcept { return comments_; }
    /// "name, line n" for messages.
    std::string place() const;

private:
    std::string_view take_line() noexcept;
    std::string_view quoted_field();
    std::string_view plain_field() noexcept;
    void skip_line_end() noexcept;

    std::string_view rest_;
    std::string name_;
    std::size_t line_ = 1, row_line_ = 0;
    std::vector<std::string_view> comments_;
    std::vector<std::string> unescaped_;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
